"""Smooth start of a forcing.

    ramp(t) = 0 for t <= 0,   (1 - cos(pi t / T))/2 for 0 < t < T,   1 from T on

The waves that a start sends out fall with T: a few periods of the basin's slowest free mode make them small.
"""

from __future__ import annotations

import numpy as np


def ramp(time, duration: float):
    """Return the ramp, 0 to 1, at `time` (s, any shape) since the start; `duration` s, 0 for none. Not collective."""
    if duration <= 0.0:
        return np.where(np.asarray(time) >= 0.0, 1.0, 0.0)
    return 0.5 - 0.5 * np.cos(np.pi * np.clip(np.asarray(time) / duration, 0.0, 1.0))
