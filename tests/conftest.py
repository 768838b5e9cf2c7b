"""The mark `ranks`, the option `--slow`.

A test marked `ranks(1, 2, 3)` is run three times, by a pytest of its own on each rank of a job under mpiexec (one_rank.py).
There `tmp_path` is one folder for all ranks. Out here only the job is started and its output relayed when it fails.
"""

import os
import re
import sys
import tempfile
from pathlib import Path

import launch
import pytest

HERE = Path(__file__).parent
# Helpers beside the tests can be imported by name; their names are unique.
sys.path.extend(str(folder) for folder in sorted(HERE.iterdir()) if folder.is_dir())


def pytest_addoption(parser):
    parser.addoption("--slow", action="store_true", help="run the tests marked slow as well")


def pytest_generate_tests(metafunc):
    mark = metafunc.definition.get_closest_marker("ranks")
    if mark:
        inside = os.environ.get("SWE_TEST_RANKS")
        counts = [int(inside)] if inside else mark.args
        metafunc.fixturenames.append("_ranks")
        metafunc.parametrize("_ranks", counts, ids=[f"{count}ranks" for count in counts])


def pytest_collection_modifyitems(config, items):
    if not config.getoption("--slow"):
        slow = [item for item in items if item.get_closest_marker("slow")]
        config.hook.pytest_deselected(items=slow)
        items[:] = [item for item in items if item not in slow]
    if "SWE_TEST_RANKS" not in os.environ:
        for item in items:
            if item.get_closest_marker("ranks"):
                # The fixtures are made on the ranks, not here.
                item.setup = lambda: None
                item.runtest = lambda item=item: _run_on_ranks(item)


def _run_on_ranks(item) -> None:
    """Run one test under mpiexec; fail with what each rank said, skip when all ranks skipped."""
    count = item.callspec.params["_ranks"]
    seconds = item.get_closest_marker("ranks").kwargs.get("timeout", 120)
    with tempfile.TemporaryDirectory(prefix="ranks-") as name:
        folder = Path(name)
        (folder / "shared").mkdir()
        words = sys.executable, HERE / "one_rank.py", folder, seconds, item.nodeid
        job = launch.on_ranks(
            count, *words, timeout=seconds + 30, cwd=item.config.rootpath, SWE_TEST_RANKS=str(count), SWE_TEST_FOLDER=name
        )
        pages = [page.read_text(errors="replace") for page in sorted(folder.glob("rank-*"))]
    ends = [re.findall(r"^1 (passed|skipped|xfailed)", page, re.MULTILINE) for page in pages]
    if job.returncode == 0 and ends == [["skipped"]] * count:
        pytest.skip("skipped on all ranks")
    if job.returncode != 0 or len(ends) != count or not all(end and end[-1] != "skipped" for end in ends):
        said = "\n".join(f"----- rank {rank} of {count} -----\n{page}" for rank, page in enumerate(pages))
        pytest.fail(f"{item.nodeid}: exit code {job.returncode}\n{said}\n----- mpiexec -----\n{job.stdout}", pytrace=False)


@pytest.fixture
def tmp_path(tmp_path):
    """Return an empty folder; under mpiexec the same one on all ranks."""
    shared = os.environ.get("SWE_TEST_FOLDER")
    return Path(shared) / "shared" if shared else tmp_path
