"""The result folder: what is begun, refused, replaced, resumed."""

import os

import numpy as np
import pytest
from output.output_examples import start

from swe.errors import FileError
from swe.output.checkpoint import save
from swe.output.folder import ResultFolder


def fill(folder: ResultFolder) -> None:
    """Leave an earlier result and two files that are not ours."""
    for path in (folder.fields, folder.stations, folder.ledger, folder.summary, folder.figures / "level.png"):
        path.write_text("earlier")
    save(folder.checkpoints, 5, {"eta": np.zeros(2)}, {})
    (folder.path / "notes.txt").write_text("mine")
    (folder.figures / "poster.psd").write_text("mine")


@pytest.fixture
def used(tmp_path):
    with ResultFolder(tmp_path / "results" / "bay").begin() as folder:
        fill(folder)
    return folder.path


def test_a_new_folder_is_made_and_given_back(tmp_path):
    with ResultFolder(tmp_path / "results" / "bay").begin() as folder:
        assert folder.figures.is_dir() and folder.checkpoints.is_dir() and folder.notes == []
        assert (folder.path / "in-use").exists()
    assert not (folder.path / "in-use").exists()
    with ResultFolder(folder.path).begin():  # empty but for our folders: not a result
        pass


def test_other_files_are_no_result(tmp_path):
    (tmp_path / "mesh.nc").write_text("made by the mesh command")
    with ResultFolder(tmp_path).begin():
        pass
    assert (tmp_path / "mesh.nc").exists()


def test_an_earlier_result_is_refused_and_stays(used):
    before = sorted(used.rglob("*"))
    said = r"holds an earlier result \(fields.nc, stations.nc, ledger.nc ...\); continue .* --resume.*--overwrite"
    with pytest.raises(FileError, match=said):
        ResultFolder(used).begin()
    assert sorted(used.rglob("*")) == before


@pytest.mark.parametrize("left", ["fields.nc", "summary.json", "checkpoints/step-000000000005.checkpoint", "figures/level.png"])
def test_any_single_part_of_a_result_is_a_result(left, used):
    for path in sorted(used.rglob("*")):
        if path.is_file() and str(path.relative_to(used)) != left:
            path.unlink()
    with pytest.raises(FileError, match=left):
        ResultFolder(used).begin()


def test_overwriting_removes_ours_and_nothing_else(used):
    with ResultFolder(used).overwrite():
        files = sorted(str(path.relative_to(used)) for path in used.rglob("*") if path.is_file())
        assert files == ["figures/poster.psd", "in-use", "notes.txt"]


def test_overwriting_needs_no_earlier_result(tmp_path):
    with ResultFolder(tmp_path / "new").overwrite() as folder:
        assert folder.checkpoints.is_dir()


def test_resuming_keeps_everything(used):
    before = sorted(path for path in used.rglob("*"))
    with ResultFolder(used).resume():
        assert sorted(path for path in used.rglob("*") if path.name != "in-use") == before


def test_nothing_to_resume(tmp_path):
    with pytest.raises(FileError, match="nothing to resume"):
        ResultFolder(tmp_path / "absent").resume()
    assert not (tmp_path / "absent").exists()
    with ResultFolder(tmp_path).begin():
        pass
    with pytest.raises(FileError, match="nothing to resume"):
        ResultFolder(tmp_path).resume()
    assert not (tmp_path / "in-use").exists()


def test_a_folder_in_use_is_refused_by_all_three(used):
    code = """
import sys
from swe.output.lock import OutputLock
OutputLock(sys.argv[1]).acquire()
print("held", flush=True)
sys.stdin.read()
"""
    with start(code, used) as other:
        other.stdout.readline()
        for way in ("begin", "overwrite", "resume"):
            with pytest.raises(FileError, match=f"in use by process {other.pid}"):
                getattr(ResultFolder(used), way)()
        assert (used / "fields.nc").read_text() == "earlier"
        other.kill()
        other.wait()
        with ResultFolder(used).resume() as folder:
            assert len(folder.notes) == 1 and "taken over" in folder.notes[0]


def test_leftovers_of_a_killed_run_are_removed(used):
    (used / ".fields.nc.77.part").write_text("half")
    with ResultFolder(used).resume():
        assert not (used / ".fields.nc.77.part").exists()


def test_places_where_no_folder_can_be(tmp_path):
    (tmp_path / "file").write_text("here first")
    for place in (tmp_path / "file", tmp_path / "file" / "deeper", "/proc/results/bay", "/sys/bay"):
        with pytest.raises(FileError, match="making the result folder failed") as failure:
            ResultFolder(place).begin()
        assert "\n" not in str(failure.value)
    assert (tmp_path / "file").read_text() == "here first"


def test_a_file_named_like_one_of_our_folders(tmp_path):
    (tmp_path / "figures").write_text("here first")
    with pytest.raises(FileError, match="figures: making the folder failed .*a file has the name of the folder"):
        ResultFolder(tmp_path).begin()
    assert os.listdir(tmp_path) == ["figures"]
