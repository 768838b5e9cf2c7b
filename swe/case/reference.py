"""The reference document of the case file (docs/case-file.md), made from the schema, the units and the rules."""

from __future__ import annotations

from swe.case.case import SECTIONS
from swe.case.keys import OPTIONAL, REQUIRED, Key, Same, Section, When
from swe.case.rules import RULES
from swe.case.template import SHORTEST_CASE, SQUARE_COAST
from swe.case.units import DIMENSIONS
from swe.case.words import name_of

OPENING = """\
# The case file

<!-- Made by scripts/case_reference from swe/case; a test fails when it is stale. Do not edit. -->

One TOML file describes one case. `swe new CASE` writes one to start from, with every key and its meaning; `swe check CASE`
names all mistakes of a file at once, each with its line.

- A quantity is text with a number and a unit (`"4 km"`), or a plain number in the base unit (`4000`).
- A date is a TOML date with time or the same as ISO 8601 text; without an offset from UTC it is UTC.
- Files are named from the folder of the case file.
- Nothing is coerced: `30.5` is no whole number, `"yes"` and `1` are not `true`.
- What sets the accuracy of a run (spacing, step, tolerances) has no default. Other defaults are common choices; `swe check`
  shows all of them.
- A key that nothing reads in a case is a mistake, and so is an unknown one.

## The shortest case

Ten lines, and a coast named in them:

```toml
{case}```

`coast.geojson`:

```json
{coast}```

## Units

| dimension | units | plain numbers |
|---|---|---|
{units}

Powers may be written `m2/s`, `m^2/s`, `m**2/s` or `m2 s-1`.
"""


def reference_text() -> str:
    """Return the reference document as Markdown. Not collective."""
    units = "\n".join(f"| {item.name} | {item.units} | {item.base} |" for item in DIMENSIONS)
    parts = [OPENING.format(case=SHORTEST_CASE, coast=SQUARE_COAST, units=units)]
    parts += [_section_text(section) for section in SECTIONS.values()]
    parts.append("## Rules between keys\n\n" + "".join(f"- {_one_line(rule.__doc__)}\n" for rule in RULES))
    return "\n".join(parts)


def _section_text(section: Section) -> str:
    """Return the table of one section."""
    head = f"## `{section.header}`: {section.meaning}" if section.name else "## Above all sections"
    rows = [_row(f"`{name}`", key.kind.allowed(), _need_text(key), key.meaning) for name, key in section.keys.items()]
    return "\n".join([head, "", "| key | value | default | meaning |", "|---|---|---|---|", *rows]) + "\n"


def _need_text(key: Key) -> str:
    """Return what holds when the key is not given."""
    if not isinstance(key.need, When):
        return _plain_need(key, key.need)
    groups: dict[str, list] = {}
    for value, need in key.need.by.items():
        groups.setdefault(_plain_need(key, need), []).append(value)
    return "; ".join(f"{text} {key.need.condition(values)}" for text, values in groups.items()) + "; else not used"


def _plain_need(key: Key, need) -> str:
    if need in (REQUIRED, OPTIONAL):
        return need.value
    return f"as {name_of(need.key)}" if isinstance(need, Same) else key.kind.write(need)


def _one_line(text: str) -> str:
    return " ".join(text.split())


def _row(*cells: str) -> str:
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |"
