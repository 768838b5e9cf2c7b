"""Depth and mesh: the whole basin, the narrowest passage at the longest island, and how large the faces are."""

from __future__ import annotations

import numpy as np
from matplotlib.colors import LogNorm
from matplotlib.patches import Rectangle
from matplotlib.ticker import FuncFormatter, LogLocator

from swe.analysis.figures.cells import draw_cells, draw_coast, draw_stations
from swe.analysis.figures.page import dress_map, map_height, margined, save, scale_bar, sheet, styled
from swe.analysis.figures.palette import INK, SERIES, deep

WINDOW_FACES = 17
"""Half width of the close view in spacings there: the lines of single faces can be told apart."""


@styled
def draw_depth(result, path):
    """Draw depth and mesh of a result into a PNG file; return its path. Not collective."""
    basin = result.basin
    tall = map_height(basin, 8.4)
    figure = sheet(result.title, f"Depth and mesh: {basin.area.size:,} faces", 10.0, tall + 4.9)
    grid = figure.add_gridspec(2, 2, height_ratios=(tall + 0.3, 3.4), width_ratios=(1.5, 1.0))
    whole, close, sizes = (figure.add_subplot(place) for place in (grid[0, :], grid[1, 0], grid[1, 1]))
    norm = depth_norm(basin.depth)
    window = passage_window(basin)
    for axes, box, lines in ((whole, None, 0.12), (close, window, 0.45)):
        dress_map(axes, basin, box)
        cells = draw_cells(axes, basin, basin.depth, deep(), norm, lines)
        draw_coast(axes, basin)
        scale_bar(axes, basin)
    west, south, east, north = window
    whole.add_patch(
        Rectangle((west, south), east - west, north - south, fill=False, edgecolor="#d55e00", linewidth=1.3, zorder=5)
    )
    for spine in close.spines.values():
        spine.set(edgecolor="#d55e00", linewidth=1.3)
    close.set_title("close view (frame in the map above)")
    draw_stations(whole, result.stations)
    # one map shows all the colours of the other
    bar = figure.colorbar(cells, ax=whole, label="depth below the datum (m)", pad=0.01, fraction=0.04, aspect=28)
    if isinstance(norm, LogNorm):
        bar.ax.yaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        bar.ax.yaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))
        bar.ax.yaxis.set_minor_formatter("")
    bar.ax.invert_yaxis()
    _draw_sizes(sizes, basin)
    return save(figure, path)


def depth_norm(depth):
    """Return a logarithmic scale where depths span more than a factor of 20, else None (linear). Not collective."""
    least, most = float(depth.min()), float(depth.max())
    return LogNorm(least, most) if least > 0.0 and most > 20.0 * least else None


def passage_window(basin) -> tuple[float, float, float, float]:
    """Return the box of the close view round the basin's passage. Not collective."""
    middle = np.array(basin.passage())
    spacing = basin.spacing[basin.nearest(middle[None])[0]]
    half = WINDOW_FACES * spacing * np.array([1.35, 0.85]) / basin.metres
    # moved into the frame of the basin, so that the close view does not show land alone
    box = np.array(margined(basin.box)).reshape(2, 2)
    size = box[1] - box[0]
    half = np.minimum(half, 0.5 * size)
    middle = np.clip(middle, box[0] + half, box[1] - half)
    return (*(middle - half), *(middle + half))


def _draw_sizes(axes, basin) -> None:
    """Draw the distribution of face sizes."""
    kilometres = basin.spacing / 1000.0
    # equal faces would leave a histogram without width
    least, most = min(kilometres.min(), 0.9 * np.median(kilometres)), max(kilometres.max(), 1.1 * np.median(kilometres))
    axes.hist(kilometres, bins=40, range=(least, most), color=SERIES[4], edgecolor="white", linewidth=0.4)
    axes.axvline(np.median(kilometres), color=INK, linewidth=1.0, linestyle="--")
    axes.annotate(
        f"median {np.median(kilometres):.2f} km",
        (np.median(kilometres), 0.96),
        xycoords=("data", "axes fraction"),
        xytext=(4, 0),
        textcoords="offset points",
        va="top",
        fontsize=8,
    )
    axes.set(xlabel="spacing of face centres (km)", ylabel="number of faces", title="size of the faces")
    axes.grid(True, axis="y")
    axes.set_axisbelow(True)
