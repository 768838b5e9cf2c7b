"""A case file with mistakes: what the command line says of them."""

import pytest
from cases import ON_THE_SPHERE, call, case_text, write_case
from messages.refusals import in_order, plain, refused


def line_of(folder, text, name="lake.toml"):
    """Return "lake.toml:N" of the first line that begins with `text`."""
    lines = (folder / name).read_text().splitlines()
    return f"{name}:{1 + next(number for number, line in enumerate(lines) if line.startswith(text))}: "


def test_a_case_that_is_not_there(tmp_path):
    for verb in ("check", "run", "mesh", "cite"):
        done = call(tmp_path, verb, "none.toml")
        assert (done.code, done.out) == (5, "")
        in_order(done.line, "none.toml: the case file cannot be read: No such file or directory", "swe new none.toml")
    assert list(tmp_path.iterdir()) == []


def test_a_folder_in_place_of_a_case(tmp_path):
    done = call(tmp_path, "run", ".")
    assert done.code == 5 and done.line.startswith(".: the case file cannot be read: Is a directory; allowed: ")


def test_a_syntax_error_has_line_and_column_and_the_remedy(tmp_path):
    path = write_case(tmp_path)
    path.write_text(path.read_text().replace('"20 m"', "20 m"))
    place = line_of(tmp_path, "constant")
    refused(
        tmp_path, 2, place.rstrip(": "), ": not TOML: ", "the line reads: constant = 20 m", 'write quantities in quotes: "20 m"'
    )


@pytest.mark.parametrize(
    "changes, key, parts",
    [
        ({"depth.constant": '"20 furlong"'}, "constant", ('unknown unit "furlong"', "allowed: length", "mm, cm, m, km, nmi")),
        ({"depth.constant": '"20 s"'}, "constant", ('"20 s"', "allowed: length")),
        ({"depth.constant": '"-5 m"'}, "constant", ('= "-5 m": below the range', "allowed: length above 0 m")),
        ({"depth.contant": '"20 m"'}, "contant", ("unknown key", "allowed: constant, grid", "did you mean constant?")),
        ({"wind.eats": "0.1"}, "eats", ("unknown key", "allowed: east, north", "did you mean east?")),
        ({"time.step": '"1 d"', "time.duration": '"1 d"'}, "fields_every", ("shorter than the step", "whole multiples of the ")),
        ({"basin.coastline": '"cost.geojson"'}, "coastline",
         ("no such file (looked for cost.geojson)", 'did you mean "coast.geojson"?')),
        ({"method.operator": '"jacobian"', "method.action": '"lanczos"'}, "action",
         ("needs an operator that is skew, and the Jacobian is not", 'allowed: "arnoldi"', "leave it out")),
        ({"subdomains.count": "2.5"}, "count", ("= 2.5: ", "allowed: whole number from 1")),
        ({"earth.rotation": '"sphere"', "earth.latitude": None}, "rotation", ("a plane has no latitudes", '"f-plane"')),
    ],
)  # fmt: skip
def test_a_value_that_is_not_allowed(changes, key, parts, tmp_path):
    write_case(tmp_path, changes)
    lines = 4 if "time.step" in changes else 1
    refused(tmp_path, 2, line_of(tmp_path, f"{key} ="), key, *parts, lines=lines)


def test_a_step_that_divides_no_interval_is_told_for_every_interval(tmp_path):
    write_case(tmp_path, {"time.step": '"7 s"'})
    said = refused(tmp_path, 2, lines=5)
    for line, key in zip(said, ("duration", "fields_every", "stations_every", "ledger_every", "every")):
        in_order(line, line_of(tmp_path, f"{key} ="), f"{key} = ", "not a whole multiple of the step of 7 s", "the nearest is ")


def test_all_mistakes_come_at_once_in_the_order_of_the_file(tmp_path):
    write_case(tmp_path, {"depth.least": '"5 parsec"', "earth.rotation": '"fplane"', "earth.latitude": None, "wind.up": "1"})
    said = refused(tmp_path, 2, "least", "parsec", "rotation", 'did you mean "f-plane"?', "up", "unknown key", lines=3)
    numbers = [int(line.split(":")[1]) for line in said]
    assert numbers == sorted(numbers)


def test_an_unknown_field_and_a_known_one(tmp_path):
    write_case(tmp_path, {"output.fields": '["level", "vorticity"]'})
    place = line_of(tmp_path, "fields =")
    refused(
        tmp_path, 2, place, "[output] fields: vorticity is not written; allowed are level, velocity, normal_velocity, extremes"
    )


def test_a_station_without_coordinates_of_its_surface(tmp_path):
    text = case_text(ON_THE_SPHERE, {"West": ("7.2", "55.05")}).replace("lon = 7.2", "x = 7.2")
    write_case(tmp_path).write_text(text)
    allowed = 'allowed: lon and lat with [basin] surface = "sphere"'
    refused(
        tmp_path, 2, "[station 1] lon: missing", allowed, "[station 1] x = 7.2: not a coordinate on the sphere", allowed, lines=2
    )


def test_new_keeps_an_existing_file_and_names_a_missing_folder(tmp_path):
    path = write_case(tmp_path)
    before = path.read_text()
    done = call(tmp_path, "new", "lake.toml")
    assert (done.code, done.line) == (5, "lake.toml: is there already and is not replaced; choose another name")
    assert path.read_text() == before
    done = call(tmp_path, "new", "nowhere/lake.toml")
    assert done.code == 5
    in_order(done.line, "nowhere/lake.toml: cannot be written (No such file or directory)", "choose a folder that exists")


def test_a_new_case_runs_as_it_is(tmp_path):
    assert call(tmp_path, "new", "fresh.toml").code == 0
    write_case(tmp_path)
    done = call(tmp_path, "check", "fresh.toml")
    assert done.code == 0, plain(done, tmp_path)


def test_arguments_that_are_no_arguments(tmp_path):
    for words in (
        ["runn", "lake.toml"],
        ["run"],
        ["run", "lake.toml", "--resume", "--overwrite"],
        ["check", "a", "--ranks", "0"],
        [],
    ):
        done = call(tmp_path, *words)
        assert done.code == 2 and "usage: swe" in done.err and "Traceback" not in done.err
    assert "a whole number from 1 up is needed" in call(tmp_path, "check", "a", "--ranks", "0").err


def test_tides_that_are_no_tides(tmp_path):
    done = call(tmp_path, "tides", "X9")
    assert done.code == 2
    in_order(done.line, 'tidal constituent "X9" is not known; known are M2, S2, ')
    done = call(tmp_path, "tides", "--date", "yesterday")
    assert done.code == 2
    in_order(done.line, "--date yesterday: is no date; write 2031-03-01")
