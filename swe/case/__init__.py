"""The case file: one schema that drives reading, messages, the reference document and the template."""

from swe.case.case import Case, place_of
from swe.case.reading import parse_case, read_case

__all__ = ["Case", "parse_case", "place_of", "read_case"]
