"""The ledger: what should stay the same, how well the subdomains agree, and what it cost."""

from __future__ import annotations

import numpy as np

from swe.analysis.figures.page import dress_time, save, sheet, styled
from swe.analysis.figures.palette import INK, SERIES


@styled
def draw_ledger(result, path):
    """Draw mass, energy, mismatch and products over time into a PNG file; return its path. Not collective."""
    ledger = result.ledger
    figure = sheet(result.title, "Ledger: conservation, agreement of the subdomains, work", 10.0, 6.6)
    panels = figure.subplots(2, 2, sharex=True)
    for draw, axes in zip((_mass, _energy, _errors, _products), panels.ravel(), strict=True):
        dress_time(axes)
        draw(axes, ledger, result.summary)
    for axes in panels[-1]:
        axes.set_xlabel("time (UTC)")
    return save(figure, path)


def _mass(axes, ledger, summary) -> None:
    drift = ledger.series["mass_drift"]
    axes.plot(ledger.times, drift, color=SERIES[0])
    axes.axhline(0.0, color="#8a8a8a", linewidth=0.7, zorder=0)
    # A drift of exactly nothing would leave an axis of absurd numbers; the round-off of one double is the natural frame.
    limit = max(1.15 * np.nanmax(np.abs(drift), initial=0.0), np.finfo(float).eps)
    axes.set(
        ylim=(-limit, limit),
        ylabel="mass drift over mass at the start (1)",
        title=f"mass: largest drift {np.nanmax(np.abs(drift)):.1e}",
    )


def _energy(axes, ledger, summary) -> None:
    kinetic, potential = ledger.series["kinetic_energy"], ledger.series["potential_energy"]
    unit, factor = joules(np.nanmax(kinetic + potential))
    for values, label, colour, style in (
        (kinetic + potential, "both", INK, "-"),
        (kinetic, "kinetic", SERIES[1], "--"),
        (potential, "potential", SERIES[0], "-."),
    ):
        axes.plot(ledger.times, values / factor, color=colour, linestyle=style, label=label)
    axes.set(ylabel=f"energy ({unit})", title="energy of the motion", ylim=(0.0, None))
    axes.legend(loc="best")


def _errors(axes, ledger, summary) -> None:
    for name, label, colour, style in (
        ("mismatch", "mismatch of the subdomains", SERIES[2], "-"),
        ("time_error", "change by the last stage of a step", SERIES[1], "--"),
    ):
        values = ledger.series[name]
        # zero has no place on a logarithmic axis
        shown = np.isfinite(values) & (values > 0.0)
        if shown.any():
            axes.plot(ledger.times[shown], values[shown], color=colour, linestyle=style, label=f"{label} ({ledger.units[name]})")
    axes.set(
        ylabel=f"difference as a level ({ledger.units['mismatch']})", title="agreement of the subdomains, last stage of a step"
    )
    if axes.lines:
        axes.set_yscale("log")
        axes.legend(loc="best")
    else:
        axes.text(0.5, 0.5, "nothing to show: one subdomain, one stage", transform=axes.transAxes, ha="center")


def _products(axes, ledger, summary) -> None:
    hours = np.diff(ledger.times) / np.timedelta64(3_600_000, "ms")
    rate = np.diff(ledger.series["products"]) / hours
    axes.stairs(rate, ledger.times, color=SERIES[0], baseline=None)
    total = ledger.series["products"][-1] if ledger.series["products"].size else 0.0
    steps = f", {total / summary['steps']:.1f} a step" if summary and summary.get("steps") else ""
    repeats = ledger.series["repeats"][-1] if ledger.series["repeats"].size else 0.0
    axes.set(
        ylabel="products per model hour (1/h)",
        title=f"products of the operator: {total:,.0f} in all{steps}; repeats: {repeats:.0f}",
        ylim=(0.0, 1.15 * max(np.max(rate, initial=0.0), 1.0)),
    )


def joules(largest: float) -> tuple[str, float]:
    """Return a unit of energy that keeps the numbers near 1, and its factor to J. Not collective."""
    for unit, factor in (("PJ", 1e15), ("TJ", 1e12), ("GJ", 1e9), ("MJ", 1e6), ("kJ", 1e3)):
        if largest >= factor:
            return unit, factor
    return "J", 1.0
