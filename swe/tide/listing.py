"""The table of constituents at a date, as lines of text."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import UTC, datetime

import numpy as np

from swe.constants import DEGREE
from swe.tide.arguments import Arguments
from swe.tide.astronomy import NAMES, days_since_2000
from swe.tide.constituents import constituents

NOTES = (
    "amplitude  of the equilibrium tide, m (Hartmann & Wenzel 1995)     Love  1 + k2 - h2 (Wahr 1981)",
    "f, u  nodal factor and angle     V+u  argument at Greenwich at that moment, degrees; u, V+u and phase lags in degrees",
)


def listing(names: Iterable[str], moment: datetime) -> list[str]:
    """Return the table of the named constituents at a moment (UTC), a line each. Not collective.

    Raises InputError for an unknown constituent and for a year out of range.
    """
    chosen, days = constituents(names), days_since_2000(moment)
    arguments = Arguments.of(chosen)
    f, u = arguments.nodal(days)
    u = u / DEGREE
    stand = np.mod(np.round(arguments.astronomical(days) + u, 2), 360.0)
    if moment.tzinfo is not None:
        moment = moment.astimezone(UTC)
    doodson = "".join(f"{name:>4}" for name in NAMES)
    lines = [
        f"tidal constituents at {moment:%Y-%m-%d %H:%M} UTC",
        "",
        f"{'name':8}{doodson}{'deg/h':>13}{'period h':>12}{'amplitude':>11}{'Love':>7}{'f':>8}{'u':>8}{'V+u':>9}",
    ]
    for k, constituent in enumerate(chosen):
        lines.append(
            f"{constituent.name:8}"
            + "".join(f"{number:4d}" for number in constituent.doodson)
            + f"{constituent.speed:13.7f}{constituent.period:12.4f}"
            + (f"{constituent.amplitude:11.6f}{constituent.love_factor:7.3f}" if constituent.amplitude else f"{'-':>11}{'-':>7}")
            + f"{f[k]:8.4f}{u[k]:8.2f}{stand[k]:9.2f}"
        )
    return [*lines, "", *NOTES]
