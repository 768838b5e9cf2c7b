"""One writer at a time: living holders refused, dead ones replaced, no race."""

import fcntl
import json
import os
import signal
import subprocess
import threading

import pytest
from output.output_examples import kill, python, start

from swe.errors import FileError
from swe.output.lock import NAME, OutputLock

HOLDER = """
import sys
from swe.output.lock import OutputLock
OutputLock(sys.argv[1]).acquire()
print("held", flush=True)
sys.stdin.read()
"""


def holder(folder) -> subprocess.Popen:
    process = start(HOLDER, folder)
    assert process.stdout.readline() == "held\n"
    return process


def rewrite(folder, **changes) -> None:
    path = folder / NAME
    path.write_text(json.dumps(json.loads(path.read_text()) | changes))


def test_it_appears_and_goes(tmp_path):
    with OutputLock(tmp_path) as lock:
        said = json.loads(lock.path.read_text())
        assert said["pid"] == os.getpid() and said["host"] == os.uname().nodename and said["taken"]
        assert lock.note == ""
        assert [item.name for item in tmp_path.iterdir()] == [NAME]
    assert list(tmp_path.iterdir()) == []


def test_a_living_holder_is_refused_and_a_killed_one_replaced(tmp_path):
    with holder(tmp_path) as process:
        with pytest.raises(FileError, match=f"in use by process {process.pid} on .* since .*wait for it, stop it, or choose"):
            OutputLock(tmp_path).acquire()
        os.kill(process.pid, signal.SIGKILL)
        process.wait()
        with OutputLock(tmp_path) as lock:
            assert f"taken over from process {process.pid}" in lock.note
    assert list(tmp_path.iterdir()) == []


def test_a_killed_holder_that_nobody_collected_counts_as_dead(tmp_path):
    with holder(tmp_path) as process:
        os.kill(process.pid, signal.SIGKILL)
        os.waitid(os.P_PID, process.pid, os.WEXITED | os.WNOWAIT)  # ended, still in the process table
        with OutputLock(tmp_path) as lock:
            assert lock.note


def test_the_same_process_is_refused_twice(tmp_path):
    with OutputLock(tmp_path):
        with pytest.raises(FileError, match=f"in use by process {os.getpid()}"):
            OutputLock(tmp_path).acquire()


def test_a_pid_that_was_given_out_again_is_not_the_holder(tmp_path):
    OutputLock(tmp_path).acquire()
    rewrite(tmp_path, began="another boot 17")
    with OutputLock(tmp_path) as lock:
        assert "taken over" in lock.note


def test_another_host_is_refused_because_nobody_can_tell(tmp_path):
    OutputLock(tmp_path).acquire()
    rewrite(tmp_path, host="elsewhere", pid=2**22 + 1)
    with pytest.raises(FileError, match=f"on elsewhere since .*nobody can tell.*delete {tmp_path}/{NAME}"):
        OutputLock(tmp_path).acquire()


@pytest.mark.parametrize("content", ["", "[]", "{}", "\x00", '{"pid": "7"}'])
def test_a_damaged_lock_is_replaced_with_a_note(content, tmp_path):
    (tmp_path / NAME).write_text(content)
    with OutputLock(tmp_path) as lock:
        assert "damaged; replaced" in lock.note


def test_a_lock_that_another_took_over_is_left_alone(tmp_path):
    lock = OutputLock(tmp_path).acquire()
    rewrite(tmp_path, pid=1)
    lock.release()
    assert (tmp_path / NAME).exists()


def test_one_of_many_takes_over_a_dead_lock(tmp_path):
    kill(holder(tmp_path))
    code = """
import sys
from swe.errors import FileError
from swe.output.lock import OutputLock
sys.stdin.readline()
try:
    OutputLock(sys.argv[1]).acquire()
    print("won", flush=True)
except FileError:
    print("lost", flush=True)
sys.stdin.read()
"""
    rivals = [start(code, tmp_path) for _ in range(6)]
    for rival in rivals:
        rival.stdin.write("go\n")
        rival.stdin.flush()
    said = [rival.stdout.readline().strip() for rival in rivals]
    for rival in rivals:
        rival.communicate()
    assert sorted(said) == ["lost"] * 5 + ["won"]


def test_claims_of_one_host_come_one_at_a_time(tmp_path):
    """Whoever judges a lock dead and replaces it must not be overtaken in between."""
    handle = os.open(tmp_path, os.O_RDONLY)
    fcntl.flock(handle, fcntl.LOCK_EX)
    lock = OutputLock(tmp_path)
    claim = threading.Thread(target=lock.acquire)
    claim.start()
    claim.join(0.2)
    assert claim.is_alive() and not lock.path.exists()
    os.close(handle)
    claim.join(30)
    assert lock.path.exists()
    lock.release()


def test_without_hard_links_it_still_excludes(tmp_path, monkeypatch):
    def refused(*_):
        raise OSError(1, "Operation not permitted")

    monkeypatch.setattr(os, "link", refused)
    with OutputLock(tmp_path):
        with pytest.raises(FileError, match="in use"):
            OutputLock(tmp_path).acquire()


def test_no_folder_no_lock(tmp_path):
    (tmp_path / "file").write_text("here first")
    for place in (tmp_path / "absent", tmp_path / "file", "/proc"):
        with pytest.raises(FileError, match="claiming the result folder failed"):
            OutputLock(place).acquire()


def test_importing_the_lock_needs_no_mpi():
    done = python("import sys, swe.output.lock, swe.output.fields, swe.output.folder; print('mpi4py' in sys.modules)")
    assert done.stdout == "False\n", done.stderr
