"""Units of the case file: "4 km" becomes 4000.0, and back for people.

A quantity is a number and a unit, value = number * factor, in the base unit of its dimension: SI, but degrees for angles,
as charts have them. The nautical mile is 1852 m and the knot one an hour (SI brochure, 8th edition, 2006, table 8).
Factors are multiplied in decimal arithmetic and rounded once, so that "0.1 mm" is the same double as 0.0001.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal

QUANTITY = re.compile(r"([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,4})?)\s*(.*)", re.DOTALL)
"""A number, then whatever stands behind it."""

WORDS = {
    "metre": "m",
    "meter": "m",
    "kilometre": "km",
    "kilometer": "km",
    "millimetre": "mm",
    "millimeter": "mm",
    "second": "s",
    "sec": "s",
    "minute": "min",
    "hour": "h",
    "hr": "h",
    "day": "d",
    "degree": "deg",
    "°": "deg",
    "radian": "rad",
    "knot": "kn",
    "pascal": "Pa",
}
"""Units as people also write them, singular, for hints."""

SIGNIFICANT = 6
"""A number for people has at most this many digits in a larger or smaller unit than the base unit; arbitrary."""


class UnitMistake(ValueError):
    """Text that is not a quantity of the wanted dimension; `hint` says what to write instead."""

    def __init__(self, what: str, hint: str = ""):
        super().__init__(what)
        self.hint = hint


@dataclass(frozen=True, eq=False)
class Dimension:
    """A physical dimension.

    name      its word in messages
    base      unit of plain numbers
    factors   unit -> factor to the base unit
    shown     units for people, largest first, each with the least size (in the base unit) that is shown in it
    """

    name: str
    base: str
    factors: dict[str, Decimal]
    shown: tuple[tuple[str, float], ...]

    @property
    def units(self) -> str:
        return ", ".join(self.factors)


def _factors(**factors) -> dict[str, Decimal]:
    return {unit: Decimal(factor) for unit, factor in factors.items()}


LENGTH = Dimension(
    "length",
    "m",
    _factors(mm="0.001", cm="0.01", m="1", km="1000", nmi="1852"),
    (("km", 1e3), ("m", 1e-2), ("mm", 0.0)),
)
TIME = Dimension(
    "time",
    "s",
    _factors(s="1", min="60", h="3600", d="86400"),
    (("d", 86400.0), ("h", 3600.0), ("min", 60.0), ("s", 0.0)),
)
ANGLE = Dimension("angle", "deg", {"deg": Decimal(1), "rad": Decimal("57.295779513082320876798154814")}, (("deg", 0.0),))
SPEED = Dimension(
    "speed",
    "m/s",
    {"m/s": Decimal(1), "cm/s": Decimal("0.01"), "km/h": Decimal(1000) / 3600, "kn": Decimal(1852) / 3600},
    (("m/s", 0.0),),
)
ACCELERATION = Dimension("acceleration", "m/s2", {"m/s2": Decimal(1), "cm/s2": Decimal("0.01")}, (("m/s2", 0.0),))
STRESS = Dimension(
    "stress",
    "Pa",
    {"Pa": Decimal(1), "N/m2": Decimal(1), "hPa": Decimal(100), "mbar": Decimal(100)},
    (("Pa", 0.0),),
)
DENSITY = Dimension("density", "kg/m3", {"kg/m3": Decimal(1), "g/cm3": Decimal(1000)}, (("kg/m3", 0.0),))
VISCOSITY = Dimension("viscosity", "m2/s", {"m2/s": Decimal(1), "cm2/s": Decimal("0.0001")}, (("m2/s", 0.0),))

DIMENSIONS = (LENGTH, TIME, ANGLE, SPEED, ACCELERATION, STRESS, DENSITY, VISCOSITY)


def parse(text: str, dimension: Dimension) -> float:
    """Return the value of `text`, such as "4 km", in the base unit. Raises UnitMistake. Not collective."""
    found = QUANTITY.fullmatch(text.strip())
    if not found:
        raise UnitMistake(f"no number and unit of {dimension.name}", _hint_for_number(text, dimension))
    number, unit = found.groups()
    if not unit:
        raise UnitMistake("no unit behind the number", f'"{number} {dimension.base}", or {number} without quotes')
    factor = dimension.factors.get(_plain(unit))
    if factor is None:
        raise _unknown(number, unit, dimension)
    return float(Decimal(number) * factor)


def show(value: float, dimension: Dimension) -> str:
    """Return `value` (base unit) with a unit that people like; `parse` gives exactly `value` back. Not collective."""
    for unit, least in dimension.shown if value else ():
        number = plain_number(float(Decimal(repr(value)) / dimension.factors[unit]))
        text = f"{number} {unit}"
        if abs(value) >= least and len(number.strip("-").replace(".", "")) <= SIGNIFICANT and parse(text, dimension) == value:
            return text
    return f"{plain_number(value)} {dimension.base}"


def plain_number(value: float) -> str:
    """Return the shortest text that is exactly `value`, without a point behind whole numbers. Not collective."""
    return exact(value + 0.0).removesuffix(".0")


def exact(value: float) -> str:
    """Return the shortest text that is exactly `value`: 1e-5 where Python writes 1e-05. Not collective."""
    return re.sub(r"e([+-])0(\d)", r"e\1\2", repr(value))


def _plain(unit: str) -> str:
    """Return the unit in the table's spelling: "m^2/s", "m**2/s", "m² s-1" and "m2 / s" are all m2/s."""
    unit = unit.replace("**", "").replace("^", "").replace("²", "2").replace("³", "3")
    parts = unit.replace("/", " /").replace("/ ", "/").split()
    return "".join(_over(part) for part in parts)


def _over(part: str) -> str:
    """Return a factor with negative power as a divisor: "s-1" is "/s", "m-3" is "/m3"."""
    found = re.fullmatch(r"([A-Za-z]+)-(\d)", part)
    if not found:
        return part
    return f"/{found[1]}" + ("" if found[2] == "1" else found[2])


def _unknown(number: str, unit: str, dimension: Dimension) -> UnitMistake:
    """Return the mistake of a unit that is not one of the dimension's."""
    if re.match(r"[,'_]?\d", unit):
        return UnitMistake("the number is not plain", "digits with a decimal point, no commas or spaces within")
    meant = _meant(unit, dimension)
    if meant:
        return UnitMistake(f'unknown unit "{unit}"', f'did you mean "{number} {meant}"?')
    for other in DIMENSIONS:
        if _plain(unit) in other.factors or _meant(unit, other):
            return UnitMistake(f'"{unit}" is a unit of {other.name}, not of {dimension.name}')
    return UnitMistake(f'unknown unit "{unit}"')


def _meant(unit: str, dimension: Dimension) -> str:
    """Return the unit that was probably meant, "" when there is none near."""
    word = WORDS.get(unit.lower().removesuffix("s")) or WORDS.get(unit.lower())
    if word in dimension.factors:
        return word
    lower = {known.lower(): known for known in dimension.factors}
    for spelling in (unit.lower(), unit.lower().removesuffix("s"), unit.lower().rstrip(".")):
        if spelling in lower:
            return lower[spelling]
    return ""


def _hint_for_number(text: str, dimension: Dimension) -> str:
    return f'write a number, then a unit: "1 {dimension.base}"' if text.strip() else "the text is empty"
