"""Small invented weather files: a wind and a pressure that are bilinear in place and linear in time, written in many ways."""

from datetime import UTC, datetime

import netCDF4
import numpy as np

from swe.atmosphere.period import Period
from swe.constants import EARTH_RADIUS
from swe.mesh.surface import Plane, Sphere

SPHERE, PLANE = Sphere(EARTH_RADIUS), Plane()
BEGIN = datetime(2031, 3, 1, 6, tzinfo=UTC)
PERIOD = Period(BEGIN, 36 * 3600.0)
BOX = (-4.0, 50.0, 2.0, 54.0)
LON, LAT = np.arange(-6.0, 4.1, 0.5), np.arange(49.0, 55.1, 0.5)
HOURS = np.arange(0.0, 49.0, 3.0)
"""Hours since SINCE."""

SINCE = "hours since 2031-03-01 00:00"
POINTS = np.random.default_rng(1).uniform((-4.0, 50.0), (2.0, 54.0), (60, 2))
NAMES = {"wind": ("eastward_wind", "northward_wind"), "pressure": ("air_pressure_at_mean_sea_level",)}
UNITS = {"wind": "m s-1", "pressure": "Pa"}


def wind_x(hours, lon, lat):
    return 5.0 + 0.8 * lon - 0.3 * (lat - 52.0) + 0.05 * lon * (lat - 52.0) + 0.1 * hours


def wind_y(hours, lon, lat):
    return -3.0 + 0.2 * lon + 0.5 * (lat - 52.0) - 0.2 * hours


def pressure(hours, lon, lat):
    return 101000.0 + 120.0 * lon - 80.0 * (lat - 52.0) - 10.0 * hours


FIELDS = {"wind": (wind_x, wind_y), "pressure": (pressure,)}


def truth(kind, seconds, points):
    """Return the fields, (k, n), at points and a model time of PERIOD."""
    hours = seconds / 3600.0 + 6.0
    return np.stack([function(hours, *points.T) for function in FIELDS[kind]])


def write(
    path, kind="wind", lon=LON, lat=LAT, times=HOURS, since=SINCE, calendar=None, dimensions="tyx", names=None, units=None,
    axes=None, hours=None, kind_of_number="f8", change=None, factor=1.0, extra=None, fill=None, attributes=None, **packing,
):  # fmt: skip
    """Write a file and return its path; `change(values, variable number)` before writing, `extra(dataset)` after."""
    axes = axes or ({"units": "degrees_east"}, {"units": "degrees_north"})
    hours = times if hours is None else hours
    order = {"t": "time", "y": "lat", "x": "lon"}
    with netCDF4.Dataset(path, "w") as file:
        for name, values, found in (("lon", lon, axes[0]), ("lat", lat, axes[1])):
            file.createDimension(name, len(values))
            line = file.createVariable(name, "f8", (name,))
            line.setncatts(found)
            line[:] = values
        file.createDimension("time", len(times))
        line = file.createVariable("time", "f8", ("time",))
        line.units = since
        if calendar:
            line.calendar = calendar
        line[:] = times
        for number, standard_name in enumerate(names or NAMES[kind]):
            shape = tuple(order[letter] for letter in dimensions)
            variable = file.createVariable(f"band{number}", kind_of_number, shape, fill_value=fill)
            variable.setncatts({"standard_name": standard_name, "units": units or UNITS[kind], **packing, **(attributes or {})})
            values = factor * FIELDS[kind][number](hours[:, None, None], lon[None, None, :], lat[None, :, None])
            values = values if change is None else change(values, number)
            variable[:] = np.ma.transpose(values, ["tyx".index(letter) for letter in dimensions])
        if extra:
            extra(file)
    return path
