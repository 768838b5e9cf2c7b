"""Mistakes that real files and their cases bring along, and what `swe check` says to them."""

import prepare
import pytest
from cases import call


@pytest.fixture(scope="module")
def prepared(tmp_path_factory):
    folder = tmp_path_factory.mktemp("mistakes")
    prepare.prepare(folder)
    return folder


def checked(prepared, name, change):
    text = (prepared / "salish.toml").read_text()
    changed = change(text)
    assert changed != text
    (prepared / name).write_text(changed)
    return call(prepared, "check", name)


def test_a_byte_order_mark_before_the_coast_does_no_harm(prepared):
    coast = (prepared / "coast.geojson").read_bytes()
    (prepared / "marked.geojson").write_bytes(b"\xef\xbb\xbf" + coast)
    done = checked(prepared, "marked.toml", lambda text: text.replace("coast.geojson", "marked.geojson"))
    assert done.code == 0 and "about 46" in done.out, done


def test_a_spacing_without_its_unit_is_refused_before_the_mesh_is_made(prepared):
    done = checked(prepared, "unit.toml", lambda text: text.replace('"2.4 km"', "2.4"))
    lines = (prepared / "unit.toml").read_text().splitlines()
    assert done.code == 2 and f"unit.toml:{lines.index('spacing = 2.4') + 1}: " in done.err and "check its unit" in done.err, done
