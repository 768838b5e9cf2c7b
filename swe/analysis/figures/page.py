"""The sheet that every figure is drawn on: title, caution, axes in the units of the basin, time axis, file.

Figures are made without pyplot: no global state, no window, and the Agg canvas writes the file.
"""

from __future__ import annotations

import textwrap
from pathlib import Path

import matplotlib
import numpy as np
from matplotlib import patheffects, rc_context
from matplotlib.dates import AutoDateLocator, ConciseDateFormatter
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, MaxNLocator

from swe.analysis.figures.palette import INK, LAND
from swe.constants import CAUTION, DEGREE, EARTH_RADIUS
from swe.errors import FileError

DOTS_PER_INCH = 150

HALO = [patheffects.withStroke(linewidth=2.2, foreground="white")]
"""A white rim keeps letters readable on any colour."""

STYLE = {
    "font.family": "DejaVu Sans",
    "font.size": 9.0,
    "axes.titlesize": 9.5,
    "axes.titlelocation": "left",
    "axes.edgecolor": "#8a8a8a",
    "axes.linewidth": 0.7,
    "axes.labelcolor": INK,
    "text.color": INK,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.labelsize": 8.0,
    "ytick.labelsize": 8.0,
    "grid.color": "#d9d9d9",
    "grid.linewidth": 0.6,
    "legend.frameon": False,
    "legend.fontsize": 8.0,
    "lines.linewidth": 1.1,
    "mathtext.default": "regular",
    "axes.formatter.useoffset": False,
}


def sheet(case_title: str, subject: str, width: float, height: float) -> Figure:
    """Return an empty figure (inches) with its title above and the caution at its foot. Not collective."""
    figure = Figure(figsize=(width, height), layout="constrained")
    figure.suptitle(f"{case_title}\n{subject}", x=0.012, ha="left", fontsize=11.5, linespacing=1.35)
    figure.supxlabel(_wrapped(CAUTION, width), x=0.012, ha="left", fontsize=6.5, color="#6b6b6b")
    figure.get_layout_engine().set(w_pad=0.08, h_pad=0.06, wspace=0.03, hspace=0.04)
    return figure


def _wrapped(text: str, width: float) -> str:
    """Return the text in lines that fit `width` inches of 6.5 point letters."""
    return "\n".join(textwrap.wrap(text, int(width * 20)))


def save(figure: Figure, path: Path) -> Path:
    """Write the figure as PNG and return its path. Not collective. Raises FileError."""
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        figure.savefig(path, dpi=DOTS_PER_INCH, facecolor="white", metadata={"Software": None, "Description": CAUTION})
    except OSError as failure:
        raise FileError(f"{path}: the figure cannot be written ({failure.strerror or failure}); check the folder") from None
    return path


def styled(draw):
    """Run a drawing function under the style of this package, whatever the user's settings are."""

    def drawn(*arguments, **options):
        with rc_context():
            matplotlib.rcdefaults()
            matplotlib.rcParams.update(STYLE)
            return draw(*arguments, **options)

    drawn.__doc__, drawn.__name__, drawn.__wrapped__ = draw.__doc__, draw.__name__, draw
    return drawn


def dress_map(axes, basin, box=None) -> None:
    """Give axes the frame of a map: true shape, coordinates with units, land behind. Not collective.

    box   (west, south, east, north) in the coordinates of the basin; None: the whole basin with a margin
    """
    west, south, east, north = box or margined(basin.box)
    axes.set(xlim=(west, east), ylim=(south, north), facecolor=LAND)
    axes.tick_params(length=2.5)
    if basin.spherical:
        axes.set_aspect(1.0 / np.cos(0.5 * (south + north) * DEGREE))
        axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: degrees_text((value + 180.0) % 360.0 - 180.0, "E", "W")))
        axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: degrees_text(value, "N", "S")))
    else:
        axes.set_aspect("equal")
        thousandth = FuncFormatter(lambda value, _: f"{value / 1000.0:g}")
        axes.xaxis.set_major_formatter(thousandth)
        axes.yaxis.set_major_formatter(thousandth)
        axes.set(xlabel="x (km)", ylabel="y (km)")
    axes.xaxis.set_major_locator(MaxNLocator(6, steps=[1, 2, 2.5, 5, 10]))
    axes.yaxis.set_major_locator(MaxNLocator(5, steps=[1, 2, 2.5, 5, 10]))


def map_height(basin, width: float) -> float:
    """Return the height (inches) of a map of the whole basin that is `width` inches wide, at most twice that. Not collective."""
    west, south, east, north = margined(basin.box)
    across, along = (np.array([east, north]) - [west, south]) * basin.metres
    return float(np.clip(width * along / across, 0.25 * width, 2.0 * width))


def margined(box: tuple[float, float, float, float], part: float = 0.03):
    """Return a box widened on all sides by a part of its longer side."""
    west, south, east, north = box
    margin = part * max(east - west, north - south)
    return west - margin, south - margin, east + margin, north + margin


def degrees_text(value: float, positive: str, negative: str) -> str:
    """Return an angle as charts write it, for example 38.5° W."""
    rounded = round(value, 4)
    letter = positive if rounded > 0 else negative if rounded < 0 else ""
    return f"{abs(rounded):g}° {letter}".strip()


def scale_bar(axes, basin) -> None:
    """Draw a bar of round length in the lower left corner. Not collective."""
    west, east = axes.get_xlim()
    south, north = axes.get_ylim()
    metres = EARTH_RADIUS * DEGREE * np.cos(0.5 * (south + north) * DEGREE) if basin.spherical else 1.0
    length = _round_below(0.22 * (east - west) * metres)
    x, y = west + 0.03 * (east - west), south + 0.05 * (north - south)
    axes.plot([x, x + length / metres], [y, y], color=INK, linewidth=2.2, solid_capstyle="butt", zorder=6)
    text = f"{length / 1000.0:g} km" if length >= 1000.0 else f"{length:g} m"
    axes.annotate(text, (x, y), xytext=(0, 3), textcoords="offset points", fontsize=7.5, path_effects=HALO, zorder=6)


def _round_below(value: float) -> float:
    power = 10.0 ** np.floor(np.log10(value))
    return float(max(part for part in (1.0, 2.0, 5.0) if part * power <= value) * power)


def dress_time(axes) -> None:
    """Give axes a horizontal axis of dates in UTC. Not collective."""
    locator = AutoDateLocator(minticks=3, maxticks=8)
    days, hours = "%d %b %Y", "%H:%M"
    axes.xaxis.set_major_locator(locator)
    axes.xaxis.set_major_formatter(
        ConciseDateFormatter(
            locator,
            formats=["%Y", "%b %Y", days, hours, hours, "%H:%M:%S"],
            zero_formats=["", "%Y", days, days, hours, hours],
            show_offset=False,
        )
    )
    axes.grid(True)
    axes.margins(x=0.0)


def moment(time: np.datetime64) -> str:
    """Return a time as people write it, to the minute."""
    return f"{np.datetime_as_string(time.astype('datetime64[m]')).replace('T', ' ')} UTC"
