"""Fields on faces as coloured polygons, coast lines, stations: what all maps share."""

from __future__ import annotations

import numpy as np
from matplotlib.collections import LineCollection, PolyCollection

from swe.analysis.figures.page import HALO
from swe.analysis.figures.palette import INK


def draw_cells(axes, basin, values, cmap, norm, lines=0.0) -> PolyCollection:
    """Colour the faces by `values` (nf,); `lines` is the width of the mesh lines in points, 0 for none. Not collective."""
    cells = PolyCollection(basin.polygons, array=np.asarray(values), cmap=cmap, norm=norm)
    # without lines each face is rimmed in its own colour: antialiasing would leave pale seams between faces
    cells.set(linewidth=lines or 0.25, edgecolor=(0.1, 0.1, 0.1, 0.55) if lines else "face")
    axes.add_collection(cells, autolim=False)
    return cells


def draw_coast(axes, basin, width=0.7) -> None:
    """Draw the coast of the mesh. Not collective."""
    axes.add_collection(LineCollection(basin.nodes[basin.coast], colors=INK, linewidths=width, zorder=4), autolim=False)


def draw_stations(axes, stations) -> None:
    """Mark the stations with their names. Not collective."""
    if stations is None:
        return
    west, east = axes.get_xlim()
    for name, (x, y) in zip(stations.names, stations.places, strict=True):
        axes.plot(x, y, "o", markersize=4.5, markerfacecolor="white", markeredgecolor=INK, zorder=7)
        left = x > west + 0.75 * (east - west)
        axes.annotate(
            name,
            (x, y),
            xytext=(-6 if left else 6, 4),
            textcoords="offset points",
            ha="right" if left else "left",
            fontsize=8,
            path_effects=HALO,
            zorder=8,
        )
