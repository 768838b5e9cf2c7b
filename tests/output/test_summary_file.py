"""summary.json: complete, finite, with the caution."""

import json
import math
import platform
from importlib import metadata

import numpy as np
import pytest

from swe import __version__
from swe.constants import CAUTION
from swe.errors import FileError
from swe.output.summary import REQUIRED, read_summary, versions, write_summary


def example() -> dict:
    return {name: 0 for name in REQUIRED} | {"case": "bay", "phases": [{"stages": 1.5}, {"stages": np.float64(2.5)}]}


def test_it_comes_back_with_the_caution(tmp_path):
    path = tmp_path / "summary.json"
    write_summary(path, example() | {"steps": np.int64(7), "drift": np.array([0.0, 1e-17]), "finished": np.True_})
    found = read_summary(path)
    assert found["steps"] == 7 and found["drift"] == [0.0, 1e-17] and found["finished"] is True
    assert found["phases"][1]["stages"] == 2.5 and found["caution"] == CAUTION and found["not_finite"] == []


def test_a_number_that_json_cannot_carry_is_null_and_named(tmp_path):
    path = tmp_path / "summary.json"
    write_summary(path, example() | {"largest_mismatch": math.nan, "phases": [{"stages": np.inf}]})

    def refuse(constant):
        raise AssertionError(f"{constant} is no JSON")

    found = json.loads(path.read_text(), parse_constant=refuse)
    assert found["largest_mismatch"] is None and found["not_finite"] == ["largest_mismatch", "phases[0].stages"]


@pytest.mark.parametrize("name", REQUIRED)
def test_each_required_key_is_missed(name, tmp_path):
    lacking = example()
    del lacking[name]
    with pytest.raises(ValueError, match=f"lacks {name}$"):
        write_summary(tmp_path / "summary.json", lacking)
    assert list(tmp_path.iterdir()) == []


def test_versions_are_those_of_this_machine():
    found = versions("Some MPI v4.1\nbuilt yesterday")
    assert found["swe"] == __version__ and found["python"] == platform.python_version() and found["numpy"] == np.__version__
    assert found["scipy"] == metadata.version("scipy") and found["netCDF4"] == metadata.version("netCDF4")
    assert found["mpi"] == "Some MPI v4.1" and found["netCDF"][0].isdigit()


def test_petsc_is_named_only_where_it_is(monkeypatch):
    def version(package):
        if package == "petsc4py":
            raise metadata.PackageNotFoundError
        return "1"

    monkeypatch.setattr(metadata, "version", version)
    assert "petsc" not in versions("")
    monkeypatch.setattr(metadata, "version", lambda package: "3.2.1")
    assert versions("")["petsc"] == "3.2.1"


def test_a_summary_that_is_none(tmp_path):
    (tmp_path / "summary.json").write_text("{half")
    with pytest.raises(FileError, match="reading the summary failed .not JSON"):
        read_summary(tmp_path / "summary.json")
    with pytest.raises(FileError, match="No such file"):
        read_summary(tmp_path / "absent.json")
