"""Discrete operators of the staggered C-grid on an orthogonal Voronoi mesh, as sparse matrices.

Every matrix has a row or column for each face, edge or node of the mesh, border edges included. On a restricted mesh the
rows of faces that keep all their neighbours, and of edges between such faces, equal those of the whole mesh.
"""

from __future__ import annotations

from dataclasses import dataclass

from scipy import sparse

from swe.mesh.topology import Mesh
from swe.operators import averaging, divergence, gradient, tangential, vorticity
from swe.operators.reconstruction import axes, reconstruction

__all__ = ["Operators", "axes", "build", "reconstruction"]


@dataclass(frozen=True, eq=False)
class Operators:
    """The operators of one mesh; each a CSR array.

    div           (nf, ne)  m-1, divergence of a transport
    grad          (ne, nf)  m-1, gradient along n; zero rows on border edges
    grad_inside   (ne, nf)  m-1, `grad` but for the edges across an open boundary; the same object where there is none
    along         (ne, nn)  m-1, gradient of a node field along t; zero rows on border edges
    curl          (nn, ne)  m-1, vorticity; zero rows at coast nodes (free slip)
    weights       (ne, ne)  W, antisymmetric bit by bit
    tangential    (ne, ne)  T: u_t = T u
    face_to_edge  (ne, nf)  two-face mean
    node_to_edge  (ne, nn)  two-node mean
    face_to_node  (nn, nf)  kite-weighted mean of the wet faces of this mesh
    kinetic       (nf, ne)  K = kinetic @ u**2
    """

    div: sparse.csr_array
    grad: sparse.csr_array
    grad_inside: sparse.csr_array
    along: sparse.csr_array
    curl: sparse.csr_array
    weights: sparse.csr_array
    tangential: sparse.csr_array
    face_to_edge: sparse.csr_array
    node_to_edge: sparse.csr_array
    face_to_node: sparse.csr_array
    kinetic: sparse.csr_array


def build(mesh: Mesh) -> Operators:
    """Return the operators of `mesh`. Not collective."""
    weights = tangential.antisymmetric_weights(mesh)
    grad = gradient.gradient(mesh)
    return Operators(
        div=divergence.divergence(mesh),
        grad=grad,
        grad_inside=gradient.gradient_inside(mesh, grad),
        along=gradient.gradient_along(mesh),
        curl=vorticity.vorticity(mesh),
        weights=weights,
        tangential=tangential.tangential(mesh, weights),
        face_to_edge=averaging.face_to_edge(mesh),
        node_to_edge=averaging.node_to_edge(mesh),
        face_to_node=averaging.face_to_node(mesh),
        kinetic=averaging.kinetic(mesh),
    )
