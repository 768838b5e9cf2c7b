"""Slow twins of the dynamics: the rates from the slow operators, the linear operators by general sparse products."""

import numpy as np
from scipy import sparse

from swe.dynamics.drag import drag_derivatives
from swe.dynamics.friction import Quadratic
from swe.dynamics.viscosity import viscosity_matrix
from swe.operators import reference as slow


def rates(water, eta, u, time):
    """Rates straight from the formulas of swe.dynamics.equations."""
    mesh, physics = water.mesh, water.physics
    h = mesh.depth + eta
    h_edge = slow.face_to_edge(mesh, h)
    flow = h_edge * u
    zeta = slow.vorticity(mesh, u)
    q = slow.node_to_edge(mesh, (water.coriolis_node + zeta) / slow.face_to_node(mesh, h))
    rate = 0.5 * (q * slow.tangential(mesh, flow) + slow.tangential(mesh, q * flow))
    head = slow.kinetic(mesh, u) + physics.gravity * eta
    for forcing in water.forcing:
        if hasattr(forcing, "head"):
            head = head + forcing.head(time)
        if hasattr(forcing, "stress"):
            rate += forcing.stress(time) / (physics.density * h_edge)
    rate -= slow.gradient(mesh, head)
    coefficient, _ = friction(water, h_edge)
    rate -= coefficient * np.hypot(u, slow.tangential(mesh, u)) * u / h_edge
    rate += physics.lateral_viscosity * (slow.gradient(mesh, slow.divergence(mesh, u)) - slow.gradient_along(mesh, zeta))
    rate[mesh.n_inner :] = 0.0
    return -slow.divergence(mesh, flow), rate


def friction(water, h_edge):
    """C_d on the edges, and p of C_d ~ h^-p, straight from the laws: a number is the quadratic law's."""
    law, mesh = water.physics.bottom_drag, water.mesh
    if isinstance(law, float):
        return law, 0.0
    on_edges = [slow.face_to_edge(mesh, value(mesh)) if callable(value) else value for value in vars(law).values()][0]
    return (on_edges, 0.0) if isinstance(law, Quadratic) else (water.physics.gravity * on_edges**2 / h_edge ** (1 / 3), 1 / 3)


def wave(water, mf, ms, rotation):
    """L about the resting depth by general sparse products, (mf + ms, mf + ms)."""
    op, mesh = water.operators, water.mesh
    depth = sparse.diags_array(op.face_to_edge @ mesh.depth)
    q = sparse.diags_array(op.node_to_edge @ (water.coriolis_node / (op.face_to_node @ mesh.depth)))
    turn = 0.5 * (q @ op.tangential @ depth + op.tangential @ q @ depth) * float(rotation)
    level = (-op.div @ depth).tocsr()[:mf, :ms]
    slope = (-water.physics.gravity * op.grad)[:ms, :mf]
    return sparse.block_array([[None, level], [slope, turn.tocsr()[:ms, :ms]]]).tocsr()


def jacobian(water, eta, u, time):
    """The Jacobian of all terms on the whole mesh by general sparse products, (nf + ne, nf + ne)."""
    op, mesh, physics = water.operators, water.mesh, water.physics
    diag = sparse.diags_array
    h = mesh.depth + eta
    h_edge, h_node = op.face_to_edge @ h, op.face_to_node @ h
    flow = h_edge * u
    q_node = (water.coriolis_node + op.curl @ u) / h_node
    q = op.node_to_edge @ q_node
    flow_by_eta, flow_by_u = diag(u) @ op.face_to_edge, diag(h_edge)
    turn = 0.5 * (diag(q) @ op.tangential + op.tangential @ diag(q))
    bend = 0.5 * (diag(op.tangential @ flow) + op.tangential @ diag(flow)) @ op.node_to_edge @ diag(1.0 / h_node)
    by_u, by_t, by_h = drag_derivatives(*friction(water, h_edge), u, op.tangential @ u, h_edge)
    by_h = by_h - water.stress(time) / (physics.density * h_edge**2)
    wet = diag((np.arange(mesh.n_edges) < mesh.n_inner).astype(float))
    level_by = -op.div @ flow_by_eta, -op.div @ flow_by_u
    velocity_by_eta = turn @ flow_by_eta - bend @ diag(q_node) @ op.face_to_node - physics.gravity * op.grad
    velocity_by_eta = velocity_by_eta + diag(by_h) @ op.face_to_edge
    velocity_by_u = turn @ flow_by_u + bend @ op.curl - 2.0 * op.grad @ op.kinetic @ diag(u)
    velocity_by_u = velocity_by_u + diag(by_u) + diag(by_t) @ op.tangential + viscosity_matrix(op, physics.lateral_viscosity)
    blocks = [level_by, (wet @ velocity_by_eta, wet @ velocity_by_u)]
    return sparse.block_array(blocks).tocsr()
