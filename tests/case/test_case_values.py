"""Values of single keys: what is read, and the exact message of every kind of mistake."""

from datetime import UTC, datetime, timedelta, timezone

import pytest
from case.case_examples import case_text, mistakes, read, without_line

LENGTH = "in mm, cm, m, km, nmi; a plain number is in m"
TIME = "in s, min, h, d; a plain number is in s"
DATE = "date with time such as 2031-01-01T00:00:00Z, years 1583 to 3000; no offset from UTC means UTC"
SPACING = f"length above 0 m, at most 2000 km, {LENGTH}"
STEP = f"time above 0 s, at most 1 d, {TIME}"


@pytest.mark.parametrize(
    ("key", "written", "rest"),
    [
        # quantities
        ("mesh.spacing", '"4 kms"', f'unknown unit "kms"; allowed: {SPACING}; did you mean "4 km"?'),
        ("mesh.spacing", '"4 h"', f'"h" is a unit of time, not of length; allowed: {SPACING}'),
        ("mesh.spacing", '"4"', f'no unit behind the number; allowed: {SPACING}; "4 m", or 4 without quotes'),
        ("mesh.spacing", "true", f"true or false, but a length is needed; allowed: {SPACING}"),
        ("mesh.spacing", "[4, 5]", f"a list, but a length is needed; allowed: {SPACING}"),
        ("mesh.spacing", '"0 km"', f"below the range; allowed: {SPACING}"),
        ("mesh.spacing", "-4000", f"below the range; allowed: {SPACING}"),
        ("mesh.spacing", '"2001 km"', f"above the range; allowed: {SPACING}"),
        ("mesh.spacing", "nan", f"not a finite number; allowed: {SPACING}"),
        ("mesh.spacing", '"1e999 m"', f"not a finite number; allowed: {SPACING}"),
        ("time.step", '"2 days"', f'unknown unit "days"; allowed: {STEP}; did you mean "2 d"?'),
        ("time.step", "07:32:00", f"a time without a date, but a time is needed; allowed: {STEP}"),
        # plain numbers
        ("drag.bottom", "0.5", "above the range; allowed: number from 0 to 0.1"),
        ("drag.bottom", "-1e-3", "below the range; allowed: number from 0 to 0.1"),
        (
            "drag.bottom",
            '"0.0025"',
            "text, but a plain number is needed; allowed: number from 0 to 0.1; write the number alone, without quotes or unit",
        ),
        ("drag.bottom", "false", "true or false, but a plain number is needed; allowed: number from 0 to 0.1"),
        ("method.action_tolerance", "0.0", "below the range; allowed: number above 0, at most 0.1"),
        # whole numbers
        (
            "mesh.sweeps",
            "30.5",
            "a number with a decimal point, but a whole number is needed; allowed: whole number from 0 to 1000",
        ),
        (
            "mesh.sweeps",
            "30.0",
            "a number with a decimal point, but a whole number is needed; allowed: whole number from 0 to 1000",
        ),
        ("mesh.sweeps", "true", "true or false, but a whole number is needed; allowed: whole number from 0 to 1000"),
        ("mesh.sweeps", '"30"', "text, but a whole number is needed; allowed: whole number from 0 to 1000"),
        ("mesh.sweeps", "1001", "above the range; allowed: whole number from 0 to 1000"),
        ("mesh.sweeps", "-1", "below the range; allowed: whole number from 0 to 1000"),
        # choices
        (
            "method.stepper",
            '"two-stages"',
            'not one of the choices; allowed: "two-stage", "one-stage", "runge-kutta-4"; did you mean "two-stage"?',
        ),
        ("method.stepper", '"Euler"', 'not one of the choices; allowed: "two-stage", "one-stage", "runge-kutta-4"'),
        (
            "method.stepper",
            "4",
            'a whole number, but one of the choices is needed; allowed: "two-stage", "one-stage", "runge-kutta-4"',
        ),
        # text
        ("title", "7", "a whole number, but text in quotes is needed; allowed: text on one line"),
        ("title", '" "', "the text is blank; allowed: text on one line"),
        ("title", '"a\\nb"', "line ends or control characters in the text; allowed: text on one line"),
        # dates
        (
            "time.begin",
            "2031-01-01",
            f"a date without a time, but a date with a time is needed; allowed: {DATE}; write 2031-01-01T00:00:00Z",
        ),
        ("time.begin", '"2031-01-01"', f"a date without a time; allowed: {DATE}; write 2031-01-01T00:00:00Z"),
        ("time.begin", '"1 January 2031"', f"not a date with a time after ISO 8601; allowed: {DATE}"),
        ("time.begin", "20310101", f"a whole number, but a date with a time is needed; allowed: {DATE}"),
        ("time.begin", "1500-01-01T00:00:00Z", f"the year 1500 is out of range; allowed: {DATE}"),
        # lists
        (
            "output.fields",
            '"level"',
            'text, but a list is needed; allowed: list of different entries, each text on one line; ["level"]',
        ),
        (
            "output.fields",
            "[]",
            "the list is empty; allowed: list of different entries, each text on one line; "
            "leave the key out to keep what holds without it",
        ),
        (
            "output.fields",
            '["level", 3]',
            "entry 3: a whole number, but text in quotes is needed; allowed: list of different entries, each text on one line",
        ),
        (
            "output.fields",
            '["level", "level"]',
            'entry "level" stands there twice; allowed: list of different entries, each text on one line; keep one',
        ),
        # files
        (
            "basin.coastline",
            '"coasts.geojson"',
            "no such file (looked for FOLDER/coasts.geojson); allowed: GeoJSON file, path from the folder of the case file; "
            'did you mean "coast.geojson"?',
        ),
        (
            "basin.coastline",
            '"inputs/coast.geojson"',
            "no such file (looked for FOLDER/inputs/coast.geojson); "
            "allowed: GeoJSON file, path from the folder of the case file; the folder FOLDER/inputs does not exist either",
        ),
        (
            "basin.coastline",
            '"."',
            "a folder, but a file is needed; allowed: GeoJSON file, path from the folder of the case file",
        ),
        ("basin.coastline", '""', "the file name is empty; allowed: GeoJSON file, path from the folder of the case file"),
        (
            "basin.coastline",
            "3",
            "a whole number, but a file name is needed; allowed: GeoJSON file, path from the folder of the case file",
        ),
        (
            "basin.coastline",
            '"in\\new.geojson"',
            "line ends or control characters in the file name; allowed: GeoJSON file, path from the folder of the case file; "
            "write paths with / between folders",
        ),
    ],
)
def test_message_of_a_wrong_value(tmp_path, key, written, rest):
    found = mistakes(tmp_path, case_text({key: written}))
    section, _, name = key.rpartition(".")
    where = f"[{section}] {name}" if section else name
    shown = written.replace("1e-3", "0.001")
    assert [without_line(mistake) for mistake in found] == [f"{where} = {shown}: {rest.replace('FOLDER/', '')}"]


@pytest.mark.parametrize(
    ("key", "written", "value"),
    [
        ("mesh.spacing", "4000", 4000.0),
        ("mesh.spacing", "4000.5", 4000.5),
        ("mesh.spacing", '"2.5 nmi"', 4630.0),
        ("time.duration", '"0.5 d"', 43200.0),
        ("drag.bottom", "0", 0.0),
        ("drag.bottom", "0.1", 0.1),
        ("drag.viscosity", '"10 m2 s-1"', 10.0),
        ("wind.east", '"-0.2 N/m2"', -0.2),
        ("earth.gravity", '"9.80616 m/s2"', 9.80616),
        ("subdomains.mismatch_tolerance", '"0.1 mm"', 0.0001),
        ("mesh.sweeps", "0", 0),
        ("output.fields", '["level", "current"]', ("level", "current")),
        ("time.begin", "2031-06-01T02:00:00+02:00", datetime(2031, 6, 1, tzinfo=UTC)),
        ("time.begin", "2031-06-01 00:00:00", datetime(2031, 6, 1, tzinfo=UTC)),
        ("time.begin", '"2031-06-01T00:00Z"', datetime(2031, 6, 1, tzinfo=UTC)),
        ("time.begin", '"2031-06-01T05:30:00+05:30"', datetime(2031, 6, 1, tzinfo=UTC)),
    ],
)
def test_value_that_is_read(tmp_path, key, written, value):
    section, name = key.split(".")
    found = getattr(getattr(read(tmp_path, case_text({key: written})), section), name)
    assert found == value and type(found) is type(value)


def test_dates_are_in_utc(tmp_path):
    begin = read(tmp_path, case_text({"time.begin": "2031-06-01T02:00:00+02:00"})).time.begin
    assert begin.utcoffset() == timedelta(0) and begin == datetime(2031, 6, 1, 2, tzinfo=timezone(timedelta(hours=2)))


def test_input_files_are_found_from_the_folder_of_the_case(tmp_path, monkeypatch):
    (tmp_path / "cases").mkdir()
    monkeypatch.chdir(tmp_path)
    assert read(tmp_path / "cases", case_text()).basin.coastline == tmp_path / "cases" / "coast.geojson"


def test_a_file_that_may_not_be_read(tmp_path, monkeypatch):
    # As root every file may be read, so the system's answer is replaced.
    monkeypatch.setattr("swe.case.inputs.os.access", lambda path, mode: False)
    expected = (
        'case.toml:4: [basin] coastline = "coast.geojson": the file coast.geojson may not be read; '
        "allowed: GeoJSON file, path from the folder of the case file; change its permissions"
    )
    assert mistakes(tmp_path, case_text()) == [expected]
