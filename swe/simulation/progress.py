"""What a person sees while a run goes on: a bar on a terminal, one line a minute elsewhere. Rank 0 only.

A reader may go away: a pipe is closed, a connection to a terminal is lost. A run does not end for that, it falls silent.
"""

from __future__ import annotations

import contextlib
import os
import sys
import time
from dataclasses import dataclass
from typing import TextIO

BAR_SECONDS = 0.5
"""Least wall time between two drawings of the bar; arbitrary, fast enough to look alive."""

LINE_SECONDS = 60.0
"""Wall time between two lines when the output is not a terminal."""


def hush() -> None:
    """Send what is still said to standard output nowhere: nobody reads it any more. Not collective."""
    with contextlib.suppress(OSError, ValueError):  # a stand-in for standard output may have no descriptor
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def say(text: str) -> None:
    """Write a line to standard output as long as somebody reads it. Not collective."""
    try:
        print(text, flush=True)
    except OSError:
        hush()


@dataclass(frozen=True)
class Reading:
    """What the progress shows: model_seconds since the begin, and the last step's and last ledger's figures."""

    model_seconds: float
    mass_error: float
    energy: float
    mismatch: float
    repeats: int
    speed: float
    level: float


class Progress:
    """Draws the progress of a run from `begin` to `end` (model seconds since the begin of the case). Not collective."""

    def __init__(self, begin: float, end: float, out: TextIO | None = None, bar: bool | None = None):
        self.begin, self.end = begin, end
        self.out = out or sys.stdout
        self.bar = is_terminal(self.out) if bar is None else bar
        self._started = self._last = time.monotonic()
        self._drawn = False

    def due(self) -> bool:
        """Return whether enough wall time has passed for the next drawing."""
        return time.monotonic() - self._last >= (BAR_SECONDS if self.bar else LINE_SECONDS)

    def show(self, reading: Reading, last: bool = False) -> None:
        """Draw now; `last` ends the bar's line."""
        now = time.monotonic()
        self._last = now
        text = self._text(reading, now - self._started)
        if self.bar:
            done = (reading.model_seconds - self.begin) / max(self.end - self.begin, 1e-30)
            filled = round(20 * min(done, 1.0))
            self._write(f"\r[{'#' * filled}{'.' * (20 - filled)}] {text}\x1b[K" + ("\n" if last else ""))
        else:
            self._write(text + "\n")
        self._drawn = not last

    def line(self, text: str) -> None:
        """Write a line of its own, without tearing the bar."""
        self._write(("\n" if self.bar and self._drawn else "") + text + "\n")
        self._drawn = False

    def _write(self, text: str) -> None:
        try:
            self.out.write(text)
            self.out.flush()
        except OSError:
            hush()

    def _text(self, r: Reading, wall: float) -> str:
        done = r.model_seconds - self.begin
        rate = done / wall if wall > 0 else 0.0
        left = (self.end - r.model_seconds) / rate if rate > 0 else float("inf")
        return (
            f"{clock(r.model_seconds)} of {clock(self.end)}, {rate:,.0f} x real time, {_until(left)}, "
            f"mass error {r.mass_error:.1e}, energy {r.energy:.4g} J, mismatch {r.mismatch:.1e} m, repeats {r.repeats}, "
            f"|u| <= {r.speed:.3g} m/s, |level| <= {r.level:.3g} m"
        )


def clock(seconds: float) -> str:
    """Return model time as days and hours, for example "1 d 06:30"."""
    minutes = int(round(seconds / 60.0))
    days, minutes = divmod(minutes, 1440)
    return f"{days} d {minutes // 60:02d}:{minutes % 60:02d}"


def _until(left: float) -> str:
    if left == float("inf"):
        return "end not yet known"
    return f"{left:.0f} s to go" if left < 120 else f"ends {time.strftime('%a %H:%M', time.localtime(time.time() + left))}"


def is_terminal(out: TextIO) -> bool:
    """Return whether a person watches `out`.

    Some launchers give every rank a pseudo-terminal, so a rank started by one looks at its parent's output instead.
    """
    if not (hasattr(out, "isatty") and out.isatty()):
        return False
    if "OMPI_COMM_WORLD_SIZE" not in os.environ and "PMI_RANK" not in os.environ:
        return True
    try:
        return os.readlink(f"/proc/{os.getppid()}/fd/1").startswith(("/dev/pts/", "/dev/tty"))
    except OSError:
        return False
