"""Small basins that several tests share: invented, closed, quick."""

import numpy as np
from mpi4py import MPI

from swe.dynamics.diagnostics import volume_anomaly
from swe.dynamics.physics import FPlane, NoRotation, Physics
from swe.mesh.lattice import hexagons_in
from swe.mesh.topology import COAST, Mesh, with_depth
from swe.parallel.reductions import Assembly, total
from swe.parallel.schwarz import Agreement
from swe.simulation.basin import cut_and_build

comm = MPI.COMM_WORLD

AGREE = Agreement(tolerance=np.inf, repeats=0)
"""Never repeats: the tests look at the first answer."""


def bowl(lx=400e3, ly=300e3, spacing=20e3, least=500.0, deepest=2500.0) -> Mesh:
    """A rectangle whose bed falls to the middle."""
    mesh = hexagons_in(lx, ly, spacing)
    x, y = mesh.face_xyz[:, 0], mesh.face_xyz[:, 1]
    shape = (x - x.min()) * (x.max() - x) * (y - y.min()) * (y.max() - y)
    return with_depth(mesh, least + (deepest - least) * shape / shape.max())


def physics(f=1e-4, drag=0.0, viscosity=0.0) -> Physics:
    return Physics(9.81, 1025.0, drag, viscosity, FPlane(f) if f else NoRotation())


def hump(mesh: Mesh, height=1.0, radius=60e3, at=(180e3, 160e3)) -> np.ndarray:
    """A Gaussian level on the faces, m: `height` and e-folding scale sqrt(2) `radius` about the place `at`, all in m."""
    x, y = mesh.face_xyz[:, 0], mesh.face_xyz[:, 1]
    return height * np.exp(-((x - at[0]) ** 2 + (y - at[1]) ** 2) / (2 * radius**2))


def along_normals(mesh: Mesh, vector: np.ndarray) -> np.ndarray:
    """Return the components along the edge normals, (ne,), of vectors (ne, 2), (ne, 3) or (2,) given at the edges."""
    vector = np.atleast_2d(vector)
    return (mesh.edge_normal[:, : vector.shape[1]] * vector).sum(axis=1)


class Rig:
    """A basin on the ranks of `on` with a hump in it, ready to step."""

    def __init__(
        self,
        mesh: Mesh,
        count: int,
        overlap: int,
        physics: Physics,
        height=1.0,
        radius=60e3,
        at=(180e3, 160e3),
        on=comm,
        **options,
    ):
        self.share, self.basin = cut_and_build(on, mesh if on.rank == 0 else None, count, overlap, physics, **options)
        for part, state in zip(self.basin.parts, self.basin.states, strict=True):
            state.eta[:] = hump(part.mesh, height, radius, at)
        self.faces = Assembly(on, self.basin.parts, "face", self.share.n_faces)
        self.edges = Assembly(on, self.basin.parts, "edge", self.share.n_edges)
        self.reports = []
        self.volume = float(np.sum(mesh.face_area * mesh.depth)) if mesh is not None else np.nan

    def run(self, stepper, step: float, steps: int, agreement: Agreement = AGREE):
        scale = self.basin.scale(0.0, step)
        for number in range(steps):
            self.reports.append(self.basin.advance(stepper, agreement, number * step, step, scale))
            scale = self.reports[-1].scale
        return self

    def fill(self, level, current=None):
        """Set every state: `level` (nf,), m, and `current` (ne,), m s-1 along the normals, functions of a mesh; None: rest."""
        for part, state in zip(self.basin.parts, self.basin.states, strict=True):
            mesh = part.mesh
            state.eta[:] = level(mesh)
            state.u[:] = 0.0 if current is None else current(mesh)
            state.u[mesh.n_inner :][mesh.border_kind == COAST] = 0.0
        return self

    def scatter(self, eta: np.ndarray | None, u: np.ndarray | None):
        """Set every state from rank 0's arrays of the whole mesh. Collective."""
        for state, level, velocity in zip(self.basin.states, self.faces.scatter(eta), self.edges.scatter(u), strict=True):
            state.eta[:], state.u[:] = level, velocity
        return self

    def eta(self) -> np.ndarray | None:
        return self.faces.gather([state.eta for state in self.basin.states])

    def u(self) -> np.ndarray | None:
        return self.edges.gather([state.u for state in self.basin.states])

    def volume_anomaly(self) -> float:
        """Volume above the datum, m3, summed without round-off. Collective."""
        parts = zip(self.basin.parts, self.basin.patches, self.basin.states, strict=True)
        sums = [[volume_anomaly(patch.water, state.eta, slice(part.n_owned))] for part, patch, state in parts]
        return float(total(self.basin.comm, np.array(sums))[0])
