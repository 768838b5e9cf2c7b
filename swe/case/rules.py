"""Rules between keys. The docstring of a rule is its sentence in the reference document.

A rule judges only keys without a mistake of their own, and notes each broken rule at the key that the user would change.
"""

from __future__ import annotations

from swe.case.case import SECTIONS
from swe.case.draft import Draft
from swe.case.schema import DEPTH, EXPONENTIAL, SPACING
from swe.case.settling import tables
from swe.case.units import TIME, show
from swe.case.words import toml

MULTIPLE = 1e-9
"""Relative deviation from a whole multiple that is still round-off of decimal units."""

INTERVALS = ("output.fields_every", "output.stations_every", "output.ledger_every", "checkpoint.every")


def _path(name: str) -> tuple:
    return tuple(name.split("."))


def one_depth(draft: Draft) -> None:
    """Without a mesh file, `depth` has exactly one of `constant`, `grid` and `soundings`."""
    names = ("depth.constant", "depth.grid", "depth.soundings")
    if draft.given("mesh.file") or not draft.sound("depth"):
        return
    given = [_path(name) for name in names if draft.given(name)]
    allowed = "exactly one of constant, grid, soundings"
    if not given and draft.sound(*names):
        draft.wrong(("depth", "constant"), "missing, and so are grid and soundings", allowed, 'for example: constant = "40 m"')
    for path in given[1:]:
        draft.wrong(path, f"a second source of the depth beside {given[0][1]}", allowed, "leave one out")


def least_depth(draft: Draft) -> None:
    """`depth.least` is not above `depth.constant`."""
    if draft.sound("depth.least", "depth.constant") and draft.value("depth.constant"):
        least, constant = draft.value("depth.least"), draft.value("depth.constant")
        if least is not None and least > constant:
            draft.wrong(("depth", "least"), "above the constant depth", f"at most {DEPTH.show(constant)}")


def one_spacing(draft: Draft) -> None:
    """Without a mesh file, `mesh` has either `spacing` or `finest` with `coarsest`."""
    names = ("mesh.spacing", "mesh.finest")
    if draft.given("mesh.file") or not draft.sound("mesh"):
        return
    given = [name for name in names if draft.given(name)]
    allowed = "either spacing, or finest with coarsest and grade_by"
    if not given and draft.sound(*names):
        draft.wrong(_path(names[0]), "missing, and so is finest", allowed, 'for example: spacing = "2 km"')
    elif len(given) == 2:
        draft.wrong(_path(names[0]), "constant spacing beside graded spacing (finest)", allowed, "leave one out")


def graded_spacings(draft: Draft) -> None:
    """`mesh.finest` is below `mesh.coarsest`, and `mesh.area_spacing` lies between them."""
    finest, coarsest, area = (draft.value(f"mesh.{name}") for name in ("finest", "coarsest", "area_spacing"))
    if not draft.sound("mesh.finest", "mesh.coarsest") or finest is None or coarsest is None:
        return
    if finest >= coarsest:
        draft.wrong(
            ("mesh", "finest"), "not below coarsest", f"below {SPACING.show(coarsest)}", "for cells of one size use spacing"
        )
    elif draft.sound("mesh.area_spacing") and area is not None and not finest <= area <= coarsest:
        draft.wrong(
            ("mesh", "area_spacing"),
            "not between finest and coarsest",
            f"from {SPACING.show(finest)} to {SPACING.show(coarsest)}",
        )


def areas_and_grading(draft: Draft) -> None:
    """`mesh.areas` is given exactly when `mesh.grade_by` has "areas"."""
    grade_by = draft.value("mesh.grade_by")
    if not draft.sound("mesh.grade_by", "mesh.areas") or grade_by is None:
        return
    if "areas" in grade_by and draft.value("mesh.areas") is None:
        draft.wrong(("mesh", "areas"), 'missing; needed with "areas" in grade_by', hint='for example: areas = "areas.geojson"')
    elif "areas" not in grade_by and draft.value("mesh.areas") is not None:
        draft.wrong(
            ("mesh", "areas"), 'not used in this case: grade_by has no "areas"', hint='add "areas" to grade_by, or leave it out'
        )


def grading_by_depth(draft: Draft) -> None:
    """`mesh.grade_by` has "depth" only where the depth varies."""
    if draft.sound("mesh.grade_by", "depth.constant") and "depth" in (draft.value("mesh.grade_by") or ()):
        if draft.value("depth.constant") is not None:
            draft.wrong(
                ("mesh", "grade_by"), "graded by a depth that is constant", '"coast", "areas"', "give depth as grid or soundings"
            )


def rotation_fits(draft: Draft) -> None:
    """`earth.rotation` is "sphere" only where `basin.surface` is not "plane"."""
    if draft.sound("earth.rotation", "basin.surface"):
        if draft.value("earth.rotation") == "sphere" and draft.value("basin.surface") == "plane":
            draft.wrong(
                ("earth", "rotation"),
                "a plane has no latitudes",
                '"none", "f-plane" with [basin] surface = "plane"',
                'take "f-plane" and a latitude',
            )


def operator_fits(draft: Draft) -> None:
    """`method.operator` is "jacobian" with the one-stage stepper."""
    if draft.sound("method.stepper", "method.operator"):
        if draft.value("method.stepper") == "one-stage" and draft.value("method.operator") == "wave":
            draft.wrong(
                ("method", "operator"),
                "the one-stage stepper is of second order with the Jacobian only",
                '"jacobian" with stepper = "one-stage"',
                'leave it out, or take stepper = "two-stage"',
            )


def action_fits(draft: Draft) -> None:
    """`method.action` is "lanczos" or "chebyshev" only with the wave operator, which is skew."""
    if draft.sound("method.operator", "method.action") and draft.value("method.operator") == "jacobian":
        if draft.value("method.action") in ("lanczos", "chebyshev"):
            draft.wrong(
                ("method", "action"),
                "needs an operator that is skew, and the Jacobian is not",
                '"arnoldi" with operator = "jacobian"',
                'leave it out, or take operator = "wave"',
            )


def one_overlap(draft: Draft) -> None:
    """With an exponential stepper, `subdomains` has exactly one of `overlap` and `overlap_tolerance`."""
    names = ("subdomains.overlap", "subdomains.overlap_tolerance")
    if not draft.sound("method.stepper", "subdomains") or draft.value("method.stepper") not in EXPONENTIAL:
        return
    given = [name for name in names if draft.given(name)]
    allowed = "exactly one of overlap (layers), overlap_tolerance"
    if not given and draft.sound(*names):
        draft.wrong(_path(names[0]), "missing, and so is overlap_tolerance", allowed, "for example: overlap_tolerance = 1e-6")
    elif len(given) == 2:
        draft.wrong(_path(names[1]), "given beside overlap", allowed, "leave one out")


def whole_steps(draft: Draft) -> None:
    """`time.duration` and all intervals are whole multiples of `time.step`, one step at least."""
    step = draft.value("time.step")
    if step is None or not draft.sound("time.step"):
        return
    for name in ("time.duration", *INTERVALS):
        value, path = draft.value(name), _path(name)
        if value is None or not draft.sound(name) or not draft.given(name):
            continue
        times = max(round(value / step), 1)
        if abs(value / step - times) > MULTIPLE * times:
            what = "shorter than the step of" if value < step else "not a whole multiple of the step of"
            hint = f"the nearest is {toml(show(times * step, TIME))}"
            draft.wrong(path, f"{what} {show(step, TIME)}", "whole multiples of the step, one at least", hint)


def names_differ(draft: Draft) -> None:
    """Station names differ, and so do names of open boundaries."""
    for kind, words in (("station", "station"), ("open", "open boundary")):
        first: dict[str, int] = {}
        for table in tables(draft, SECTIONS[kind]):
            path = (*table, "name")
            name = draft.values.get(path)
            if name in first and not draft.is_broken(path):
                draft.wrong(path, f"{words} {first[name] + 1} has the same name", f"a name of its own for each {words}")
            elif name is not None:
                first[name] = table[1]


def one_friction(draft: Draft) -> None:
    """`drag` has `bottom` or `manning`, not both."""
    if draft.given("drag.bottom") and draft.given("drag.manning") and draft.sound("drag.bottom", "drag.manning"):
        draft.wrong(
            ("drag", "manning"), "a second law of bottom friction beside bottom", "either bottom or manning", "leave one out"
        )


def law_of_the_wind(draft: Draft) -> None:
    """`wind.law` is given exactly when `wind.file` or `storm.track` is."""
    blows = draft.given("wind.file") or draft.given("storm.track")
    if not draft.sound("wind.law", "wind.file", "storm.track"):
        return
    if blows and not draft.given("wind.law"):
        draft.wrong(
            ("wind", "law"), "missing; a wind needs a law of its drag on the water", hint='for example: law = "garratt-1977"'
        )
    elif draft.given("wind.law") and not blows:
        draft.wrong(
            ("wind", "law"), "not used in this case: the stress is given", hint="leave it out, or give [wind] file or [storm]"
        )


def equilibrium_on_the_sphere(draft: Draft) -> None:
    """`tide.equilibrium` is given only for a basin on the sphere."""
    path = ("tide", "equilibrium")
    if draft.given("tide.equilibrium") and draft.sound("basin.surface") and draft.value("basin.surface") == "plane":
        draft.wrong(path, "not used in this case: the basin lies on a plane", hint="drive it from open boundaries: [[open]]")


def positions(draft: Draft) -> None:
    """Stations and the hump have `x` and `y` on a plane, `lon` and `lat` on the sphere."""
    hump = draft.sound("start.kind") and draft.value("start.kind") == "hump"
    for table in [("start",)] * hump + _stations(draft):
        if not any(draft.is_broken((*table, name)) for name in ("x", "y", "lon", "lat")):
            _position(draft, table)


def _position(draft: Draft, table: tuple) -> None:
    surface = draft.value("basin.surface") if draft.sound("basin.surface") else None
    given = [name for name in ("x", "y", "lon", "lat") if (*table, name) in draft.values]
    pairs = {"plane": ("x", "y"), "sphere": ("lon", "lat")}
    wanted = pairs.get(surface) or (pairs["sphere"] if given and set(given) <= {"lon", "lat"} else pairs["plane"])
    allowed = " and ".join(wanted) + (
        f' with [basin] surface = "{surface}"' if surface else "; with a mesh file of a sphere lon and lat"
    )
    for name in given:
        if name not in wanted:
            what = f"not a coordinate on the {surface}" if surface else "x, y and lon, lat mixed"
            draft.wrong((*table, name), what, allowed)
    for name in wanted:
        if name not in given:
            example = SECTIONS[table[0]].keys[name].example
            draft.wrong((*table, name), "missing", allowed, f"for example: {name} = {example}")


def stations_and_interval(draft: Draft) -> None:
    """`output.stations_every` is given exactly when there are stations."""
    if not draft.sound("output.stations_every", "station"):
        return
    stations, every = _stations(draft), draft.value("output.stations_every")
    if stations and every is None:
        draft.wrong(
            ("output", "stations_every"), "missing; needed with [[station]]", hint='for example: stations_every = "10 min"'
        )
    elif every is not None and not stations:
        draft.wrong(
            ("output", "stations_every"),
            "not used in this case: there are no stations",
            hint="leave it out, or add a [[station]]",
        )


def _stations(draft: Draft) -> list[tuple]:
    return tables(draft, SECTIONS["station"])


RULES = (
    one_depth,
    least_depth,
    one_spacing,
    graded_spacings,
    areas_and_grading,
    grading_by_depth,
    rotation_fits,
    operator_fits,
    action_fits,
    one_overlap,
    whole_steps,
    names_differ,
    one_friction,
    law_of_the_wind,
    equilibrium_on_the_sphere,
    positions,
    stations_and_interval,
)
"""Checked in this order."""
