"""The numbers of a result as tables: settings, conservation, stations, extremes, work.

Each table holds finished texts, so that Markdown and plain text show the same digits. Times are UTC, places are
degrees on the sphere and km on a plane.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from swe.analysis.result import Result, read_result
from swe.constants import CAUTION


@dataclass(frozen=True)
class Table:
    """A title, the heads of the columns with their units, and rows of texts."""

    title: str
    heads: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]

    def markdown(self) -> str:
        """Return the table in Markdown. Not collective."""
        lines = [self.heads, tuple("---" for _ in self.heads), *self.rows]
        return f"## {self.title}\n\n" + "\n".join("| " + " | ".join(line) + " |" for line in lines) + "\n"

    def text(self) -> str:
        """Return the table in aligned columns. Not collective."""
        lines = [self.heads, *self.rows]
        widths = [max(len(line[k]) for line in lines) for k in range(len(self.heads))]
        shown = ["  ".join(cell.ljust(width) for cell, width in zip(line, widths, strict=True)).rstrip() for line in lines]
        return "\n".join([self.title, "-" * len(self.title), *shown]) + "\n"


def report(folder: str | Path, markdown: bool = False) -> str:
    """Return all tables of a result folder, with its title and the caution; in Markdown also its case file.

    Not collective. Raises FileError when there is no readable fields.nc.
    """
    result = read_result(folder)
    state = "finished" if result.summary and result.summary.get("finished") else "not finished: the numbers so far"
    shown = [table.markdown() if markdown else table.text() for table in tables(result)]
    head = f"# {result.title}\n\n{state}\n" if markdown else f"{result.title}\n{'=' * len(result.title)}\n{state}\n"
    case = [f"## Case file\n\n```toml\n{result.case_text.strip()}\n```\n"] if markdown and result.case_text else []
    return "\n".join([head, *shown, *case, CAUTION]) + "\n"


def tables(result: Result) -> list[Table]:
    """Return the tables that the result has the data for. Not collective. Raises FileError."""
    made = [settings(result)]
    if result.ledger is not None and len(result.ledger.times):
        made.append(conservation(result))
    if result.stations is not None and len(result.stations.times):
        made.append(stations(result))
    if result.has_extremes():
        made.append(extremes(result))
    if result.summary is not None:
        made.append(work(result))
    return made


def settings(result: Result) -> Table:
    """Return what was run. Not collective."""
    basin, summary = result.basin, result.summary or {}
    spacing = basin.spacing / 1000.0
    rows = [
        ("begin", _when(result.begin)),
        ("last record of fields", _when(result.times[-1]) if len(result.times) else "none yet"),
        ("faces", f"{basin.area.size:,}"),
        ("area", f"{basin.area.sum() / 1e6:,.1f} km2"),
        ("depth", f"{basin.depth.min():.1f} to {basin.depth.max():.1f} m, mean {_mean(basin.depth, basin.area):.1f} m"),
        ("spacing of face centres", f"{spacing.min():.3g} to {spacing.max():.3g} km, median {np.median(spacing):.3g} km"),
    ]
    for key, label, unit in (
        ("stepper", "time step by", ""),
        ("operator", "linear operator", ""),
        ("step_seconds", "step", " s"),
        ("overlap", "overlap", " layers"),
        ("subdomains", "subdomains", ""),
        ("ranks", "ranks", ""),
    ):
        if key in summary:
            rows.append((label, f"{_number(summary[key])}{unit}"))
    return Table("Settings", ("setting", "value"), tuple(rows))


def conservation(result: Result) -> Table:
    """Return what stayed the same and what did not, from the ledger. Not collective."""
    series, units = result.ledger.series, result.ledger.units
    rows = []
    for name in ("mass_anomaly", "kinetic_energy", "potential_energy", "potential_enstrophy"):
        values = series[name]
        least, most = np.nanmin(values), np.nanmax(values)
        rows.append((f"{name.replace('_', ' ')} ({units[name]})", *(f"{v:z.6g}" for v in (values[0], values[-1], least, most))))
    for name in ("mass_drift", "mismatch", "time_error"):
        values = series[name]
        shown = (values[0], values[-1], np.nanmin(values), np.nanmax(values)) if np.isfinite(values).any() else (np.nan,) * 4
        rows.append((f"{name.replace('_', ' ')} ({units[name]})", *(f"{v:z.2e}" for v in shown)))
    return Table("Conservation and agreement", ("quantity", "first", "last", "least", "largest"), tuple(rows))


def stations(result: Result) -> Table:
    """Return the largest levels and speeds at stations with their times. Not collective."""
    found = result.stations
    speed = np.hypot(found.current[:, :, 0], found.current[:, :, 1])
    rows = []
    for k, name in enumerate(found.names):
        high, low, fast = np.nanargmax(found.level[:, k]), np.nanargmin(found.level[:, k]), np.nanargmax(speed[:, k])
        rows.append(
            (name, _place(result, found.places[k]), f"{found.level[high, k]:z.3f}", _when(found.times[high]))
            + (f"{found.level[low, k]:z.3f}", _when(found.times[low]), f"{speed[fast, k]:z.3f}", _when(found.times[fast]))
        )
    heads = ("station", "place", "highest level (m)", "at", "lowest level (m)", "at", "largest speed (m/s)", "at")
    return Table("Stations", heads, tuple(rows))


def extremes(result: Result) -> Table:
    """Return the extremes of the whole basin over all steps, with place and time. Not collective. Raises FileError."""
    rows = []
    for name, label, unit, pick in (
        ("highest_level", "highest level", "m", np.argmax),
        ("lowest_level", "lowest level", "m", np.argmin),
        ("strongest_current", "largest speed", "m/s", np.argmax),
    ):
        extreme = result.extreme(name)
        face = int(pick(extreme.value))
        depth = f"{result.basin.depth[face]:.1f}"
        rows.append(
            (
                f"{label} ({unit})",
                f"{extreme.value[face]:z.3f}",
                _place(result, result.basin.centres[face]),
                depth,
                _when(extreme.time[face]),
            )
        )
    return Table(f"Extremes {extreme.origin}", ("quantity", "value", "place", "depth (m)", "at"), tuple(rows))


def work(result: Result) -> Table:
    """Return what the run cost, from its summary. Not collective."""
    summary = result.summary
    wall, steps = summary["wall_seconds"], max(summary["steps"], 1)
    seconds: dict[str, float] = {}
    for rank in summary["phases"]:
        for name, value in rank.items():
            seconds[name] = seconds.get(name, 0.0) + (value or 0.0)
    total = max(sum(seconds.values()), 1e-300)
    rows = [
        ("wall time", f"{wall:,.1f} s"),
        ("speed", f"{summary['model_seconds'] / max(wall, 1e-9):,.0f} x real time"),
        ("steps", f"{summary['steps']:,}"),
        ("products of the operator", f"{summary['products']:,} ({summary['products'] / steps:.1f} a step)"),
        ("repeated stages", f"{summary['repeats']:,}"),
        ("messages", f"{summary['messages']:,} ({summary['messages'] / steps:.1f} a step)"),
        ("bytes sent", f"{summary['bytes_sent']:,} ({summary['bytes_sent'] / steps:,.0f} a step)"),
        ("largest memory of a rank", f"{summary['peak_memory_bytes'] / 1e6:,.0f} MB"),
    ]
    rows += [
        (f"share of {name}", f"{100.0 * value / total:.1f} %")
        for name, value in sorted(seconds.items(), key=lambda item: -item[1])
    ]
    return Table("Work", ("quantity", "value"), tuple(rows))


def _mean(values: np.ndarray, area: np.ndarray) -> float:
    return float(values @ area / area.sum())


def _number(value) -> str:
    return f"{value:,g}" if isinstance(value, int | float) else str(value)


def _place(result: Result, place: np.ndarray) -> str:
    if not result.basin.spherical:
        return f"x {place[0] / 1000.0:z.2f}, y {place[1] / 1000.0:z.2f} km"
    return f"lon {(place[0] + 180.0) % 360.0 - 180.0:z.3f}, lat {place[1]:z.3f}"


def _when(time: np.datetime64) -> str:
    return np.datetime_as_string(time.astype("datetime64[m]")).replace("T", " ")
