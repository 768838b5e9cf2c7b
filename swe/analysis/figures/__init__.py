"""Figures of a result as PNG files. The only place that knows matplotlib, which is loaded when a figure is drawn."""

from __future__ import annotations

from pathlib import Path

from swe.analysis.result import Result, read_result

NAMES = ("depth", "highest-level", "snapshots", "stations", "ledger", "work")
"""The figures, in the order in which a report shows them."""


def draw_all(folder: str | Path, into: str | Path | None = None) -> list[Path]:
    """Draw every figure that a result folder has the data for; return the files, in the order of NAMES. Not collective.

    folder   of a result, finished, running or broken off
    into     folder of the figures; None: `figures` in the result folder
    Raises FileError when there is no readable fields.nc.
    """
    result = read_result(folder)
    into = Path(into) if into else result.folder / "figures"
    paths: list[Path] = []
    for name in NAMES:
        paths += draw(result, name, into)
    return paths


def draw(result: Result, name: str, into: Path) -> list[Path]:
    """Draw one figure of NAMES; return its files, none where the result has no data for it yet. Not collective."""
    from swe.analysis.figures.depth import draw_depth
    from swe.analysis.figures.ledger import draw_ledger
    from swe.analysis.figures.levels import draw_highest, draw_snapshots
    from swe.analysis.figures.stations import draw_stations_series
    from swe.analysis.figures.work import draw_work

    has_levels = "level" in result.variables and len(result.times) > 0
    ready, drawing = {
        "depth": (True, draw_depth),
        "highest-level": (has_levels or result.has_extremes(), draw_highest),
        "snapshots": (has_levels, draw_snapshots),
        "stations": (result.stations is not None and len(result.stations.times) > 1, draw_stations_series),
        "ledger": (result.ledger is not None and len(result.ledger.times) > 1, draw_ledger),
        "work": (bool(result.summary and result.summary.get("phases")), draw_work),
    }[name]
    if not ready:
        return []
    made = drawing(result, into / f"{name}.png")
    return made if isinstance(made, list) else [made]
