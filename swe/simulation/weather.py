"""Wind and air pressure of a case: constant stress, files, a storm. Every rank opens the files for its own part.

[wind] file and [pressure] file are CF grids (netCDF) or the record of one station (CSV); [storm] track is a CSV. Their
stresses and heads add up. On open boundaries the level follows the pressure: eta_b gains -(p - reference)/(rho g).
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np

from swe.atmosphere.gridded import open_pressure, open_wind
from swe.atmosphere.in_time import InTime, refuse_gaps
from swe.atmosphere.period import Period
from swe.atmosphere.places import box_of, edge_points, face_points
from swe.atmosphere.station import read_station
from swe.atmosphere.track import read_track
from swe.constants import DEGREE, EARTH_ROTATION
from swe.dynamics.forcing import Forcing
from swe.dynamics.forcing.drag_laws import drag_law
from swe.dynamics.forcing.pressure import AirPressure
from swe.dynamics.forcing.storm import Storm, StormPressure, StormWind, Surroundings
from swe.dynamics.forcing.wind import ConstantWind, WindStress
from swe.errors import InputError
from swe.mesh.surface import Plane, Sphere, Surface
from swe.mesh.topology import Mesh


def weather_on(case, mesh: Mesh) -> tuple[Forcing, ...]:
    """Return the forcing of the air on a restricted mesh. Not collective. Raises InputError naming the file."""
    wind = case.wind
    forcing: list[Forcing] = [ConstantWind.on(mesh, wind.east, wind.north)] if wind.east or wind.north else []
    law = drag_law(wind.law, wind.cap) if wind.law else None
    if wind.file is not None:
        forcing.append(WindStress(mesh, InTime(_wind(case, mesh), edge_points(mesh)), law, wind.air_density))
    if case.storm.track is not None:
        forcing.append(WindStress(mesh, StormWind(_storm(case, mesh), mesh), law, wind.air_density))
    return (*forcing, *pressures_on(case, mesh))


def pressures_on(case, mesh: Mesh) -> tuple[AirPressure, ...]:
    """Return the air pressures of a case on a restricted mesh; they add up. Not collective. Raises InputError."""
    density, reference = case.earth.density, case.pressure.reference
    pressures: list[AirPressure] = []
    if case.pressure.file is not None:
        pressures.append(AirPressure(InTime(_pressure(case, mesh), face_points(mesh)), density, reference))
    if case.storm.track is not None:
        pressures.append(AirPressure(StormPressure(_storm(case, mesh), mesh), density, reference))
    return tuple(pressures)


def refuse_bad_weather(case, mesh: Mesh) -> None:
    """Read everything that the weather of a case will need once, on the whole mesh. Not collective (rank 0).

    Raises InputError naming the file and the dates where a value is missing or the record too short.
    """
    if case.wind.file is not None:
        refuse_gaps(_wind(case, mesh), edge_points(mesh))
    if case.pressure.file is not None:
        refuse_gaps(_pressure(case, mesh), face_points(mesh))
    if case.storm.track is not None:
        _storm(case, mesh)


def barometer(case, mesh: Mesh) -> Callable[[float], np.ndarray] | None:
    """Return time -> level (k,), m, that the pressure adds beyond the outer faces of a mesh; None without any. Not collective."""
    outer = np.flatnonzero(mesh.face_outer)
    pressures = pressures_on(case, mesh) if outer.size else ()
    if not pressures:
        return None
    gravity = case.earth.gravity
    return lambda time: sum(pressure.inverse_barometer(time, gravity)[outer] for pressure in pressures)


def _surface(mesh: Mesh) -> Surface:
    return Sphere(mesh.radius) if mesh.spherical else Plane()


def _period(case) -> Period:
    return Period(case.time.begin, case.time.duration)


def _is_table(path: Path) -> bool:
    return path.suffix.lower() == ".csv"


def _wind(case, mesh: Mesh):
    path = case.wind.file
    if not _is_table(path):
        return open_wind(path, _surface(mesh), box_of(mesh), _period(case))
    record = read_station(path, _period(case)).wind
    if record is None:
        raise InputError(f"{path}: the station has no wind; give speed and direction, or leave [wind] file out")
    return record


def _pressure(case, mesh: Mesh):
    path = case.pressure.file
    if not _is_table(path):
        return open_pressure(path, _surface(mesh), box_of(mesh), _period(case))
    record = read_station(path, _period(case)).pressure
    if record is None:
        raise InputError(f"{path}: the station has no pressure; give a pressure column, or leave [pressure] file out")
    return record


def _storm(case, mesh: Mesh) -> Storm:
    settings = case.storm
    coriolis = None
    if not mesh.spherical:
        turning = case.earth.rotation == "f-plane"
        coriolis = 2.0 * EARTH_ROTATION * np.sin(case.earth.latitude * DEGREE) if turning else 0.0
    around = Surroundings(settings.reduction, settings.inflow, settings.translation_share, case.wind.air_density, coriolis)
    return Storm(read_track(settings.track, _surface(mesh), _period(case)), around, mesh.radius)
