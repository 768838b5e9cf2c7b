"""A run that is asked to stop saves its state, says where, and ends with code 6; resumed, it is the run that went on.

What mpiexec makes of a signal was measured with Open MPI 4.1.4: SIGUSR1 goes to the ranks; SIGTERM ends them after a second.
"""

import signal
import subprocess

import netCDF4
import pytest
from cases import call, children, started, started_on_ranks, wait_until, write_case
from messages.refusals import in_order
from run.results import checkpoints, different, summary

LONG = {"time.duration": '"20 d"', "checkpoint.every": '"20 min"', "output.fields_every": '"20 min"'}
"""Changes for a run that does not end by itself while the test looks on."""


def under_way(folder, job):
    """Wait until a run in results/lake has saved a state, so that it is amid its steps."""
    wait_until(lambda: list((folder / "results" / "lake" / "checkpoints").glob("step-*.checkpoint")), job)


def goes_on(folder):
    """Resume to a little behind the saved step and compare with a run of that length that nobody stopped."""
    whole = folder / "results" / "lake"
    step = checkpoints(whole)[-1]
    assert summary(whole)["finished"] is False and summary(whole)["steps"] == step
    assert not (whole / "in-use").exists()
    end = 10 * (step // 10 + 1)
    write_case(folder, LONG | {"time.duration": f'"{2 * end} min"'})
    for words in (["--resume"], ["--results", "unbroken"]):
        done = call(folder, "run", "lake.toml", "--quiet", *words)
        assert done.code == 0, done.err
    assert summary(whole)["finished"] is True and summary(whole)["steps"] == end
    assert different(whole, folder / "unbroken") == []


@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGINT, pytest.param(signal.SIGUSR1, marks=pytest.mark.slow)])
def test_a_signal_to_one_process(number, tmp_path):
    write_case(tmp_path, LONG)
    with started(tmp_path, "run", "lake.toml") as job:
        under_way(tmp_path, job)
        job.send_signal(number)
        out, err = job.communicate(timeout=60)
    assert job.returncode == 6, err
    step = checkpoints(tmp_path / "results" / "lake")[-1]
    assert len(err.splitlines()) == 1
    saved = f"state saved in results/lake/checkpoints/step-{step:012d}.checkpoint; continue with --resume"
    in_order(err, f"stopped on request after step {step} at ", saved)
    goes_on(tmp_path)


def test_the_keyboard_before_the_first_step_leaves_nothing_claimed(tmp_path, monkeypatch):
    def interrupted(*_):
        raise KeyboardInterrupt

    monkeypatch.setattr("swe.simulation.run.mesh_for", interrupted)
    write_case(tmp_path)
    done = call(tmp_path, "run", "lake.toml")
    assert done.code == 6 and done.line.startswith("stopped from the keyboard before the first step")
    assert not (tmp_path / "results" / "lake" / "in-use").exists()


def mpiexec_of(job):
    (mpiexec,) = children(job.pid)
    return mpiexec


def a_rank_of(job):
    return children(mpiexec_of(job))[-1]


@pytest.mark.parametrize(
    "target, number",
    [
        # The launcher (scripts/env.sh) hands it to mpiexec as SIGUSR1.
        pytest.param(lambda job: job.pid, signal.SIGTERM, id="SIGTERM to the launcher"),
        pytest.param(mpiexec_of, signal.SIGUSR1, id="SIGUSR1 to mpiexec", marks=pytest.mark.slow),
        pytest.param(a_rank_of, signal.SIGTERM, id="SIGTERM to a rank"),
    ],
)
def test_a_signal_to_a_job_stops_all_ranks_after_the_same_step(target, number, tmp_path):
    write_case(tmp_path, LONG)
    with started_on_ranks(2, tmp_path, "run", "lake.toml", "--quiet") as job:
        under_way(tmp_path, job)
        subprocess.run(["kill", f"-{number.value}", str(target(job))], check=True)
        out, _ = job.communicate(timeout=60)
    assert job.returncode == 6, out
    assert out.count("stopped on request after step ") == 1
    goes_on(tmp_path)


def test_a_signal_that_mpiexec_keeps_leaves_a_second_to_save(tmp_path):
    """A lake this small is saved within that second; the exit code is mpiexec's own, 1."""
    write_case(tmp_path, LONG)
    with started_on_ranks(2, tmp_path, "run", "lake.toml", "--quiet") as job:
        under_way(tmp_path, job)
        subprocess.run(["kill", "-TERM", str(mpiexec_of(job))], check=True)
        out, _ = job.communicate(timeout=60)
    assert job.returncode != 0
    assert checkpoints(tmp_path / "results" / "lake")
    with netCDF4.Dataset(tmp_path / "results" / "lake" / "fields.nc") as data:
        assert data["time"].size >= 1


def test_a_running_result_can_be_reported_and_a_reader_may_go_away(tmp_path):
    write_case(tmp_path, LONG)
    with started(tmp_path, "run", "lake.toml") as job:
        under_way(tmp_path, job)
        job.stdout.close()  # nobody reads what the run says
        done = call(tmp_path, "report", "results/lake")
        assert done.code == 0, done.err
        assert "not finished: the numbers so far" in done.out
        steps = checkpoints(tmp_path / "results" / "lake")
        wait_until(lambda: checkpoints(tmp_path / "results" / "lake") > steps, job)
        job.send_signal(signal.SIGTERM)
        assert job.wait(timeout=60) == 6, job.stderr.read()
