"""Two independent tidal libraries beside ours: names, indices, days."""

from datetime import datetime

import numpy as np
from utide._ut_constants import constit_index_dict

from swe.tide.constituents import TABLE

ORDINAL_2000 = datetime(2000, 1, 1).toordinal() + 0.5
"""2000-01-01 12:00 in the days of utide."""

MJD_2000 = 51544.5
"""The same as a modified Julian day, as pyTMD counts."""

OTHER_NAMES = {"lambda2": "LDA2", "rho1": "RHO1", "sigma1": "SIG1", "theta1": "THE1"}
THEIRS = {name: constit_index_dict.get(OTHER_NAMES.get(name, name).upper()) for name in TABLE}
"""Our name -> index in the tables of utide, None for what it does not know."""

SHARED = [name for name, index in THEIRS.items() if index is not None]


def apart(a, b):
    """Difference of angles, degrees, -180 to 180."""
    return (np.asarray(a) - b + 180.0) % 360.0 - 180.0
