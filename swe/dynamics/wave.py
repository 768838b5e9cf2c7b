"""The wave operator: the equations linearised about water at rest.

    L = [ 0         -div D_e                ]      unknowns: level of the first mf faces, velocity of the first ms edges
        [ -g grad   (q0 T D_e + T q0 D_e)/2 ]      q0 = mean over two nodes of f / D_v

With the energy weights M = diag(g A_i, l_e d_e D_e) the scaled matrix S = M^(1/2) L M^(-1/2) has the entries

    face i, edge e     -s_ie (g/A_i)^(1/2) b_e                      b_e = (l_e D_e / d_e)^(1/2)
    edge e, face i     +s_ie (g/A_i)^(1/2) b_e
    edge e, edge e'    -W_ee' (q0_e + q0_e')/2 b_e b_e'

and is skew bit by bit, for variable depth, spacing and f: linear energy |M^(1/2) x|^2 / 2 is conserved.
D is the resting depth, or the depth at a given level (`refresh`): still skew, only the scalings change. Values beyond the
first mf faces and ms edges are taken as zero, and so is the level of outer faces beyond an open boundary: what is given
there enters through the remainder. A radiating boundary adds -c/(d/2) on the diagonal of its edges (`opening`) and S is
dissipative. Bottom friction may be added there too, linearised about the current (`damp`): its derivative by u_n on the
diagonal of every edge. Source: method.md, section 4; W: Thuburn et al. 2009, J. Comput. Phys. 228, 8321; friction in the
linear part as in exponential Rosenbrock methods, Hochbruck & Ostermann 2010, Acta Numerica 19, 209, section 2.4.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import sparse

from swe.dynamics.bounds import GravityBound
from swe.dynamics.equations import Water
from swe.errors import NumericalFailure
from swe.mesh.topology import gradient_distance
from swe.operators.sparse import sides


@dataclass(frozen=True, eq=False)
class Pattern:
    """What does not change with depth: where the entries of S stand and their constant factors.

    gravity, gravity_factor, gravity_edge             positions in the data; -+s (g/A)^(1/2); edge whose b multiplies
    rotation, rotation_factor, column_edge            positions in the data, row after row; -W/2; edge of the column
    row_count                                         (ms,) number of `rotation` entries of each edge
    damped, damping, damping_rate                     edges; positions in the data; -c/(d/2) of radiating edges, else 0
    distance                                          (ms,) d, d/2 across an open boundary, m
    """

    indptr: np.ndarray
    indices: np.ndarray
    gravity: np.ndarray
    gravity_factor: np.ndarray
    gravity_edge: np.ndarray
    rotation: np.ndarray
    rotation_factor: np.ndarray
    column_edge: np.ndarray
    row_count: np.ndarray
    damped: np.ndarray
    damping: np.ndarray
    damping_rate: np.ndarray
    distance: np.ndarray


@dataclass(eq=False)
class WaveOperator:
    """L of one solve part; satisfies the contract of the exponential room.

    size        mf + ms
    weights     (size,) square roots of (g A_i, l_e d_e D_e)
    skew        True: S^T = -S bit by bit; False where a boundary radiates, or with friction
    matrix      S, (size, size) CSR
    depth_edge  (ms,) D_e, m
    """

    water: Water
    mf: int
    ms: int
    pattern: Pattern
    bound: GravityBound
    weights: np.ndarray
    depth_edge: np.ndarray
    matrix: sparse.csr_array
    skew: bool = True
    _radius: float | None = None
    _strongest: float = 0.0

    @property
    def size(self) -> int:
        return self.mf + self.ms

    def product(self, y: np.ndarray) -> np.ndarray:
        """Return S y, (size,). Not collective."""
        return self.matrix @ y

    def apply(self, x: np.ndarray) -> np.ndarray:
        """Return L x, (size,), in unscaled variables (m s-1, m s-2). Not collective."""
        return (self.matrix @ (self.weights * x)) / self.weights

    def transport(self, x: np.ndarray) -> np.ndarray:
        """Return D_e u of the velocities in x, (ms,), m2 s-1: the level rows of L x are -div of it. Not collective."""
        return self.depth_edge * x[self.mf :]

    def refresh(self, eta: np.ndarray) -> None:
        """Put the depth at level `eta` (nf,) in the place of the reference depth, in place. Not collective.

        Raises NumericalFailure where that depth is not positive.
        """
        mesh, pattern = self.water.mesh, self.pattern
        h_node, h_edge = self.water.thickness(eta)
        self.depth_edge[:] = _wet(mesh, h_edge[: self.ms])
        shape = mesh.edge_length[: self.ms] * self.depth_edge
        np.sqrt(shape * pattern.distance, out=self.weights[self.mf :])
        b = np.sqrt(shape / pattern.distance)
        self.matrix.data[pattern.gravity] = pattern.gravity_factor * b[pattern.gravity_edge]
        if pattern.rotation.size:
            q = self.water.potential_vorticity(self.water.coriolis_node, h_node)[: self.ms]
            entries = np.repeat(q, pattern.row_count) + q[pattern.column_edge]
            entries *= np.repeat(b, pattern.row_count) * b[pattern.column_edge]
            entries *= pattern.rotation_factor
            self.matrix.data[pattern.rotation] = entries
        self._radius = None

    def damp(self, rate: np.ndarray) -> None:
        """Put bottom friction, rates (ms,), s-1, >= 0, on the diagonal, in place; only if made with friction. Not collective."""
        rate = rate[self.pattern.damped]
        self.matrix.data[self.pattern.damping] = self.pattern.damping_rate - rate
        self._strongest = float(rate.max(initial=0.0))

    @property
    def radius(self) -> float:
        """Upper bound of the spectral radius, s-1. Not collective.

        The sharp local bound of gravity waves (swe.dynamics.bounds) plus the largest absolute row sum of the rotation block, plus
        the strongest friction.
        """
        if self._radius is None:
            self._radius = self.bound(self.depth_edge)
            if self.pattern.rotation.size:
                rows = np.repeat(np.arange(self.ms), self.pattern.row_count)
                self._radius += float(np.bincount(rows, np.abs(self.matrix.data[self.pattern.rotation])).max())
        return self._radius + self._strongest


def wave_operator(
    water: Water, mf: int, ms: int, rotation: bool, eta: np.ndarray | None = None, friction: bool = False
) -> WaveOperator:
    """Return the wave operator of the first `mf` faces and `ms` edges. Not collective.

    rotation  keep the Coriolis block (it is dropped anyway where f = 0 everywhere)
    eta       (nf,) level whose depth is the reference, m; None: the resting depth
    friction  make room for bottom friction (`damp`)
    """
    mesh = water.mesh
    pattern = _pattern(water, mf, ms, rotation and bool(np.any(water.coriolis_node)), friction)
    # what radiates out to sea, or rubs on the bottom, is lost to the basin: then L is dissipative
    skew = not pattern.damping.size
    matrix = sparse.csr_array((np.zeros(pattern.indices.size), pattern.indices, pattern.indptr), shape=(mf + ms, mf + ms))
    weights = np.empty(mf + ms)
    weights[:mf] = np.sqrt(water.physics.gravity * mesh.face_area[:mf])
    bound = GravityBound(mesh, mf, ms, water.physics.gravity)
    operator = WaveOperator(water, mf, ms, pattern, bound, weights, np.empty(ms), matrix, skew)
    matrix.data[pattern.damping] = pattern.damping_rate
    operator.refresh(np.zeros(mesh.n_faces) if eta is None else eta)
    return operator


def _pattern(water: Water, mf: int, ms: int, rotation: bool, friction: bool) -> Pattern:
    edge, face, sign = sides(water.mesh)
    use = (edge < ms) & ~water.mesh.face_outer[face]
    edge, face, sign = edge[use], face[use], sign[use]
    factor = sign * np.sqrt(water.physics.gravity / water.mesh.face_area[face])
    turn = water.operators.weights[:ms, :ms].tocoo() if rotation else sparse.coo_array((ms, ms))
    loss = water.opening.damping(ms) if water.opening else np.zeros(ms)
    damped = np.arange(ms) if friction else np.flatnonzero(loss)
    rows = np.concatenate((face, mf + edge, mf + turn.row, mf + damped))
    columns = np.concatenate((mf + edge, face, mf + turn.col, mf + damped))
    order = np.lexsort((columns, rows))
    place = np.empty(order.size, dtype=np.intp)
    place[order] = np.arange(order.size)
    n, m = edge.size, 2 * edge.size + turn.nnz
    turned = place[2 * n : m]
    by_row = np.argsort(turned)
    return Pattern(
        indptr=np.concatenate(([0], np.cumsum(np.bincount(rows, minlength=mf + ms)))).astype(np.int32),
        indices=columns[order].astype(np.int32),
        gravity=place[: 2 * n],
        gravity_factor=np.concatenate((-factor, factor)),
        gravity_edge=np.concatenate((edge, edge)),
        rotation=turned[by_row],
        rotation_factor=-0.5 * turn.data[by_row],
        column_edge=turn.col[by_row].astype(np.intp),
        row_count=np.bincount(turn.row, minlength=ms),
        damped=damped,
        damping=place[m:],
        damping_rate=-loss[damped],
        distance=gradient_distance(water.mesh)[:ms],
    )


def _wet(mesh, depth_edge: np.ndarray) -> np.ndarray:
    """Return `depth_edge` if all of it is positive."""
    if depth_edge.size and not depth_edge.min() > 0.0:
        worst = int(np.argmin(np.where(np.isnan(depth_edge), -np.inf, depth_edge)))
        x, y, z = mesh.edge_xyz[worst]
        raise NumericalFailure(
            f"wave operator: depth {depth_edge[worst]:.4g} m at edge {mesh.edge_id[worst]} ({x:.0f}, {y:.0f}, {z:.0f} m), "
            "must be > 0; deepen the shallowest faces or shorten the step"
        )
    return depth_edge
