"""Numbers of a case file: quantities with units, plain numbers, whole numbers. Methods as in `kinds.Kind`."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

from swe.case import units
from swe.case.words import Wrong, quoted, sort_of


@dataclass(frozen=True)
class Quantity:
    """A number with a unit, or plain in the base unit. `above`: `low` itself is not allowed."""

    dimension: units.Dimension
    low: float
    high: float
    above: bool = False

    def read(self, value, folder: Path) -> float:
        if isinstance(value, str):
            try:
                number = units.parse(value, self.dimension)
            except units.UnitMistake as mistake:
                raise Wrong(str(mistake), mistake.hint) from None
        else:
            number = _number(value, f"a {self.dimension.name}")
        return _in_range(number, self)

    def allowed(self) -> str:
        dimension = self.dimension
        return f"{dimension.name} {_range_text(self, self.show)}, in {dimension.units}; a plain number is in {dimension.base}"

    def show(self, value: float) -> str:
        return units.show(value, self.dimension)

    def write(self, value: float) -> str:
        return quoted(self.show(value))


@dataclass(frozen=True)
class Number:
    """A number without unit."""

    low: float
    high: float
    above: bool = False

    def read(self, value, folder: Path) -> float:
        return _in_range(_number(value, "a plain number"), self)

    def allowed(self) -> str:
        return f"number {_range_text(self, self.show)}"

    def show(self, value: float) -> str:
        return units.plain_number(value)

    def write(self, value: float) -> str:
        return units.exact(value)


@dataclass(frozen=True)
class Whole:
    """A whole number."""

    low: int
    high: int
    above: bool = False

    def read(self, value, folder: Path) -> int:
        if isinstance(value, bool) or not isinstance(value, int):
            raise Wrong(f"{sort_of(value)}, but a whole number is needed")
        return _in_range(value, self)

    def allowed(self) -> str:
        return f"whole number {_range_text(self, str)}"

    def show(self, value: int) -> str:
        return str(value)

    write = show


def _number(value, wanted: str) -> float:
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        hint = ""
        if isinstance(value, str) and units.QUANTITY.fullmatch(value.strip()):
            hint = "write the number alone, without quotes or unit"
        raise Wrong(f"{sort_of(value)}, but {wanted} is needed", hint)
    try:
        return float(value)
    except OverflowError:
        return math.inf


def _in_range(value, kind):
    """Return `value`, or raise when it lies outside the range of `kind`."""
    if not math.isfinite(value):
        raise Wrong("not a finite number")
    if value < kind.low or (kind.above and value == kind.low):
        raise Wrong("below the range")
    if value > kind.high:
        raise Wrong("above the range")
    return value


def _range_text(kind, show) -> str:
    low, high = show(kind.low), show(kind.high)
    return f"above {low}, at most {high}" if kind.above else f"from {low} to {high}"
