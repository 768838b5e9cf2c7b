"""Cases written back, the templates, and the reference document."""

import subprocess
import sys
import tomllib
from datetime import UTC, datetime
from pathlib import Path

import pytest
from case.case_examples import case_text, folder_with_inputs, mistakes, read

from swe.case import parse_case
from swe.case.case import SECTIONS
from swe.case.keys import OPTIONAL, REQUIRED, Same, When
from swe.case.reference import reference_text
from swe.case.template import SHORTEST_CASE, SQUARE_COAST, new_case_template

ROOT = Path(__file__).resolve().parents[2]
STATIONS = '[[station]]\nname = "pier \\"A\\" \\\\ ä"\nx = "1.5 km"\ny = 0.1\n[[station]]\nname = "b"\nx = -1\ny = "1 nmi"\n'
RICH = {
    "output.stations_every": '"10 min"',
    "output.fields": '["level", "current"]',
    "mesh.spacing": None,
    "mesh.finest": "1234.56789",
    "mesh.coarsest": '"4 nmi"',
    "mesh.grade_by": '["areas", "coast"]',
    "mesh.areas": '"areas.geojson"',
    "mesh.area_spacing": '"2 km"',
    "earth.rotation": '"f-plane"',
    "earth.latitude": '"1 rad"',
    "start.kind": '"hump"',
    "start.height": '"-0.1 mm"',
    "start.radius": '"20 km"',
    "start.x": '"1e-7 m"',
    "start.y": "0",
    "time.begin": "2031-06-01T02:00:00.25+02:00",
    "method.stepper": '"two-stage"',
    "method.operator": '"wave"',
    "method.rotation_in_operator": "false",
    "wind.east": "0.30000000000000004",
}


@pytest.mark.parametrize(("changes", "tail"), [({}, ""), (RICH, STATIONS)])
def test_a_case_written_out_reads_back_as_equal(tmp_path, changes, tail):
    case = read(tmp_path, case_text(changes, tail))
    again = parse_case(case.to_text(), tmp_path / "elsewhere.toml")
    assert again == case
    assert again.to_text() == case.to_text()


def test_the_written_case_gives_every_setting(tmp_path):
    case = read(tmp_path, case_text(RICH, STATIONS))
    again = parse_case(case.to_text(), tmp_path / "again.toml")
    assert not any("(default)" in line for line in again.summary_lines())
    assert again.given("earth", "gravity") and again.given("output", "ledger_every")


def test_summary_for_people(tmp_path):
    lines = read(tmp_path, case_text({"output.stations_every": '"10 min"'}, STATIONS)).summary_lines()
    assert lines == [
        "title                           Square",
        "basin.surface                   plane",
        "basin.coastline                 coast.geojson",
        "depth.constant                  40 m",
        "depth.datum                     mean_sea_level   (default)",
        "depth.least                     5 m",
        "mesh.spacing                    4 km",
        "mesh.sweeps                     50   (default)",
        "mesh.seed                       1   (default)",
        "earth.rotation                  none",
        "earth.gravity                   9.80665 m/s2   (default)",
        "earth.density                   1025 kg/m3   (default)",
        "drag.bottom                     0.0025   (default)",
        "drag.viscosity                  0 m2/s   (default)",
        "wind.east                       0 Pa   (default)",
        "wind.north                      0 Pa   (default)",
        "wind.air_density                1.225 kg/m3   (default)",
        "pressure.reference              101325 Pa   (default)",
        "tide.ramp                       0 s   (default)",
        "start.kind                      rest   (default)",
        "time.begin                      2031-01-01T00:00:00Z",
        "time.duration                   1 d",
        "time.step                       2 min",
        "method.stepper                  one-stage",
        "method.operator                 jacobian   (default)",
        "method.action                   arnoldi   (default)",
        "method.action_tolerance         1e-5",
        "method.largest_basis            120   (default)",
        "subdomains.per_rank             1   (default)",
        "subdomains.overlap              6",
        "subdomains.mismatch_tolerance   0.1 mm",
        "subdomains.repeats              3   (default)",
        "output.fields_every             1 h",
        "output.stations_every           10 min",
        "output.ledger_every             1 h   (default)",
        'station 1                       name pier "A" \\ ä, x 1.5 km, y 0.1 m',
        "station 2                       name b, x -1 m, y 1.852 km",
    ]


# ------------------------------------------------------------------------------------------ templates


def test_the_shortest_case_has_ten_lines_and_is_sound(tmp_path):
    assert SHORTEST_CASE.count("\n") == 10
    (tmp_path / "coast.geojson").write_text(SQUARE_COAST)
    case = parse_case(SHORTEST_CASE, tmp_path / "case.toml")
    assert (case.mesh.spacing, case.wind.east, case.earth.latitude) == (2000.0, 0.2, 54.0)
    assert (case.time.begin, case.time.step) == (datetime(2031, 1, 1, tzinfo=UTC), 120.0)


def test_the_shortest_case_has_nothing_to_spare(tmp_path):
    """Without any one of its keys but the wind it is not a case any more."""
    data = tomllib.loads(SHORTEST_CASE)
    names = [(section, key) for section, value in data.items() if isinstance(value, dict) for key in value]
    for section, key in names:
        if section == "wind":
            continue
        rest = {name: dict(value) if isinstance(value, dict) else value for name, value in data.items()}
        del rest[section][key]
        text = "\n".join(f"{name} = {_inline(value)}" for name, value in rest.items())
        assert mistakes(tmp_path, text), f"{section}.{key}"


def _inline(value) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(f"{key} = {_inline(item)}" for key, item in value.items()) + "}"
    return value.isoformat() if isinstance(value, datetime) else repr(value)


def test_the_commented_template_is_the_shortest_case(tmp_path):
    folder_with_inputs(tmp_path)
    assert parse_case(new_case_template(), tmp_path / "a.toml") == parse_case(SHORTEST_CASE, tmp_path / "b.toml")


def test_the_commented_template_has_every_key_once():
    rows = new_case_template().splitlines()
    for section in SECTIONS.values():
        for name in section.keys:
            assert any(row.removeprefix("# ").startswith(f"{name} = ") for row in rows), name
        assert not section.name or rows.count(section.header) + rows.count(f"# {section.header}") == 1


# ------------------------------------------------------------------------------------------ schema and reference


@pytest.mark.parametrize("section", SECTIONS.values(), ids=lambda section: section.name or "top")
def test_examples_and_defaults_are_allowed_by_their_own_kind(tmp_path, section):
    folder_with_inputs(tmp_path)
    for name, key in section.keys.items():
        example = tomllib.loads(f"k = {key.example}")["k"]
        key.kind.read(example, tmp_path)
        needs = key.need.by.values() if isinstance(key.need, When) else [key.need]
        for need in needs:
            if need not in (REQUIRED, OPTIONAL) and not isinstance(need, Same):
                written = tomllib.loads(f"k = {key.kind.write(need)}")["k"]
                assert key.kind.read(written, tmp_path) == need, name
        assert key.meaning and not key.meaning.endswith(".")


def test_what_sets_the_accuracy_has_no_default():
    for name in (
        "time.step",
        "method.action_tolerance",
        "subdomains.mismatch_tolerance",
        "subdomains.overlap_tolerance",
        "mesh.spacing",
    ):
        section, key = name.split(".")
        need = SECTIONS[section].keys[key].need
        needs = set(need.by.values()) if isinstance(need, When) else {need}
        assert needs <= {REQUIRED, OPTIONAL}, name


def test_the_reference_document_is_current():
    document = (ROOT / "docs" / "case-file.md").read_text(encoding="utf-8")
    assert document == reference_text(), "docs/case-file.md is stale: run scripts/case_reference"


def test_the_reference_document_has_every_key():
    text = reference_text()
    for section in SECTIONS.values():
        part = text.split(f"\n## `{section.header}`: " if section.name else "\n## Above all sections")[1].split("\n## ")[0]
        for name, key in section.keys.items():
            row = next(row for row in part.splitlines() if row.startswith(f"| `{name}` |"))
            assert key.meaning in row and key.kind.allowed() in row and row.count(" | ") == 3


def test_the_script_finds_the_document_current():
    script = ROOT / "scripts" / "case_reference"
    assert subprocess.run([sys.executable, script, "--check"], capture_output=True, check=False).returncode == 0
    wrong = subprocess.run([sys.executable, script, "--chek"], capture_output=True, text=True, check=False)
    assert wrong.returncode == 2 and "allowed: --check" in wrong.stderr
