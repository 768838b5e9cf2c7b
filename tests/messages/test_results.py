"""Result folders that cannot be used, and results that cannot be continued."""

import json
import os
import shutil

import netCDF4
import pytest
from cases import MOUTH, call, write_case, write_mouth
from messages.refusals import in_order, refused

from swe.output.lock import OutputLock

RUN = ["run"]


@pytest.fixture(scope="module")
def finished(tmp_path_factory):
    """A folder with a case and its finished result, to be copied."""
    folder = tmp_path_factory.mktemp("finished")
    write_case(folder)
    done = call(folder, "run", "lake.toml", "--quiet")
    assert done.code == 0, done.err
    return folder


@pytest.fixture
def folder(finished, tmp_path):
    return shutil.copytree(finished, tmp_path / "copy")


def resumed(folder, *parts, code=2, opened=False):
    """Let `swe run --resume` refuse in one line with `parts` in this order.

    The result stays as it is, unless files were `opened` already, and cut back to the checkpoint, when trouble was found.
    """
    before = contents(folder)
    done = call(folder, "run", "lake.toml", "--resume", "--quiet")
    assert done.code == code, done.out + done.err
    in_order(done.line.replace(f"{folder}/", ""), *parts)
    assert opened or contents(folder) == before


def contents(folder):
    return {path: path.read_bytes() for path in sorted((folder / "results").rglob("*")) if path.is_file()}


# ------------------------------------------------------------------------------------------ folders


@pytest.mark.parametrize(
    "results, parts",
    [
        ("coast.geojson", ("coast.geojson: making the result folder failed (File exists)", "choose another folder")),
        (
            "coast.geojson/lake",
            ("coast.geojson/lake: making the result folder failed (Not a directory)", "choose another folder"),
        ),
        ("/proc/lake", ("/proc/lake: making the result folder failed (No such file or directory)", "check the path")),
        ("/sys/kernel/lake", ("/sys/kernel/lake: making the result folder failed (",)),
    ],
)
def test_a_folder_that_cannot_be_made(results, parts, tmp_path):
    write_case(tmp_path)
    refused(tmp_path, 5, *parts, verbs=RUN, options=("--results", results))


def test_a_folder_in_use_by_a_living_process(tmp_path):
    write_case(tmp_path)
    (tmp_path / "results" / "lake").mkdir(parents=True)
    with OutputLock(tmp_path / "results" / "lake"):
        for option in ([], ["--overwrite"]):
            done = call(tmp_path, "run", "lake.toml", *option)
            assert done.code == 5
            in_order(
                done.line, f"results/lake: in use by process {os.getpid()} on ", "wait for it, stop it, or choose another folder"
            )
        assert [item.name for item in (tmp_path / "results" / "lake").iterdir()] == ["in-use"]
    assert call(tmp_path, "run", "lake.toml", "--quiet").code == 0


def test_a_folder_in_use_is_not_resumed(folder):
    with OutputLock(folder / "results" / "lake"):
        resumed(folder, "results/lake: in use by process", code=5)


def test_an_earlier_result_is_neither_replaced_nor_continued_unasked(folder):
    before = contents(folder)
    done = call(folder, "run", "lake.toml")
    assert done.code == 5
    in_order(done.line, "results/lake: holds an earlier result (fields.nc", "--resume", "--overwrite", "--results")
    assert contents(folder) == before


def test_a_claim_of_a_dead_process_is_taken_over_with_a_note(folder):
    claim = {"host": os.uname().nodename, "pid": 2**22 + 1, "began": "long ago", "taken": "2026-01-01T00:00:00+00:00"}
    (folder / "results" / "lake" / "in-use").write_text(json.dumps(claim))
    done = call(folder, "run", "lake.toml", "--resume")
    assert done.code == 0 and "in-use: taken over from process" in done.out
    assert not (folder / "results" / "lake" / "in-use").exists()


def test_nothing_to_resume(tmp_path):
    write_case(tmp_path)
    refused(
        tmp_path,
        5,
        "results/lake: nothing to resume, no checkpoint is there; run without --resume",
        verbs=RUN,
        options=["--resume"],
    )
    assert not (tmp_path / "results").exists()


# ------------------------------------------------------------------------------------------ checkpoints


def test_a_checkpoint_of_another_mesh(folder):
    write_case(folder, {"mesh.seed": "2"})
    resumed(folder, "step-000000000030.checkpoint: belongs to another mesh", "start anew with --overwrite")


def test_a_checkpoint_of_other_physics_names_what_differs(folder):
    write_case(folder, {"drag.bottom": "0.003", "wind.east": '"0.2 Pa"'})
    resumed(
        folder, "step-000000000030.checkpoint: belongs to other physics ",
        "(drag.bottom was 0.0025, is 0.003, wind.east was 0.3, is 0.2)",
        "resume with the case as it was, or start anew with --overwrite",
    )  # fmt: skip


def test_a_checkpoint_of_another_begin(folder):
    write_case(folder, {"time.begin": "2031-01-02T00:00:00Z"})
    resumed(folder, "other physics (time.begin was 2031-01-01T00:00:00+00:00, is 2031-01-02T00:00:00+00:00)")


def test_a_file_of_the_forcing_may_move_but_not_change(tmp_path):
    for name in ("here", "there"):
        (tmp_path / name).mkdir()
        path = write_case(tmp_path / name)
        path.write_text(path.read_text() + MOUTH)
        write_mouth(tmp_path / name)
    assert call(tmp_path / "here", "run", "lake.toml", "--quiet").code == 0
    shutil.move(tmp_path / "here" / "results", tmp_path / "there")
    folder = tmp_path / "there"
    assert call(folder, "run", "lake.toml", "--resume", "--quiet").code == 0
    constants = folder / "mouth.csv"
    constants.write_text(constants.read_text().replace("0.5", "0.6"))
    resumed(folder, "other physics (open.mouth.constants was mouth.csv (sha256 ", "), is mouth.csv (sha256 ", "as it was")


def test_other_stations_or_fields_than_the_files_hold(folder):
    write_case(folder, stations={"West": ('"2 km"', '"5 km"')})
    resumed(folder, "hold the stations West (2000, 5000), East (17500, 5000), this case has West (2000, 5000)", "as it was")
    write_case(folder, {"output.stations_every": None}, stations={})
    resumed(folder, "hold the stations West (2000, 5000), East (17500, 5000), this case has none", "as it was")
    write_case(folder, {"output.fields": '["level"]'})
    resumed(folder, "hold the fields level, velocity, normal_velocity, extremes, this case has level", "as it was")


def test_a_duration_that_is_over_and_a_step_that_does_not_fit(folder):
    write_case(folder, {"time.duration": '"40 min"'})
    resumed(folder, "[time] duration = 2400 s: the run continues at 3600 s (step-000000000030.checkpoint), beyond its end")
    times = dict.fromkeys(("output.fields_every", "output.stations_every", "output.ledger_every", "checkpoint.every"), '"70 s"')
    write_case(folder, {"time.step": '"70 s"', "time.duration": '"70 min"'} | times)
    resumed(folder, "[time] step = 70 s: the run continues at 3600 s", "choose a step that divides it")


def test_all_checkpoints_damaged(folder):
    for path in (folder / "results" / "lake" / "checkpoints").iterdir():
        path.write_bytes(path.read_bytes()[:9000])
    resumed(
        folder,
        "results/lake/checkpoints: no sound checkpoint to resume from (found 2 damaged: ",
        "cut short: ",
        "--overwrite",
        code=5,
    )


def test_the_newest_checkpoint_damaged_is_skipped_with_a_note(folder):
    newest = folder / "results" / "lake" / "checkpoints" / "step-000000000030.checkpoint"
    newest.write_bytes(newest.read_bytes()[:-1] + b"?")
    done = call(folder, "run", "lake.toml", "--resume")
    assert done.code == 0, done.err
    in_order(
        done.out,
        "step-000000000030.checkpoint: altered: the checksum is wrong; skipped",
        "resumed at 0 d 00:48, step 24",
        "done: ",
    )


# ------------------------------------------------------------------------------------------ result files


@pytest.mark.parametrize("name", ["fields.nc", "stations.nc", "ledger.nc"])
def test_a_result_file_that_is_missing_or_damaged(name, folder):
    path = folder / "results" / "lake" / name
    content = path.read_bytes()
    path.write_bytes(content[: len(content) // 2])
    resumed(
        folder,
        f"results/lake/{name}: cannot be read as a record file of this program (",
        "start the run anew",
        code=5,
        opened=True,
    )
    path.write_text("not netCDF")
    resumed(
        folder,
        f"results/lake/{name}: cannot be read as a record file of this program (",
        "start the run anew",
        code=5,
        opened=True,
    )
    path.unlink()
    resumed(
        folder,
        f"results/lake/{name}: not there, so no records can be added; put it back, or start the run anew",
        code=5,
        opened=True,
    )


def test_a_kept_mesh_that_is_damaged_is_made_again(folder):
    path = folder / "results" / "lake" / "mesh.nc"
    sound = path.read_bytes()
    with netCDF4.Dataset(path, "a") as data:
        data["depth"][0] = 1.0
    done = call(folder, "run", "lake.toml", "--resume")
    assert done.code == 0 and "results/lake/mesh.nc: damaged; the mesh is made again" in done.out
    path.write_bytes(sound[: len(sound) // 2])
    assert call(folder, "run", "lake.toml", "--resume", "--quiet").code == 0


# ------------------------------------------------------------------------------------------ report


def test_a_report_of_nothing(tmp_path):
    assert call(tmp_path, "report", "results").line == "results: no such folder; give the folder of a result"
    (tmp_path / "results").mkdir()
    done = call(tmp_path, "report", "results")
    assert done.code == 5
    assert done.line == "results/fields.nc: no such file; give the folder of a result, or wait until the run has written it"
    assert list((tmp_path / "results").iterdir()) == []


def test_a_report_of_a_damaged_result(folder):
    path = folder / "results" / "lake" / "fields.nc"
    path.write_bytes(path.read_bytes()[:3000])
    done = call(folder, "report", "results/lake")
    assert done.code == 5
    in_order(done.line, "results/lake/fields.nc: cannot be read as netCDF (", "restore the file or run the case again")
