"""Names and units of all variables against the CF standard name table that compliance-checker carries (version 93)."""

import itertools
from importlib import resources
from xml.etree import ElementTree

import pytest
from cf_units import Unit

from swe.errors import InputError
from swe.output.catalogue import DATUMS, ledger_quantities, mesh_quantities, station_quantities


@pytest.fixture(scope="module")
def table():
    """Canonical units by standard name, and the set of aliases."""
    text = resources.files("compliance_checker").joinpath("data/cf-standard-name-table.xml").read_text(encoding="utf-8")
    root = ElementTree.fromstring(text)
    entries = {entry.get("id"): entry.findtext("canonical_units") for entry in root.iter("entry")}
    return entries, {alias.get("id") for alias in root.iter("alias")}


def everything():
    for spherical, datum in itertools.product((True, False), DATUMS):
        yield from mesh_quantities(spherical, datum).values()
        yield from station_quantities(spherical, datum).values()
    yield from ledger_quantities().values()


def test_standard_names_are_canonical_and_units_convert(table):
    entries, aliases = table
    assert len(entries) > 4000 and "sea_surface_height_above_sea_level" in aliases  # the table is the real one
    named = [quantity for quantity in everything() if quantity.standard_name]
    assert len(named) > 20
    for quantity in named:
        assert quantity.standard_name in entries and quantity.standard_name not in aliases, quantity
        assert Unit(quantity.units) == Unit(entries[quantity.standard_name]), quantity


def test_every_quantity_has_a_meaning_and_a_unit_that_udunits_knows():
    for quantity in everything():
        assert len(quantity.long_name) > 5 and quantity.long_name != quantity.name
        Unit(quantity.units)  # raises ValueError for a unit it does not know


def test_the_datum_chooses_the_level():
    found = {datum: mesh_quantities(True, datum)["level"].standard_name for datum in DATUMS}
    assert found["geoid"] == "sea_surface_height_above_geoid"
    assert found["lake"] == "water_surface_height_above_reference_datum"
    assert len(set(found.values())) == len(DATUMS)


def test_a_lake_has_no_names_of_the_sea():
    for quantity in mesh_quantities(False, "lake").values():
        assert "sea" not in (quantity.standard_name or "")


def test_components_follow_the_surface():
    assert mesh_quantities(True, "geoid")["east_velocity"].standard_name == "barotropic_eastward_sea_water_velocity"
    assert mesh_quantities(False, "geoid")["y_velocity"].standard_name == "barotropic_sea_water_y_velocity"
    assert "x_velocity" not in mesh_quantities(True, "geoid")


def test_no_standard_name_for_the_normal_component():
    assert "standard_name" not in mesh_quantities(True, "geoid")["normal_velocity"].attributes()


def test_an_unknown_datum_is_refused_with_those_allowed():
    with pytest.raises(InputError, match="'chart' is not known; allowed are .*geoid.*lake"):
        mesh_quantities(True, "chart")
