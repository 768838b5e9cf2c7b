"""From a handed-out mesh and physics to the basin of a rank: dynamics on each of its subdomains."""

from __future__ import annotations

from collections.abc import Callable

from mpi4py import MPI

from swe.dynamics.equations import Water
from swe.dynamics.forcing import Forcing
from swe.dynamics.opening import Opening
from swe.dynamics.patch import WaterPatch
from swe.dynamics.physics import Physics, coriolis_at_nodes
from swe.mesh.topology import Mesh
from swe.operators import build
from swe.parallel.distribute import Share, distribute
from swe.parallel.schwarz import Basin

ForcingOn = Callable[[Mesh], tuple[Forcing, ...]]
"""Makes the forcing of one restricted mesh."""


def no_forcing(mesh: Mesh) -> tuple[Forcing, ...]:
    """Return no forcing at all."""
    return ()


OpeningOn = Callable[[Mesh], Opening | None]
"""Makes the open boundaries of one restricted mesh."""


def closed(mesh: Mesh) -> None:
    """Return no open boundary."""


def water_on(mesh: Mesh, physics: Physics, forcing: ForcingOn = no_forcing, opening: OpeningOn = closed) -> Water:
    """Return the equations on one (restricted) mesh. Not collective."""
    return Water(mesh, build(mesh), physics, coriolis_at_nodes(mesh, physics.coriolis), forcing(mesh), opening(mesh))


def basin_of(
    comm: MPI.Comm,
    share: Share,
    physics: Physics,
    forcing: ForcingOn,
    rotation: bool,
    refresh: bool,
    opening: OpeningOn = closed,
    friction: bool = False,
) -> Basin:
    """Return the basin of this rank. Collective.

    rotation  keep rotation in the wave operator; refresh  linearise it about the current depth; friction  take it in as well
    """
    patches = [
        WaterPatch(water_on(part.mesh, physics, forcing, opening), part.mf, part.ms, rotation, refresh, friction)
        for part in share.parts
    ]
    return Basin(comm, share.parts, patches, share.count, physics.gravity)


def cut_and_build(
    comm: MPI.Comm,
    mesh: Mesh | None,
    count: int,
    overlap: int,
    physics: Physics,
    forcing: ForcingOn = no_forcing,
    rotation: bool = True,
    refresh: bool = False,
    opening: OpeningOn = closed,
    friction: bool = False,
) -> tuple[Share, Basin]:
    """Hand out rank 0's mesh and build the dynamics of every subdomain. Collective."""
    share = distribute(comm, mesh, count, overlap)
    return share, basin_of(comm, share, physics, forcing, rotation, refresh, opening, friction)
