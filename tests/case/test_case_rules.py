"""Needs, keys that are not used, and rules between keys: exact messages."""

import pytest
from case.case_examples import case_text, mistakes, read, without_line

LENGTH = "in mm, cm, m, km, nmi; a plain number is in m"
SPACING = f"length above 0 m, at most 2000 km, {LENGTH}"
DEPTH = f"length above 0 m, at most 12 km, {LENGTH}"
COORDINATE = f"length from -100000 km to 100000 km, {LENGTH}"
LATITUDE = "angle from -90 deg to 90 deg, in deg, rad; a plain number is in deg"
LEAVE = "leave it out, or change the other key"
EXPONENTIAL = '[method] stepper = "two-stage" or "one-stage"'
GRADED = {"mesh.spacing": None, "mesh.finest": '"1 km"', "mesh.coarsest": '"4 km"', "mesh.grade_by": '["coast"]'}
AREAS = {"mesh.areas": '"areas.geojson"', "mesh.area_spacing": '"2 km"'}
HUMP = {"start.kind": '"hump"', "start.height": "1", "start.radius": '"20 km"'}
SPHERE = {"basin.surface": '"sphere"'}
MESH_FILE = {
    "basin.surface": None,
    "basin.coastline": None,
    "depth.constant": None,
    "depth.least": None,
    "mesh.spacing": None,
    "mesh.file": '"mesh.nc"',
}
EXPLICIT = {
    "method.stepper": '"runge-kutta-4"',
    "method.action_tolerance": None,
    "subdomains.overlap": None,
    "subdomains.mismatch_tolerance": None,
}
PIER = '[[station]]\nname = "pier"\n'
SERIES = {"output.stations_every": '"10 min"'}


@pytest.mark.parametrize(
    ("changes", "tail", "expected"),
    [
        # needed
        ({"title": None}, "", ['title: missing; allowed: text on one line; for example: title = "Wind over a square basin"']),
        (
            {"basin.surface": None},
            "",
            ['[basin] surface: missing; needed without [mesh] file; allowed: "plane", "sphere"; for example: surface = "plane"'],
        ),
        (
            {"depth.least": None},
            "",
            [f'[depth] least: missing; needed without [mesh] file; allowed: {DEPTH}; for example: least = "5 m"'],
        ),
        (
            {"earth.rotation": '"f-plane"'},
            "",
            [
                f'[earth] latitude: missing; needed with [earth] rotation = "f-plane"; allowed: {LATITUDE}; '
                'for example: latitude = "54 deg"'
            ],
        ),
        (
            {"method.stepper": '"two-stage"'},
            "",
            [
                '[method] operator: missing; needed with [method] stepper = "two-stage"; allowed: "wave", "jacobian"; '
                'for example: operator = "wave"'
            ],
        ),
        (
            {"method.action_tolerance": None},
            "",
            [
                f"[method] action_tolerance: missing; needed with {EXPONENTIAL}; allowed: number above 0, at most 0.1; "
                "for example: action_tolerance = 1e-5"
            ],
        ),
        (
            {"subdomains.mismatch_tolerance": None},
            "",
            [
                f"[subdomains] mismatch_tolerance: missing; needed with {EXPONENTIAL}; "
                f'allowed: length above 0 m, at most 1 m, {LENGTH}; for example: mismatch_tolerance = "0.1 mm"'
            ],
        ),
        (
            {"start.kind": '"file"'},
            "",
            [
                '[start] file: missing; needed with [start] kind = "file"; allowed: netCDF file of fields of this program '
                'or after the CF conventions, path from the folder of the case file; for example: file = "fields.nc"'
            ],
        ),
        # not used
        (
            {"earth.latitude": "54"},
            "",
            [f'[earth] latitude = 54: not used in this case; allowed: only with [earth] rotation = "f-plane"; {LEAVE}'],
        ),
        (
            {"start.kind": '"rest"', "start.file": '"fields.nc"'},
            "",
            [f'[start] file = "fields.nc": not used in this case; allowed: only with [start] kind = "file"; {LEAVE}'],
        ),
        (
            {"method.refresh_depth": "true"},
            "",
            [f'[method] refresh_depth = true: not used in this case; allowed: only with [method] operator = "wave"; {LEAVE}'],
        ),
        (
            {**EXPLICIT, "method.operator": '"wave"', "method.action_tolerance": "1e-5"},
            "",
            [
                f"[method] action_tolerance = 1e-5: not used in this case; allowed: only with {EXPONENTIAL}; {LEAVE}",
                f'[method] operator = "wave": not used in this case; allowed: only with {EXPONENTIAL}; {LEAVE}',
            ],
        ),
        (
            {"subdomains.count": "8", "subdomains.per_rank": "2"},
            "",
            [f"[subdomains] per_rank = 2: not used in this case; allowed: only without [subdomains] count; {LEAVE}"],
        ),
        (
            {"depth.variable": '"depth"'},
            "",
            [f'[depth] variable = "depth": not used in this case; allowed: only with [depth] grid; {LEAVE}'],
        ),
        (
            {**MESH_FILE, "basin.coastline": '"coast.geojson"', "mesh.spacing": '"4 km"', "depth.least": "5"},
            "",
            [
                f'[basin] coastline = "coast.geojson": not used in this case; allowed: only without [mesh] file; {LEAVE}',
                f"[depth] least = 5: not used in this case; allowed: only without [mesh] file; {LEAVE}",
                f'[mesh] spacing = "4 km": not used in this case; allowed: only without [mesh] file; {LEAVE}',
            ],
        ),
        (
            AREAS,
            "",
            [
                f'[mesh] areas = "areas.geojson": not used in this case; allowed: only with [mesh] finest; {LEAVE}',
                f'[mesh] area_spacing = "2 km": not used in this case; allowed: only with [mesh] areas; {LEAVE}',
            ],
        ),
        # depth
        (
            {"depth.constant": None},
            "",
            [
                "[depth] constant: missing, and so are grid and soundings; allowed: exactly one of constant, grid, soundings; "
                'for example: constant = "40 m"'
            ],
        ),
        (
            {"depth.soundings": '"soundings.csv"', "depth.grid": '"depth.nc"'},
            "",
            [
                '[depth] soundings = "soundings.csv": a second source of the depth beside constant; '
                "allowed: exactly one of constant, grid, soundings; leave one out",
                '[depth] grid = "depth.nc": a second source of the depth beside constant; '
                "allowed: exactly one of constant, grid, soundings; leave one out",
            ],
        ),
        ({"depth.least": '"41 m"'}, "", ['[depth] least = "41 m": above the constant depth; allowed: at most 40 m']),
        # mesh
        (
            {"mesh.spacing": None},
            "",
            [
                "[mesh] spacing: missing, and so is finest; allowed: either spacing, or finest with coarsest and grade_by; "
                'for example: spacing = "2 km"'
            ],
        ),
        (
            {**GRADED, "mesh.spacing": '"4 km"'},
            "",
            [
                '[mesh] spacing = "4 km": constant spacing beside graded spacing (finest); '
                "allowed: either spacing, or finest with coarsest and grade_by; leave one out"
            ],
        ),
        (
            {**GRADED, "mesh.finest": '"4 km"'},
            "",
            ['[mesh] finest = "4 km": not below coarsest; allowed: below 4 km; for cells of one size use spacing'],
        ),
        (
            {**GRADED, "mesh.coarsest": None},
            "",
            [f'[mesh] coarsest: missing; needed with [mesh] finest; allowed: {SPACING}; for example: coarsest = "4 km"'],
        ),
        (
            {**GRADED, **AREAS, "mesh.grade_by": '["coast", "areas"]', "mesh.area_spacing": '"500 m"'},
            "",
            ['[mesh] area_spacing = "500 m": not between finest and coarsest; allowed: from 1 km to 4 km'],
        ),
        (
            {**GRADED, "mesh.grade_by": '["areas"]'},
            "",
            ['[mesh] areas: missing; needed with "areas" in grade_by; for example: areas = "areas.geojson"'],
        ),
        (
            {**GRADED, **AREAS},
            "",
            [
                '[mesh] areas = "areas.geojson": not used in this case: grade_by has no "areas"; '
                'add "areas" to grade_by, or leave it out'
            ],
        ),
        (
            {**GRADED, "mesh.grade_by": '["coast", "depth"]'},
            "",
            [
                '[mesh] grade_by = ["coast", "depth"]: graded by a depth that is constant; allowed: "coast", "areas"; '
                "give depth as grid or soundings"
            ],
        ),
        (
            {**GRADED, "mesh.grade_by": '["coast", "deep"]'},
            "",
            [
                '[mesh] grade_by = ["coast", "deep"]: entry "deep": not one of the choices; '
                'allowed: list of different entries, each "coast", "depth", "areas"; did you mean "depth"?'
            ],
        ),
        # earth and method
        (
            {"earth.rotation": '"sphere"'},
            "",
            [
                '[earth] rotation = "sphere": a plane has no latitudes; '
                'allowed: "none", "f-plane" with [basin] surface = "plane"; take "f-plane" and a latitude'
            ],
        ),
        (
            {"method.operator": '"wave"'},
            "",
            [
                '[method] operator = "wave": the one-stage stepper is of second order with the Jacobian only; '
                'allowed: "jacobian" with stepper = "one-stage"; leave it out, or take stepper = "two-stage"'
            ],
        ),
        *(
            (
                {"method.stepper": '"two-stage"', "method.operator": '"jacobian"', "method.action": f'"{action}"'},
                "",
                [
                    f'[method] action = "{action}": needs an operator that is skew, and the Jacobian is not; '
                    'allowed: "arnoldi" with operator = "jacobian"; leave it out, or take operator = "wave"'
                ],
            )
            for action in ("lanczos", "chebyshev")
        ),
        # overlap
        (
            {"subdomains.overlap": None},
            "",
            [
                "[subdomains] overlap: missing, and so is overlap_tolerance; "
                "allowed: exactly one of overlap (layers), overlap_tolerance; for example: overlap_tolerance = 1e-6"
            ],
        ),
        (
            {"subdomains.overlap_tolerance": "1e-6"},
            "",
            [
                "[subdomains] overlap_tolerance = 1e-6: given beside overlap; "
                "allowed: exactly one of overlap (layers), overlap_tolerance; leave one out"
            ],
        ),
        # steps
        (
            {"time.duration": '"1000 s"'},
            "",
            [
                '[time] duration = "1000 s": not a whole multiple of the step of 2 min; '
                'allowed: whole multiples of the step, one at least; the nearest is "16 min"'
            ],
        ),
        (
            {"output.fields_every": '"30 s"', "output.ledger_every": '"150 s"', "checkpoint.every": '"0.1 h"'},
            "",
            [
                '[output] fields_every = "30 s": shorter than the step of 2 min; '
                'allowed: whole multiples of the step, one at least; the nearest is "2 min"',
                '[output] ledger_every = "150 s": not a whole multiple of the step of 2 min; '
                'allowed: whole multiples of the step, one at least; the nearest is "2 min"',
            ],
        ),
        # places and stations
        (
            {**HUMP, "start.x": "10"},
            "",
            ['[start] y: missing; allowed: x and y with [basin] surface = "plane"; for example: y = "40 km"'],
        ),
        (
            {**HUMP, **SPHERE},
            "",
            [
                '[start] lon: missing; allowed: lon and lat with [basin] surface = "sphere"; for example: lon = -40.5',
                '[start] lat: missing; allowed: lon and lat with [basin] surface = "sphere"; for example: lat = 43.2',
            ],
        ),
        (
            SERIES,
            PIER + "x = 1\ny = 2\nlat = 3\n",
            ['[station 1] lat = 3: not a coordinate on the plane; allowed: x and y with [basin] surface = "plane"'],
        ),
        (
            {**SPHERE, **SERIES},
            PIER + "x = 1\ny = 2\nlon = 3\nlat = 4\n",
            [
                '[station 1] x = 1: not a coordinate on the sphere; allowed: lon and lat with [basin] surface = "sphere"',
                '[station 1] y = 2: not a coordinate on the sphere; allowed: lon and lat with [basin] surface = "sphere"',
            ],
        ),
        (
            {**MESH_FILE, **SERIES},
            PIER + "x = 1\nlat = 4\n",
            [
                '[station 1] y: missing; allowed: x and y; with a mesh file of a sphere lon and lat; for example: y = "20 km"',
                "[station 1] lat = 4: x, y and lon, lat mixed; allowed: x and y; with a mesh file of a sphere lon and lat",
            ],
        ),
        (
            SERIES,
            f"{PIER}x = 1\ny = 2\n{PIER}x = 3\ny = 4\n",
            ['[station 2] name = "pier": station 1 has the same name; allowed: a name of its own for each station'],
        ),
        (
            SERIES,
            '[[station]]\nx = "1 mile"\ny = 2\n',
            [
                '[station 1] name: missing; allowed: text on one line; for example: name = "pier"',
                f'[station 1] x = "1 mile": unknown unit "mile"; allowed: {COORDINATE}',
            ],
        ),
        (
            {},
            PIER + "x = 1\ny = 2\n",
            ['[output] stations_every: missing; needed with [[station]]; for example: stations_every = "10 min"'],
        ),
        (
            SERIES,
            "",
            [
                '[output] stations_every = "10 min": not used in this case: there are no stations; '
                "leave it out, or add a [[station]]"
            ],
        ),
    ],
)
def test_message_of_a_broken_rule(tmp_path, changes, tail, expected):
    assert [without_line(mistake) for mistake in mistakes(tmp_path, case_text(changes, tail))] == expected


@pytest.mark.parametrize(
    "changes",
    [
        {},
        GRADED,
        {**GRADED, **AREAS, "mesh.grade_by": '["areas", "coast"]', "mesh.area_spacing": '"1 km"'},
        {**GRADED, "mesh.grade_by": '["depth"]', "depth.constant": None, "depth.grid": '"depth.nc"', "depth.variable": '"d"'},
        {"depth.constant": None, "depth.soundings": '"soundings.csv"'},
        {"depth.least": '"40 m"'},
        MESH_FILE,
        EXPLICIT,
        {"earth.rotation": '"f-plane"', "earth.latitude": "-90"},
        {**SPHERE, "earth.rotation": '"sphere"'},
        {**SPHERE, "earth.rotation": '"f-plane"', "earth.latitude": "54"},
        {"method.stepper": '"two-stage"', "method.operator": '"wave"', "method.action": '"chebyshev"'},
        {"method.stepper": '"two-stage"', "method.operator": '"wave"', "method.action": '"arnoldi"'},
        {"method.stepper": '"two-stage"', "method.operator": '"jacobian"', "method.action": '"arnoldi"'},
        {"subdomains.overlap": None, "subdomains.overlap_tolerance": "1e-6"},
        {**HUMP, "start.x": "0", "start.y": '"1 km"'},
        {**HUMP, **SPHERE, "start.lon": "350", "start.lat": '"0.5 rad"'},
        {"start.kind": '"file"', "start.file": '"fields.nc"'},
        {"time.step": '"0.1 s"', "time.duration": '"0.3 s"', "output.fields_every": '"0.3 s"'},
        {"time.step": "432", "checkpoint.every": '"0.1 d"', "output.fields_every": '"0.12 h"'},
    ],
)
def test_a_sound_combination_is_read(tmp_path, changes):
    read(tmp_path, case_text(changes))


def test_stations_are_read_in_order(tmp_path):
    tail = '[[station]]\nname = "b"\nx = "1 km"\ny = 0\n[[station]]\nname = "a"\nx = 2\ny = 3\n'
    stations = read(tmp_path, case_text(SERIES, tail)).stations
    assert [(item.name, item.x, item.y, item.lon) for item in stations] == [("b", 1000.0, 0.0, None), ("a", 2.0, 3.0, None)]


def test_eleven_stations_keep_their_order(tmp_path):
    tail = "".join(f'[[station]]\nname = "s{n}"\nx = {n}\ny = 0\n' for n in range(11))
    assert [item.name for item in read(tmp_path, case_text(SERIES, tail)).stations] == [f"s{n}" for n in range(11)]


def test_defaults_that_depend_on_other_keys(tmp_path):
    one = read(tmp_path, case_text())
    assert (one.method.operator, one.method.action, one.method.refresh_depth) == ("jacobian", "arnoldi", None)
    two = read(tmp_path, case_text({"method.stepper": '"two-stage"', "method.operator": '"wave"'}))
    assert (two.method.action, two.method.refresh_depth, two.method.rotation_in_operator) == ("lanczos", True, True)
    explicit = read(tmp_path, case_text(EXPLICIT))
    assert {explicit.method.operator, explicit.method.action, explicit.method.largest_basis, explicit.subdomains.repeats} == {
        None
    }
    assert (one.subdomains.count, one.subdomains.per_rank) == (None, 1)
    counted = read(tmp_path, case_text({"subdomains.count": "8"}))
    assert (counted.subdomains.count, counted.subdomains.per_rank) == (8, None)
    assert one.output.ledger_every == one.output.fields_every == 3600.0
    assert (one.mesh.growth, one.mesh.sweeps, read(tmp_path, case_text(GRADED)).mesh.growth) == (None, 50, 0.15)
    from_file = read(tmp_path, case_text(MESH_FILE))
    assert {from_file.mesh.sweeps, from_file.mesh.seed, from_file.basin.surface, from_file.depth.least} == {None}


@pytest.mark.parametrize(
    "changes",
    [
        {"method.stepper": '"three-stage"', "method.operator": '"wave"', "method.action": '"lanczos"'},
        {"time.step": '"2 mins"'},
        {**MESH_FILE, "mesh.file": '"mes.nc"'},
        {"earth.rotation": '"f-plan"', "earth.latitude": "54"},
        {"basin.surface": '"spere"', "earth.rotation": '"sphere"'},
        {"start.kind": '"humps"', "start.height": "1"},
    ],
)
def test_one_mistake_makes_one_message(tmp_path, changes):
    assert len(mistakes(tmp_path, case_text(changes))) == 1


def test_a_broken_key_still_counts_as_given(tmp_path):
    """The key is there, so what goes with it is needed, and what excludes it is a mistake."""
    found = mistakes(tmp_path, case_text({"mesh.finest": '"1 kms"'}))
    assert [without_line(mistake).split(":")[0] for mistake in found] == [
        "[mesh] coarsest",
        "[mesh] grade_by",
        '[mesh] spacing = "4 km"',
        '[mesh] finest = "1 kms"',
    ]


def test_the_equilibrium_tide_needs_the_sphere(tmp_path):
    text = case_text({"tide.equilibrium": '["M2"]'})
    (mistake,) = mistakes(tmp_path, text)
    assert "[tide] equilibrium" in mistake and "the basin lies on a plane" in mistake and "[[open]]" in mistake


def test_names_of_open_boundaries_differ(tmp_path):
    boundary = '\n[[open]]\nname = "mouth"\nline = "mouth.geojson"\n'
    (mistake,) = mistakes(tmp_path, case_text({}, 2 * boundary))
    assert "open boundary 1 has the same name" in mistake


@pytest.mark.parametrize(
    ("changes", "expected"),
    [
        ({"drag.bottom": "0.003", "drag.manning": "0.02"}, ("[drag] manning", "a second law of bottom friction")),
        ({"wind.file": '"wind.nc"'}, ("[wind] law", "missing; a wind needs a law of its drag on the water")),
        ({"wind.law": '"wu-1982"'}, ("[wind] law", "not used in this case: the stress is given")),
    ],
)
def test_friction_and_the_drag_of_the_wind(tmp_path, changes, expected):
    (mistake,) = mistakes(tmp_path, case_text(changes))
    assert all(part in mistake for part in expected)
