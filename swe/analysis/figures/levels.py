"""Maps of the level: the highest one with its time, and snapshots with currents."""

from __future__ import annotations

import numpy as np
from matplotlib.colors import Normalize

from swe.analysis.figures.cells import draw_cells, draw_coast, draw_stations
from swe.analysis.figures.page import HALO, dress_map, map_height, moment, save, scale_bar, sheet, styled
from swe.analysis.figures.palette import HEIGHT, INK, MOMENT, signed

ARROWS_ACROSS = 30
"""Arrows along the longer side of a map at most; more of them turn into a texture."""

FAST = 95.0
"""Percentile of the speeds whose arrow fills 1.6 raster squares; arbitrary."""

PART = 0.98
"""Part of the basin's area whose levels lie within the colours of the snapshots: a corner of a bay that stands out would
bleach all else; the colour bar then ends in points. Arbitrary."""


@styled
def draw_highest(result, path):
    """Draw the highest level of each face and the hour it came into a PNG file; return its path. Not collective."""
    basin, highest = result.basin, result.highest()
    wide = _is_wide(basin)
    size = (9.0, 2.0 * map_height(basin, 7.6) + 2.4) if wide else (10.5, map_height(basin, 4.3) + 2.2)
    figure = sheet(result.title, f"Highest water level {highest.origin}", *size)
    above, below = figure.subplots(2, 1) if wide else figure.subplots(1, 2)
    hours = (highest.time - result.begin) / np.timedelta64(3600, "s")
    for axes, values, cmap, label, unit in (
        (above, highest.value, HEIGHT, "highest level above the datum", "m"),
        (below, hours, MOMENT, "when it came, after the begin of the run", "h"),
    ):
        dress_map(axes, basin)
        cells = draw_cells(axes, basin, values, cmap, None)
        draw_coast(axes, basin)
        axes.set_title(label)
        figure.colorbar(cells, ax=axes, label=f"{label.split(',')[0]} ({unit})", pad=0.01, fraction=0.04, aspect=26)
    scale_bar(above, basin)
    draw_stations(above, result.stations)
    at = int(np.argmax(highest.value))
    above.plot(*basin.centres[at], "*", markersize=11, markerfacecolor="#d55e00", markeredgecolor="white", zorder=8)
    above.set_title(f"highest level above the datum; star: {highest.value[at]:.3f} m, {moment(highest.time[at])}")
    return save(figure, path)


@styled
def draw_snapshots(result, path):
    """Draw level and currents at four moments into a PNG file; return its path. Not collective."""
    basin = result.basin
    records = snapshot_records(len(result.times))
    levels = [result.level(k) for k in records]
    still = np.zeros((basin.area.size, 2))
    currents = [result.current(k) if result.has_currents() else still for k in records]
    rows = -(-len(records) // 2)
    figure = sheet(result.title, "Water level and currents", 12.0, rows * (map_height(basin, 5.2) + 0.45) + 1.2)
    panels = figure.subplots(rows, 2, sharex=True, sharey=True, squeeze=False).ravel()
    limit = max(weighted_quantile(np.abs(levels).max(axis=0), basin.area, PART), 1e-12)
    norm = Normalize(-limit, limit)
    chosen, arrows = arrow_faces(basin), []
    # not the very largest: one jet in a strait would shrink all other arrows to dots
    speeds = np.concatenate([np.hypot(*current[chosen].T) for current in currents])
    fast = max(float(np.percentile(speeds, FAST)), 1e-12)
    for axes, k, level, current in zip(panels, records, levels, currents, strict=False):
        dress_map(axes, basin)
        cells = draw_cells(axes, basin, level, signed(), norm)
        draw_coast(axes, basin, 0.5)
        arrows.append(_draw_arrows(axes, basin, current, chosen, fast))
        axes.set_title(f"{moment(result.times[k])}   level {signed_text(level.min())} to {signed_text(level.max())} m")
        axes.label_outer()
    for axes in panels[len(records) :]:
        axes.set_visible(False)
    scale_bar(panels[0], basin)
    unit = _round(0.6 * fast)
    if result.has_currents():
        key = panels[0].quiverkey(
            arrows[0], 0.93, 0.07, unit, f"{unit:g} m/s", labelpos="W", fontproperties={"size": 8}, zorder=9
        )
        key.text.set_path_effects(HALO)
    beyond = "both" if np.abs(levels).max() > limit else "neither"
    label = "water level above the datum (m)"
    figure.colorbar(cells, ax=list(panels), label=label, extend=beyond, pad=0.01, fraction=0.025, aspect=38)
    return save(figure, path)


def snapshot_records(count: int, panels: int = 4) -> list[int]:
    """Return the records to show: evenly spread up to the last; the first (the start) only when there are few. Not collective."""
    if count <= panels:
        return list(range(count))
    return [round((count - 1) * part / panels) for part in range(1, panels + 1)]


def weighted_quantile(values: np.ndarray, weights: np.ndarray, part: float) -> float:
    """Return the least value that at least `part` of the weight does not exceed. Not collective."""
    order = np.argsort(values)
    covered = np.cumsum(weights[order]) / np.sum(weights)
    return float(values[order][min(int(np.searchsorted(covered, part * (1.0 - 1e-12))), len(order) - 1)])


def arrow_faces(basin) -> np.ndarray:
    """Return faces for arrows: of each square of an even raster the face nearest its middle. Not collective."""
    west, south, east, north = basin.box
    size = (np.array([east, north]) - [west, south]) * basin.metres
    square = size.max() / ARROWS_ACROSS
    place = (basin.centres - [west, south]) * basin.metres / square
    key = np.floor(place).astype(int)
    offset = np.hypot(*(place - key - 0.5).T)
    order = np.lexsort([offset, key[:, 1], key[:, 0]])
    first = np.ones(len(order), dtype=bool)
    first[1:] = (key[order][1:] != key[order][:-1]).any(axis=1)
    return order[first]


def _draw_arrows(axes, basin, current, chosen, fast):
    """Draw arrows whose length grows with the speed; speed `fast` fills 1.6 raster squares."""
    x, y = basin.centres[chosen].T
    east, north = current[chosen].T
    return axes.quiver(
        x, y, east, north,
        angles="uv", pivot="mid", scale_units="width", scale=fast * ARROWS_ACROSS / 1.6, width=0.0021, color=INK, zorder=5,
    )  # fmt: skip


def signed_text(value: float) -> str:
    """Return a level to the millimetre with its sign. Not collective."""
    return f"{value:+z.3f}".replace("-", "−")


def _round(value: float) -> float:
    """Return the value with one digit."""
    return float(f"{value:.1g}")


def _is_wide(basin) -> bool:
    west, south, east, north = basin.box
    width, height = (np.array([east, north]) - [west, south]) * basin.metres
    return width > 1.3 * height
