"""Where the wall time of each rank went, phase by phase."""

from __future__ import annotations

import numpy as np
from matplotlib.ticker import FixedLocator, MaxNLocator

from swe.analysis.figures.page import save, sheet, styled
from swe.analysis.figures.palette import INK, SERIES

HATCHES = ("", "///", "...", "\\\\\\", "xxx", "---", "++", "ooo")
"""After the colours have been used once they come again with a pattern."""


@styled
def draw_work(result, path):
    """Draw the phases of each rank as stacked bars into a PNG file; return its path. Not collective."""
    summary = result.summary
    names, seconds = phase_table(summary["phases"])
    ranks = np.arange(seconds.shape[0])
    figure = sheet(result.title, _subject(summary), 10.0, 2.6 + min(0.36 * len(ranks), 6.0))
    axes = figure.subplots()
    left = np.zeros(len(ranks))
    for k, name in enumerate(names):
        colour, hatch = SERIES[k % len(SERIES)], HATCHES[k // len(SERIES) % len(HATCHES)]
        share = seconds[:, k].sum() / max(seconds.sum(), 1e-300)
        label = f"{name} ({100.0 * share:.1f} %)"
        axes.barh(ranks, seconds[:, k], left=left, color=colour, hatch=hatch, edgecolor="white", linewidth=0.4, label=label)
        left += seconds[:, k]
    axes.axvline(summary["wall_seconds"], color=INK, linewidth=1.0, linestyle="--", label="wall time of the run")
    axes.set(xlabel="wall time (s)", ylabel="rank", ylim=(len(ranks) - 0.4, -0.6))
    axes.yaxis.set_major_locator(FixedLocator(ranks) if len(ranks) <= 20 else MaxNLocator(integer=True))
    axes.grid(True, axis="x")
    axes.set_axisbelow(True)
    axes.legend(loc="upper left", bbox_to_anchor=(1.0, 1.0), title="share of all ranks", title_fontsize=8, alignment="left")
    return save(figure, path)


def phase_table(phases: list[dict[str, float]]) -> tuple[list[str], np.ndarray]:
    """Return the names of the phases, dearest first, and the seconds (ranks, phases). Not collective."""
    names = list(dict.fromkeys(name for rank in phases for name in rank))
    seconds = np.array([[rank.get(name) or 0.0 for name in names] for rank in phases], dtype=float).reshape(
        len(phases), len(names)
    )
    order = np.argsort(-seconds.sum(axis=0), kind="stable")
    return [names[k] for k in order], seconds[:, order]


def _subject(summary: dict) -> str:
    speed = summary["model_seconds"] / max(summary["wall_seconds"], 1e-9)
    return (
        f"Work: {counted(summary['ranks'], 'rank')}, {counted(summary['subdomains'], 'subdomain')}, {summary['faces']:,} faces, "
        f"{summary['steps']:,} steps in {summary['wall_seconds']:,.0f} s ({speed:,.0f} x real time)"
    )


def counted(number: int, what: str) -> str:
    """Return a number with its noun in the right form. Not collective."""
    return f"{number:,} {what}" + ("" if number == 1 else "s")
