"""Reading a case file: all mistakes at once, each with its line, and nothing coerced.

1  read the text and let `tomllib` parse it; a syntax error ends here, with line and column
2  find the line of every key
3  convert each given value by the kind of its key; note unknown sections and keys
4  settle what is not given: required, default, or not used in this case
5  check the rules between keys
"""

from __future__ import annotations

import os
import re
import tomllib
from pathlib import Path

from swe.case.case import SECTIONS, Case
from swe.case.draft import Draft
from swe.case.keys import Section
from swe.case.lines import find_lines
from swe.case.rules import RULES
from swe.case.settling import settle, tables
from swe.case.words import Wrong, nearest, sort_of
from swe.errors import CaseError, FileError


def read_case(path: str | Path) -> Case:
    """Return the case of a TOML file.

    Raises CaseError with every mistake of the file, FileError when the file itself cannot be read. Not collective.
    """
    try:
        data = Path(path).read_bytes()
    except OSError as failure:
        what = f"{path}: the case file cannot be read: {failure.strerror}"
        raise FileError(f"{what}; allowed: the path of a TOML file; a new one is made by: swe new {path}") from None
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as failure:
        line = data.count(b"\n", 0, failure.start) + 1
        what = f"byte {data[failure.start]:#04x} is not UTF-8"
        raise CaseError([f"{path}:{line}: {what}; allowed: text in UTF-8; save the file in that encoding"]) from None
    return parse_case(text, path)


def parse_case(text: str, path: str | Path) -> Case:
    """Return the case of `text`, the content of a file at `path` (which need not exist). Raises CaseError. Not collective."""
    data = _parsed(text, str(path))
    home = Path(os.path.abspath(path))
    draft = Draft(str(path), home.parent, find_lines(text))
    _convert(draft, data)
    settle(draft)
    for rule in RULES:
        rule(draft)
    if draft.mistakes:
        raise CaseError(draft.all_mistakes())
    return _build(draft, home, text)


# ------------------------------------------------------------------------------------------ 1 syntax


def _parsed(text: str, label: str) -> dict:
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise CaseError(
            [f"{label}: lists or tables nested too deep; allowed: sections with keys; take the nesting out"]
        ) from None
    except ValueError as failure:
        raise CaseError([_syntax_message(text, label, str(failure))]) from None


def _syntax_message(text: str, label: str, failure: str) -> str:
    """Return file:line:column, the parser's words, the line, and what is probably meant."""
    rows = text.replace("\r\n", "\n").split("\n")
    found = re.fullmatch(r"(.*) \(at line (\d+), column (\d+)\)", failure, re.DOTALL)
    if found:
        what, line, column = found[1], int(found[2]), int(found[3])
        where = f"{label}:{line}:{column}"
    else:
        what, line = failure.removesuffix(" (at end of document)"), len(rows)
        where = f"{label}:{line}"
    row = rows[min(line, len(rows)) - 1].strip()
    parts = [f"{where}: not TOML: {what[:1].lower()}{what[1:]}", f"the line reads: {row}" if row else "", _syntax_hint(row, what)]
    return "; ".join(part for part in parts if part)


def _syntax_hint(row: str, what: str) -> str:
    quantity = re.search(r"=\s*([+-]?[\d.]+(?:[eE][+-]?\d+)?)\s*([A-Za-z][^#\"']*?)\s*(?:#.*)?$", row)
    word = re.search(r"=\s*([A-Za-z][\w-]*)\s*(?:#.*)?$", row)
    if quantity:
        return f'write quantities in quotes: "{quantity[1]} {quantity[2]}"'
    if word and word[1].lower() in ("true", "false"):
        return f"write {word[1].lower()}"
    if word:
        return f'write text in quotes: "{word[1]}"'
    if "\\" in row:
        return "write / between folders, or put the text in single quotes"
    if "overwrite" in what or "twice" in what:
        return "the key or table stands there twice: keep one"
    return ""


# ------------------------------------------------------------------------------------------ 3 values


def _convert(draft: Draft, data: dict) -> None:
    """Fill `draft.values` from what the file gives."""
    for name, value in data.items():
        if name in SECTIONS[""].keys:
            _convert_key(draft, SECTIONS[""], (name,), value)
        elif name in SECTIONS:
            _convert_section(draft, SECTIONS[name], value)
        elif isinstance(value, dict) or _are_tables(value):
            _unknown_section(draft, name, f"[{name}]" if isinstance(value, dict) else f"[[{name}]]", data)
        else:
            _unknown_key(draft, SECTIONS[""], (name,), value, data)


def _are_tables(value) -> bool:
    return isinstance(value, list) and bool(value) and all(isinstance(item, dict) for item in value)


def _convert_section(draft: Draft, section: Section, value) -> None:
    path, header = (section.name,), section.header
    if section.repeated and _are_tables(value):
        for index, item in enumerate(value):
            draft.values[(*path, index)] = item
            _convert_keys(draft, section, (*path, index), item)
    elif section.repeated:
        draft.wrong(path, "not an array of tables", hint=f"write {header} above each {section.name}", header=f"[{section.name}]")
    elif isinstance(value, dict):
        _convert_keys(draft, section, path, value)
    elif _are_tables(value):
        draft.wrong(path, "a section that stands once only", hint=f"write {header}", header=f"[{header}]")
    else:
        draft.wrong(path, f"{sort_of(value)}, but a section is needed", hint=f"write {header} and its keys below", header=header)


def _convert_keys(draft: Draft, section: Section, table: tuple, data: dict) -> None:
    for name, value in data.items():
        if name in section.keys:
            _convert_key(draft, section, (*table, name), value)
        else:
            _unknown_key(draft, section, (*table, name), value, data)


def _convert_key(draft: Draft, section: Section, path: tuple, value) -> None:
    kind = section.keys[path[-1]].kind
    draft.written[path] = value
    try:
        draft.values[path] = kind.read(value, draft.folder)
    except Wrong as wrong:
        draft.wrong(path, str(wrong), kind.allowed(), wrong.hint)


def _unknown_section(draft: Draft, name: str, header: str, data: dict) -> None:
    near = nearest(name, SECTIONS)
    draft.wrong((name,), "unknown section", _headers(), f"did you mean {SECTIONS[near].header}?" if near else "", header)
    if near and near not in data:
        draft.broken.add((near,))


def _unknown_key(draft: Draft, section: Section, path: tuple, value, data: dict) -> None:
    """Note an unknown key. The key that was meant counts as broken, so that it is not missed as well."""
    draft.written[path] = value
    near = nearest(path[-1], section.keys)
    homes = [other.header for other in SECTIONS.values() if path[-1] in other.keys and other.name]
    hint = f"did you mean {near}?" if near else f"it is a key of {' and '.join(homes)}" if homes else ""
    draft.wrong(path, "unknown key", ", ".join(section.keys) + ("" if section.name else f", {_headers()}"), hint)
    if near and near not in data:
        draft.broken.add((*path[:-1], near))


def _headers() -> str:
    return ", ".join(section.header for section in SECTIONS.values() if section.name)


# ------------------------------------------------------------------------------------------ the case


def _build(draft: Draft, home: Path, text: str) -> Case:
    made = {}
    for section in SECTIONS.values():
        parts = [{name: draft.values.get((*table, name)) for name in section.keys} for table in tables(draft, section)]
        if not section.name:
            made |= parts[0]
        else:
            built = tuple(section.cls(**part) for part in parts)
            made[section.attribute] = built if section.repeated else built[0]
    return Case(**made, path=home, folder=home.parent, text=text, lines=draft.lines)
