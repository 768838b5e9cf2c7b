"""What holds for keys that the file does not give, and which given keys nothing would read."""

from __future__ import annotations

from swe.case.case import SECTIONS
from swe.case.draft import Draft
from swe.case.keys import ABSENT, GIVEN, OPTIONAL, REQUIRED, Key, Same, Section, When


def settle(draft: Draft) -> None:
    """Fill in defaults in the order of the schema; note missing keys and keys that are not used. Not collective."""
    for section in SECTIONS.values():
        for table in tables(draft, section):
            for name, key in section.keys.items():
                path = (*table, name)
                if not draft.is_broken(path):
                    _settle_key(draft, path, key)


def tables(draft: Draft, section: Section) -> list[tuple]:
    """Return the paths of the tables of a section: one, or as many as the file has where it is repeated. Not collective."""
    if not section.repeated:
        return [(section.name,) if section.name else ()]
    return sorted(path for path in draft.values if path[0] == section.name and len(path) == 2)


def _settle_key(draft: Draft, path: tuple, key: Key) -> None:
    need, known = _need(draft, key)
    given = path in draft.values
    if not known:
        return
    if need is None and given:
        draft.wrong(
            path, "not used in this case", f"only {key.need.condition(key.need.by)}", "leave it out, or change the other key"
        )
        # For all others it now counts as absent, so that keys that hang on it are named as well.
        del draft.written[path], draft.values[path]
        draft.broken.remove(path)
    elif need is REQUIRED and not given:
        _missing(draft, path, key)
    elif need is not None and need is not OPTIONAL and not given:
        _default(draft, path, need)


def _need(draft: Draft, key: Key) -> tuple[object, bool]:
    """Return what holds for the key, and whether that can be known: the key that it depends on may be broken."""
    when = key.need
    if not isinstance(when, When):
        return when, True
    if draft.sound(when.on):
        return when.need(draft.value(when.on)), True
    return when.need(GIVEN), draft.given(when.on) and set(when.by) <= {ABSENT, GIVEN}


def _missing(draft: Draft, path: tuple, key: Key) -> None:
    because = ""
    if isinstance(key.need, When):
        because = f"; needed {key.need.condition([value for value, need in key.need.by.items() if need is REQUIRED])}"
    draft.wrong(path, f"missing{because}", key.kind.allowed(), f"for example: {path[-1]} = {key.example}")


def _default(draft: Draft, path: tuple, need) -> None:
    if not isinstance(need, Same):
        draft.values[path] = need
    elif draft.sound(need.key) and draft.value(need.key) is not None:
        draft.values[path] = draft.value(need.key)
