"""Atomic writing and clear lines for the troubles of file systems."""

import errno
import shutil

import pytest
from output.output_examples import python

from swe.errors import FileError
from swe.output import durable
from swe.output.durable import atomic_write, file_trouble


def test_content_is_replaced_and_nothing_else_is_left(tmp_path):
    path = tmp_path / "summary.json"
    atomic_write(path, b"old")
    atomic_write(path, b"new")
    assert path.read_bytes() == b"new" and [item.name for item in tmp_path.iterdir()] == ["summary.json"]


@pytest.mark.parametrize("failing", ["sync_file", "sync_folder"])
def test_a_failure_before_the_end_leaves_no_half_file(failing, tmp_path, monkeypatch):
    def full(path):
        raise OSError(errno.ENOSPC, "No space left on device")

    path = tmp_path / "summary.json"
    atomic_write(path, b"old")
    monkeypatch.setattr(durable, failing, full)
    said = r"summary.json: writing the file failed \(No space left on device.*free on that disk\); free space"
    with pytest.raises(FileError, match=said):
        atomic_write(path, b"new")
    assert path.read_bytes() in (b"old", b"new") and [item.name for item in tmp_path.iterdir()] == ["summary.json"]


def test_a_full_disk_keeps_the_old_content(tmp_path):
    """A limit of file size stands for the full disk."""
    path = tmp_path / "summary.json"
    done = python(
        """
import resource, sys
from swe.errors import FileError
from swe.output.durable import atomic_write
atomic_write(sys.argv[1], b"old")
resource.setrlimit(resource.RLIMIT_FSIZE, (1000, resource.RLIM_INFINITY))
try:
    atomic_write(sys.argv[1], bytes(5000))
except FileError as failure:
    print(failure)
""",
        path,
    )
    advice = "raise the limit of file size (ulimit -f) or choose another folder"
    assert done.stdout == f"{path}: writing the file failed (File too large); {advice}\n", done.stderr
    assert path.read_bytes() == b"old" and [item.name for item in tmp_path.iterdir()] == ["summary.json"]


def test_places_where_nothing_can_be_written(tmp_path):
    (tmp_path / "file").write_text("here first")
    (tmp_path / "folder").mkdir()
    with pytest.raises(FileError, match="one of the folders in the path is a file"):
        atomic_write(tmp_path / "file" / "summary.json", b"x")
    with pytest.raises(FileError, match="check the path"):
        atomic_write(tmp_path / "absent" / "summary.json", b"x")
    with pytest.raises(FileError, match="directory"):
        atomic_write(tmp_path / "folder", b"x")
    with pytest.raises(FileError, match="/proc/summary.json: writing the file failed"):
        atomic_write("/proc/summary.json", b"x")
    assert sorted(item.name for item in tmp_path.iterdir()) == ["file", "folder"]


def test_a_full_disk_is_suspected_whatever_the_library_said(tmp_path, monkeypatch):
    """On a full disk netCDF reports EACCES when a file is made (tried on a small file system in memory)."""
    monkeypatch.setattr(durable.shutil, "disk_usage", lambda path: shutil._ntuple_diskusage(100e6, 99e6, 1e6))
    with pytest.raises(FileError, match=r"\(Permission denied; 1.0 MB free on that disk\); free space on that disk or choose"):
        with file_trouble(tmp_path / "fields.nc", "making the file"):
            raise PermissionError(errno.EACCES, "Permission denied")


def test_other_errors_pass():
    with pytest.raises(ZeroDivisionError):
        with file_trouble("a.nc", "counting"):
            1 / 0  # noqa: B018
    with pytest.raises(FileError, match="a.nc: counting failed .NetCDF: HDF error"):
        with file_trouble("a.nc", "counting"):
            raise RuntimeError("NetCDF: HDF error")
