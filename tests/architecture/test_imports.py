"""Who may import whom, read from the syntax trees. The rules are the table of DEVELOPERS.md; a line here is a line there."""

import ast
import sys
import tomllib
from fnmatch import fnmatch
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
ALL = {"case", "mesh", "operators", "exponential", "tide", "dynamics", "steppers", "parallel", "output", "analysis", "atmosphere"}

# Room: what it may import besides itself, errors, constants and the version; "room.module" opens one module of a room.
ROOMS = {
    "errors": set(),
    "constants": set(),
    "case": set(),
    "mesh": set(),
    "atmosphere": {"mesh"},
    "exponential": set(),
    "tide": set(),
    "operators": {"mesh"},
    "dynamics": {"operators", "mesh", "tide"},
    "steppers": {"exponential"},
    "parallel": {"mesh", "exponential", "steppers.contract"},
    "output": {"parallel", "mesh"},
    "analysis": {"operators", "mesh", "output.catalogue"},
    "simulation": ALL,
    "cli": ALL | {"simulation"},
}

# Library: the only places of swe/ that may import it. Others of pyproject.toml's dependencies may be imported anywhere.
LIBRARIES = {
    "mpi4py": ["parallel/*", "simulation/*", "cli/*"],
    # Besides the room of the files: whoever reads one.
    "netCDF4": [
        "output/*",
        "mesh/files.py",
        "mesh/bed.py",
        "analysis/opening.py",
        "analysis/result.py",
        "simulation/start_file.py",
        "simulation/meshing.py",
        "atmosphere/*",
    ],
    "cftime": ["atmosphere/*"],
    "matplotlib": ["analysis/figures/*"],
    "petsc4py": ["steppers/reference.py"],
    "pymetis": ["parallel/partition.py"],
    "shapely": ["mesh/*", "tide/boundary_constants.py", "analysis/*", "simulation/*", "cli/*"],
}


def imports(path: Path):
    """Yield (line, dotted name) of every import of a file, at its top or inside a function; `from a import b` gives a.b."""
    for node in ast.walk(ast.parse(path.read_text(), str(path))):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            base = node.module or ""
            if node.level:
                base = ".".join([*_dotted(path).split(".")[: -node.level], *([base] if base else [])])
            yield from ((node.lineno, f"{base}.{alias.name}") for alias in node.names)


def _dotted(path: Path) -> str:
    """Return swe.room.module; of a package's __init__.py with that name at the end, so that levels count alike."""
    parts = path.with_suffix("").parts
    return ".".join(parts[len(parts) - 1 - parts[::-1].index("swe") :])


def breaches(package: Path, declared: set[str]) -> list[str]:
    """Return the imports of a package that break a rule, a line each."""
    found = []
    for path in sorted(package.rglob("*.py")):
        place = path.relative_to(package).as_posix()
        room = place.split("/")[0].removesuffix(".py")
        if room == "__init__":
            allowed = set()
        elif room in ROOMS:
            allowed = ROOMS[room] | {room, "errors", "constants", "__version__"}
        else:
            found.append(f"swe/{place}: room {room} has no rule here")
            continue
        for line, name in imports(path):
            if not _may(place, name, allowed, declared):
                found.append(f"swe/{place}:{line}: imports {name}")
    return found


def _may(place: str, name: str, allowed: set[str], declared: set[str]) -> bool:
    top, _, inner = name.partition(".")
    if top == "swe":
        return any(inner == part or inner.startswith(part + ".") for part in allowed)
    if top in LIBRARIES:
        return any(fnmatch(place, pattern) for pattern in LIBRARIES[top])
    return top in sys.stdlib_module_names or top in declared


@pytest.fixture(scope="module")
def declared() -> set[str]:
    """Return the import names of the declared dependencies (the same as the names on the index here)."""
    lines = tomllib.loads((ROOT / "pyproject.toml").read_text())["project"]["dependencies"]
    return {line.split(">")[0].strip() for line in lines}


def test_every_import_of_the_program_keeps_its_direction(declared):
    assert breaches(ROOT / "swe", declared) == []


def test_restricted_libraries_are_declared(declared):
    assert set(LIBRARIES) <= declared


@pytest.mark.parametrize(
    ("place", "code"),
    [
        ("mesh/bad.py", "import swe.dynamics"),
        ("mesh/bad.py", "from swe import dynamics"),
        ("mesh/bad.py", "from ..operators import build"),
        ("mesh/bad.py", "def late():\n    from swe.operators import build"),
        ("steppers/bad.py", "from swe.parallel.halo import Halo"),
        ("parallel/bad.py", "from swe.steppers.two_stage import TwoStage"),
        ("exponential/bad.py", "from mpi4py import MPI"),
        ("dynamics/bad.py", "import netCDF4"),
        ("output/bad.py", "import matplotlib.pyplot as plt"),
        ("analysis/bad.py", "import pandas"),
        ("errors.py", "import swe.mesh"),
        ("attic/bad.py", "import math"),
    ],
)
def test_a_planted_breach_is_found(tmp_path, declared, place, code):
    path = tmp_path / "swe" / place
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(code + "\n")
    assert len(breaches(tmp_path / "swe", declared)) == 1


@pytest.mark.parametrize(
    ("place", "code"),
    [
        ("mesh/good.py", "from swe.errors import MeshError\nfrom swe import __version__\nfrom . import topology\nimport numpy"),
        ("parallel/good.py", "from swe.steppers.contract import State\nfrom mpi4py import MPI"),
        ("simulation/good.py", "from swe.output.fields import Fields\nimport swe.constants"),
    ],
)
def test_what_is_allowed_passes(tmp_path, declared, place, code):
    path = tmp_path / "swe" / place
    path.parent.mkdir(parents=True)
    path.write_text(code + "\n")
    assert breaches(tmp_path / "swe", declared) == []
