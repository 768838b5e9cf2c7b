"""The scripts people start: sound bash, quick when nothing is to be done, one clear line when something is missing."""

import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]


def _bash(path: Path) -> bool:
    return path.is_file() and (path.suffix == ".sh" or path.read_bytes().startswith(b"#!/usr/bin/env bash"))


SCRIPTS = sorted(path for folder in ("scripts", "run", ".ci") for path in (ROOT / folder).iterdir() if _bash(path))


def run(*words, **options) -> subprocess.CompletedProcess:
    return subprocess.run([*map(str, words)], text=True, capture_output=True, stdin=subprocess.DEVNULL, timeout=120, **options)


@pytest.fixture
def copy():
    """Return a copy of what the install reads, in a folder that every user may read, without .venv."""
    folder = Path(tempfile.mkdtemp(prefix="install-"))
    folder.chmod(0o755)
    shutil.copytree(ROOT / "scripts", folder / "scripts", ignore=shutil.ignore_patterns("__pycache__"))
    for name in ("requirements.lock", "requirements-petsc.lock", "pyproject.toml"):
        shutil.copy(ROOT / name, folder)
    yield folder
    shutil.rmtree(folder)


def test_the_scripts_are_there():
    names = {path.relative_to(ROOT).as_posix() for path in SCRIPTS}
    assert {"scripts/install", "scripts/test", "scripts/check", "run/demo", "run/workstation", ".ci/run"} <= names


@pytest.mark.parametrize("script", SCRIPTS, ids=lambda path: path.name)
def test_bash_parses_it_and_it_can_be_started(script):
    done = run("bash", "-n", script)
    assert (done.returncode, done.stderr) == (0, "")
    assert os.access(script, os.X_OK) == (script.suffix != ".sh")


@pytest.mark.parametrize("script", SCRIPTS, ids=lambda path: path.name)
def test_shellcheck_has_nothing_to_say(script):
    if not shutil.which("shellcheck"):
        pytest.skip("shellcheck is not on this machine")
    done = run("shellcheck", "--shell=bash", "-x", "-P", ROOT / "scripts", script, cwd=ROOT)
    assert done.returncode == 0, done.stdout


def test_every_pin_is_exact_and_every_dependency_is_pinned():
    import tomllib

    lines = [line for name in ("requirements.lock", "requirements-petsc.lock") for line in (ROOT / name).read_text().splitlines()]
    pins = dict(line.split("==") for line in lines if not line.startswith("#"))
    pins = {name.lower().replace("_", "-") for name, version in pins.items() if version}
    project = tomllib.loads((ROOT / "pyproject.toml").read_text())
    groups = [project["project"]["dependencies"], *project["dependency-groups"].values()]
    assert {line.split(">")[0].lower() for group in groups for line in group} <= pins


def test_a_second_install_is_at_once_and_silent():
    if run(ROOT / "scripts" / "install", "--check").returncode != 0:
        pytest.skip("this .venv was not made by scripts/install")
    begin = time.monotonic()
    done = run(ROOT / "scripts" / "install")
    assert (done.returncode, done.stdout, done.stderr) == (0, "", "")
    # The promise of the script, not a benchmark.
    assert time.monotonic() - begin < 5


def test_check_of_a_bare_tree_says_no_and_changes_nothing(copy):
    assert run(copy / "scripts" / "install", "--check").returncode == 1
    assert not (copy / ".venv").exists() and not (copy / "build").exists()


def test_the_stamp_is_void_when_a_pin_or_the_folder_changes(copy):
    # A .venv that is only a link and a stamp, made by the script's own function.
    (copy / ".venv" / "bin").mkdir(parents=True)
    (copy / ".venv" / "bin" / "python").symlink_to(sys.executable)
    install = copy / "scripts" / "install"
    functions = install.read_text().split("links()")[0].replace('cd "$(dirname "${BASH_SOURCE[0]}")/.."', f'cd "{copy}"')
    done = run("bash", "-c", functions + "\nfingerprint >.venv/stamp")
    assert done.returncode == 0, done.stderr
    assert run(install, "--check").returncode == 0
    assert run(install, "--check", env=os.environ | {"PETSC_DIR": "/opt/petsc"}).returncode == 1
    moved = copy / "elsewhere"
    shutil.copytree(copy, moved, symlinks=True, ignore=shutil.ignore_patterns("elsewhere"))
    assert run(moved / "scripts" / "install", "--check").returncode == 1
    with open(copy / "requirements.lock", "a") as lock:
        lock.write("another==1.0\n")
    assert run(install, "--check").returncode == 1


@pytest.mark.skipif(os.geteuid() != 0, reason="needs root, to become a user who may not use apt-get")
def test_missing_system_parts_are_named_in_one_line_with_the_command(copy):
    bare = copy / "bin"
    bare.mkdir()
    for name in "bash cat cut dirname env flock grep id mkdir mktemp paste rm sed sha256sum".split():
        (bare / name).symlink_to(shutil.which(name))
    copy.chmod(0o777)
    nobody = 65534
    done = run(copy / "scripts" / "install", env={"PATH": str(bare), "HOME": str(copy)}, user=nobody, group=nobody)
    assert done.returncode == 3
    assert done.stderr.count("\n") == 1
    for part in ("a C compiler", "make", "MPI with mpicc", "BLAS", "sudo apt-get install", "libopenmpi-dev"):
        assert part in done.stderr


def test_a_folder_without_petsc_is_refused_in_one_line(copy):
    (copy / ".venv").symlink_to(ROOT / ".venv")
    done = run(copy / "scripts" / "build-petsc", env=os.environ | {"PETSC_DIR": str(copy), "PETSC_ARCH": "x"})
    assert done.returncode == 3
    assert done.stderr.count("\n") == 1 and str(copy) in done.stderr and "unset" in done.stderr


def test_an_unknown_option_is_refused():
    assert run(ROOT / "scripts" / "install", "--now").returncode == 2
    assert run(ROOT / "scripts" / "launch", "many", "true").returncode == 2


def test_help_loads_nothing_heavy():
    code = "import sys, swe.cli.main as m; m.parser(); print(sorted({'numpy', 'scipy', 'mpi4py', 'netCDF4'} & set(sys.modules)))"
    assert run(sys.executable, "-c", code, cwd=ROOT).stdout == "[]\n"
