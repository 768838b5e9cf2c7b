"""What the schema says about one key of the case file: kind, meaning, and when it is needed.

The schema is a set of frozen dataclasses; each field carries a `Key` as metadata. Reading, messages, the reference
document and the template are driven by it, so a key is described once.
"""

from __future__ import annotations

from dataclasses import dataclass, field, fields
from enum import Enum

from swe.case.kinds import Kind
from swe.case.words import name_of, toml


class Need(Enum):
    """REQUIRED: the user must give it. OPTIONAL: without it the value is None, and the meaning says what that does."""

    REQUIRED = "required"
    OPTIONAL = "optional"


class Presence(Enum):
    """What `When` may ask of the other key instead of its value."""

    ABSENT = "absent"
    GIVEN = "given"


REQUIRED, OPTIONAL = Need.REQUIRED, Need.OPTIONAL
ABSENT, GIVEN = Presence.ABSENT, Presence.GIVEN


@dataclass(frozen=True)
class Same:
    """The default is the value of another key, named "section.key"."""

    key: str


@dataclass(frozen=True, eq=False)
class When:
    """A key whose need depends on one other key, named "section.key".

    `by` maps a value of the other key (or ABSENT, or GIVEN: any value) to REQUIRED, OPTIONAL or a default. With a value
    that is not in `by` nothing reads the key: it must not be given.
    """

    on: str
    by: dict

    def need(self, other):
        """Return what holds while the other key has the value `other` (None: absent), None for "not used". Not collective."""
        if other is None:
            return self.by.get(ABSENT)
        return self.by.get(other, self.by.get(GIVEN))

    def condition(self, values) -> str:
        """Return when the other key has one of `values`, keys of `by`: 'with [earth] rotation = "f-plane"'. Not collective."""
        other = name_of(self.on)
        words = [toml(value) for value in values if not isinstance(value, Presence)]
        if words:
            return f"with {other} = {' or '.join(words)}"
        return f"without {other}" if ABSENT in values else f"with {other}"


@dataclass(frozen=True, eq=False)
class Key:
    """One key: kind of value, meaning (a sentence without full stop), need or default, and an example in TOML."""

    kind: Kind
    meaning: str
    need: object
    example: str


@dataclass(frozen=True, eq=False)
class Section:
    """One table of the case file, "" for the keys above all tables.

    name        of the table; attribute is its name in `Case`
    cls         dataclass of its keys
    meaning     a phrase
    repeated    an array of tables
    keys        name -> Key
    """

    name: str
    attribute: str
    cls: type
    meaning: str
    repeated: bool
    keys: dict[str, Key]

    @property
    def header(self) -> str:
        return f"[[{self.name}]]" if self.repeated else f"[{self.name}]"


def key(kind: Kind, meaning: str, need, example: str = ""):
    """Return a dataclass field for a key. Not collective."""
    return field(metadata={"key": Key(kind, meaning, need, example)})


def section(cls: type, meaning: str, repeated: str = ""):
    """Return a dataclass field for a table; `repeated`: its name, where it may stand several times. Not collective."""
    return field(metadata={"section": cls, "meaning": meaning, "repeated": repeated})


def keys_of(cls: type) -> dict[str, Key]:
    """Return name -> Key of the fields of `cls` that are keys. Not collective."""
    return {item.name: item.metadata["key"] for item in fields(cls) if "key" in item.metadata}


def sections_of(cls: type) -> tuple[Section, ...]:
    """Return the sections of a case class, in order, the keys above all tables first. Not collective."""
    made = [Section("", "", cls, "above all tables", False, keys_of(cls))]
    for item in fields(cls):
        if "section" in item.metadata:
            part, repeated = item.metadata["section"], item.metadata["repeated"]
            made.append(Section(repeated or item.name, item.name, part, item.metadata["meaning"], bool(repeated), keys_of(part)))
    return tuple(made)
