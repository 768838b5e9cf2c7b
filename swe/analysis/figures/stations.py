"""Series at stations: level and speed of the current, one row a station."""

from __future__ import annotations

import numpy as np

from swe.analysis.figures.page import dress_time, moment, save, sheet, styled
from swe.analysis.figures.palette import SERIES

ROWS = 6
"""Stations on one sheet."""


@styled
def draw_stations_series(result, path):
    """Draw level and speed at the stations into PNG files; return their paths. Not collective.

    Beyond ROWS stations the file names carry -2, -3, ...
    """
    stations = result.stations
    sheets = [range(k, min(k + ROWS, len(stations.names))) for k in range(0, len(stations.names), ROWS)]
    paths = [path if n == 0 else path.with_name(f"{path.stem}-{n + 1}{path.suffix}") for n in range(len(sheets))]
    return [_draw_sheet(result, stations, rows, where) for rows, where in zip(sheets, paths, strict=True)]


def _draw_sheet(result, stations, rows, path):
    figure = sheet(result.title, "Stations: water level and speed of the current", 10.0, 1.5 + 1.75 * len(rows))
    panels = figure.subplots(len(rows), 2, sharex=True, sharey="col", squeeze=False)
    speed = np.hypot(stations.current[:, :, 0], stations.current[:, :, 1])
    for (left, right), k in zip(panels, rows, strict=True):
        for axes, values, colour, unit in ((left, stations.level[:, k], SERIES[0], "m"), (right, speed[:, k], SERIES[1], "m/s")):
            axes.plot(stations.times, values, color=colour)
            dress_time(axes)
            highest = int(np.nanargmax(values))
            axes.plot(stations.times[highest], values[highest], "o", markersize=4, color=colour, clip_on=False)
            axes.set_title(
                f"{stations.names[k]}: highest {values[highest]:.3f} {unit}, {moment(stations.times[highest])}", fontsize=8.5
            )
        left.axhline(0.0, color="#8a8a8a", linewidth=0.7, zorder=0)
        left.set_ylabel("level (m)")
        right.set_ylabel("speed (m/s)")
        right.set_ylim(0.0, max(1.08 * np.nanmax(speed[:, list(rows)]), 1e-6))
    for axes in panels[-1]:
        axes.set_xlabel("time (UTC)")
    return save(figure, path)
