"""Every quantity that a run writes: name, meaning, unit, place, and its name in the CF standard name table.

    place "face", "edge"   an array of the mesh        "station"   a series at a point        "basin"   one number a time

Levels take the standard name that belongs to the datum, and so does the depth of the bed. The table has no name for the
component of velocity along an edge normal, for sums over a basin, or for currents of lakes: those have a long name only.
Extremes are over `window`, a scalar time coordinate whose bounds are the first and the last time looked at.
The velocity of one layer is its depth mean, hence "barotropic".

Source: CF Standard Name Table, version 93 (2026-03-17), canonical names only, no aliases; CF-1.11, appendix E (cell methods).
"""

from __future__ import annotations

from dataclasses import dataclass

from swe.errors import InputError


@dataclass(frozen=True)
class Datum:
    """What levels and depths are measured from: the standard names that go with it; None where the table has none."""

    words: str
    level: str
    depth: str | None
    sea: bool = True


DATUMS = {
    "mean_sea_level": Datum("mean sea level", "sea_surface_height_above_mean_sea_level", "sea_floor_depth_below_mean_sea_level"),
    "geoid": Datum("the geoid", "sea_surface_height_above_geoid", "sea_floor_depth_below_geoid"),
    "geopotential_datum": Datum(
        "the geopotential datum", "sea_surface_height_above_geopotential_datum", "sea_floor_depth_below_geopotential_datum"
    ),
    "reference_ellipsoid": Datum(
        "the reference ellipsoid", "sea_surface_height_above_reference_ellipsoid", "sea_floor_depth_below_reference_ellipsoid"
    ),
    "lake": Datum("the local reference datum", "water_surface_height_above_reference_datum", None, sea=False),
}
"""The datums that a case may name."""


@dataclass(frozen=True)
class Quantity:
    """One variable of a result file.

    cell_methods   how the number stands for its cell and time (CF, section 7.3), or None
    """

    name: str
    long_name: str
    units: str
    place: str
    standard_name: str | None = None
    cell_methods: str | None = None

    def attributes(self) -> dict[str, str]:
        """Return the netCDF attributes, without those that tie it to a mesh. Not collective."""
        optional = {"standard_name": self.standard_name, "cell_methods": self.cell_methods}
        present = {key: value for key, value in optional.items() if value is not None}
        return {"long_name": self.long_name, "units": self.units} | present


def datum_named(name: str) -> Datum:
    """Return the datum of that name. Not collective. Raises InputError when there is none."""
    if name not in DATUMS:
        raise InputError(f"datum: {name!r} is not known; allowed are {', '.join(DATUMS)}")
    return DATUMS[name]


def velocity_names(spherical: bool) -> tuple[str, str]:
    """Return the names of the two components of the current at faces and stations. Not collective."""
    return ("east_velocity", "north_velocity") if spherical else ("x_velocity", "y_velocity")


def mesh_quantities(spherical: bool, datum: str) -> dict[str, Quantity]:
    """Return the quantities on faces and edges by name. Not collective. Raises InputError for an unknown datum."""
    kind = datum_named(datum)
    speed = "sea_water_speed" if kind.sea else None
    mean, highest, lowest = "area: mean time: point", "area: mean window: maximum", "area: mean window: minimum"
    table = [
        Quantity("level", f"water level above {kind.words}", "m", "face", kind.level, mean),
        *(_velocity(spherical, kind, "face", "time: point")),
        Quantity("normal_velocity", "depth-mean velocity along the edge normal", "m s-1", "edge", None, "time: point"),
        Quantity("depth", f"depth of the bed below {kind.words}, positive down", "m", "face", kind.depth, "area: mean"),
        Quantity("highest_level", f"highest water level above {kind.words}", "m", "face", kind.level, highest),
        Quantity("highest_level_time", "time of the highest water level", "s", "face"),
        Quantity("lowest_level", f"lowest water level above {kind.words}", "m", "face", kind.level, lowest),
        Quantity("lowest_level_time", "time of the lowest water level", "s", "face"),
        Quantity("strongest_current", "largest speed of the depth-mean current", "m s-1", "face", speed, "window: maximum"),
        Quantity("strongest_current_time", "time of the largest speed", "s", "face"),
    ]
    return {quantity.name: quantity for quantity in table}


def station_quantities(spherical: bool, datum: str) -> dict[str, Quantity]:
    """Return the quantities at stations by name. Not collective. Raises InputError for an unknown datum."""
    kind = datum_named(datum)
    table = [
        Quantity("level", f"water level above {kind.words}", "m", "station", kind.level, "time: point"),
        *(_velocity(spherical, kind, "station", "time: point")),
        Quantity("depth", f"depth of the bed below {kind.words} at the sampled face, positive down", "m", "station", kind.depth),
    ]
    return {quantity.name: quantity for quantity in table}


def ledger_quantities() -> dict[str, Quantity]:
    """Return the sums and counts of a whole basin by name. Not collective."""
    table = [
        Quantity("mass_anomaly", "mass of the water above the datum", "kg", "basin"),
        Quantity("mass_outflow", "mass that left through open boundaries since the start", "kg", "basin"),
        Quantity(
            "mass_drift", "change of mass that no outflow explains since the start over the mass at the start", "1", "basin"
        ),
        Quantity("kinetic_energy", "kinetic energy of the basin", "J", "basin"),
        Quantity("potential_energy", "available potential energy of the basin, above the datum", "J", "basin"),
        Quantity("potential_enstrophy", "sum of area times depth times half the squared potential vorticity", "m s-2", "basin"),
        Quantity("largest_speed", "largest speed of the current", "m s-1", "basin"),
        Quantity("highest_level", "highest water level above the datum", "m", "basin"),
        Quantity("lowest_level", "lowest water level above the datum", "m", "basin"),
        Quantity("mismatch", "largest difference between overlapping subdomains in the last step, as a level", "m", "basin"),
        Quantity("time_error", "largest change of level by the last stage of the step, an error indicator", "m", "basin"),
        Quantity("repeats", "repeated stages since the start", "1", "basin"),
        Quantity("products", "products of the operator since the start, all subdomains", "1", "basin"),
    ]
    return {quantity.name: quantity for quantity in table}


def _velocity(spherical: bool, kind: Datum, place: str, cell_methods: str) -> list[Quantity]:
    directions = ("eastward", "northward") if spherical else ("x", "y")
    names = [
        f"barotropic_{d}_sea_water_velocity" if spherical else f"barotropic_sea_water_{d}_velocity" for d in directions
    ]  # fmt: skip
    return [
        Quantity(own, f"depth-mean {d} velocity", "m s-1", place, name if kind.sea else None, cell_methods)
        for own, d, name in zip(velocity_names(spherical), directions, names, strict=True)
    ]
