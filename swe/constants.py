"""Numbers used by several rooms: value, unit, source. Nothing here is changed at run time."""

import math

GRAVITY = 9.80665
"""Standard gravity, m s-2. Source: 3rd CGPM (1901), resolution 2."""

EARTH_RADIUS = 6.37122e6
"""Mean Earth radius, m. Source: Williamson et al. 1992, J. Comput. Phys. 102, 211."""

EARTH_ROTATION = 7.292e-5
"""Rotation rate of the Earth, rad s-1. Source: Williamson et al. 1992."""

SEA_WATER_DENSITY = 1025.0
"""kg m-3; common practice, no source."""

AIR_DENSITY = 1.225
"""kg m-3, of dry air at 15 C and 1013.25 hPa. Source: ISO 2533:1975, Standard Atmosphere."""

STANDARD_PRESSURE = 101325.0
"""Standard atmosphere, Pa. Source: 10th CGPM (1954), resolution 4."""

DEGREE = math.pi / 180.0
"""One degree in radians."""

CAUTION = (
    "Computed water levels and currents. Not for navigation, flood warning or design without calibration against "
    "local gauges and the judgement of licensed practice; local codes and authorities prevail."
)
"""The caution that every output, figure and report carries."""
