"""One writer at a time: the lock file of a result folder.

The file `in-use` holds, as JSON, host, pid, when that process began, and when the lock was taken. It appears complete or
not at all (a finished neighbour file is hard-linked to the name, which fails when the name exists).

    holder's host is this one, and no process has that pid and that beginning     the holder died: taken over, with a note
    holder's host is this one, and it lives                                       refused
    holder's host is another one                                                  refused: from here nobody can tell

The beginning of a process guards against a pid that was given out again, as happens in containers. Taking over is
serialised by flock on the folder where the file system has it; only processes of one host ever take over.
"""

from __future__ import annotations

import fcntl
import json
import os
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path

from swe.errors import FileError
from swe.output.durable import file_trouble, remove_if_there

NAME = "in-use"


class OutputLock:
    """The claim of this process to a result folder; use it as a context manager.

    note   "" or the sentence that says whose claim was taken over
    Raises FileError from `acquire` when another process writes there or the folder cannot be written. Not collective.
    """

    def __init__(self, folder: str | Path):
        self.folder = Path(folder)
        self.path = self.folder / NAME
        self.note = ""
        self._held: dict | None = None

    def acquire(self) -> "OutputLock":
        """Take the lock or raise FileError. Not collective."""
        mine = {"host": _host(), "pid": os.getpid(), "began": _began(os.getpid()), "taken": _now()}
        with file_trouble(self.folder, "claiming the result folder"), _one_at_a_time(self.folder):
            if not _appear(self.path, mine):
                self._take_over(mine)
        self._held = mine
        return self

    def release(self) -> None:
        """Give the folder back; a lock that is no longer ours stays. Not collective."""
        if self._held is not None and _read(self.path) == self._held:
            remove_if_there(self.path)
        self._held = None

    def _take_over(self, mine: dict) -> None:
        holder = _read(self.path)
        if holder is not None:
            self._refuse_living(holder)
            self.note = (
                f"{self.path}: taken over from process {holder['pid']}, which began to write there at {holder['taken']} "
                "and has ended without saying so"
            )
        else:
            self.note = f"{self.path}: not a lock of this program or damaged; replaced"
        self.path.unlink()
        if not _appear(self.path, mine):
            raise FileError(f"{self.folder}: another process claimed this folder just now; wait for it or choose another folder")

    def _refuse_living(self, holder: dict) -> None:
        who = f"process {holder['pid']} on {holder['host']} since {holder['taken']}"
        if holder["host"] != _host():
            raise FileError(
                f"{self.folder}: in use by {who}, and from {_host()} nobody can tell whether it still runs; "
                f"wait for it, choose another folder, or delete {self.path} if it has ended"
            )
        began = _began(holder["pid"])
        same = began is None or holder["began"] is None or began == holder["began"]
        if same and _alive(holder["pid"]):
            raise FileError(f"{self.folder}: in use by {who}; wait for it, stop it, or choose another folder")

    def __enter__(self) -> "OutputLock":
        return self if self._held is not None else self.acquire()

    def __exit__(self, *_) -> None:
        self.release()


def _appear(path: Path, content: dict) -> bool:
    """Make the lock file with its content in one stroke; return False when there is one already."""
    part = path.with_name(f".{path.name}.{os.getpid()}.part")
    text = json.dumps(content) + "\n"
    try:
        part.write_text(text)
        os.link(part, path)
    except FileExistsError:
        return False
    except OSError:  # a file system without hard links
        return _appear_slowly(path, text)
    finally:
        remove_if_there(part)
    return True


def _appear_slowly(path: Path, text: str) -> bool:
    try:
        with open(path, "x") as file:
            file.write(text)
    except FileExistsError:
        return False
    return True


def _read(path: Path) -> dict | None:
    """Return the holder named in a lock file; None when it names none."""
    try:
        holder = json.loads(path.read_text())
        sound = isinstance(holder, dict) and isinstance(holder["pid"], int) and holder["pid"] > 0
        return holder if sound and {"host", "began", "taken"} <= set(holder) else None
    except (ValueError, KeyError, UnicodeDecodeError, FileNotFoundError):
        return None


@contextmanager
def _one_at_a_time(folder: Path) -> Iterator[None]:
    handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
    try:
        try:
            fcntl.flock(handle, fcntl.LOCK_EX)
        except OSError:  # no flock here: the hard link alone decides, which fails only when two take over one dead lock at once
            pass
        yield
    finally:
        os.close(handle)


def _alive(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    except PermissionError:  # it is there and belongs to another user
        return True
    return True


def _began(pid: int) -> str | None:
    """Return when a process began, as boot and clock ticks since; "" if it has ended, None where the system does not tell."""
    try:
        boot = Path("/proc/sys/kernel/random/boot_id").read_text().strip()
        after_name = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()
        if after_name[0] in "ZX":  # ended and not yet collected by its parent
            return ""
        return f"{boot} {after_name[19]}"  # field 22 of proc_pid_stat(5); the text after the name starts with field 3
    except (OSError, IndexError):
        return None


def _host() -> str:
    return os.uname().nodename


def _now() -> str:
    return datetime.now(UTC).isoformat(timespec="seconds")
