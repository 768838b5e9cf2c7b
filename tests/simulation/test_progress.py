"""What a person sees while a run goes on."""

import io
import re

import pytest

from swe.simulation.progress import Progress, Reading, clock, is_terminal

READING = Reading(43_200.0, 1.5e-16, 2.5e12, 3e-6, 2, 0.41, 0.73)


@pytest.mark.parametrize(
    "seconds, text", [(0, "0 d 00:00"), (86_400 + 6.5 * 3600, "1 d 06:30"), (59.0, "0 d 00:01"), (863_940, "9 d 23:59")]
)
def test_model_time_is_days_and_hours(seconds, text):
    assert clock(seconds) == text


def test_a_line_names_every_quantity_with_its_unit():
    out = io.StringIO()
    Progress(0.0, 86_400.0, out, bar=False).show(READING)
    (line,) = out.getvalue().splitlines()
    assert line.startswith("0 d 12:00 of 1 d 00:00, ")
    for part in (
        "x real time",
        "mass error 1.5e-16",
        "energy 2.5e+12 J",
        "mismatch 3.0e-06 m",
        "repeats 2",
        "|u| <= 0.41 m/s",
        "|level| <= 0.73 m",
    ):
        assert part in line
    assert "to go" in line or "ends" in line


def test_a_bar_redraws_its_line_and_ends_it_once():
    out = io.StringIO()
    progress = Progress(0.0, 86_400.0, out, bar=True)
    progress.show(READING)
    progress.line("a note")
    progress.show(READING, last=True)
    text = out.getvalue()
    assert text.count("\r") == 2 and text.endswith("\n")
    assert re.search(r"\[#{10}\.{10}\]", text)
    assert "\na note\n" in text


def test_elsewhere_a_line_is_due_once_a_minute(monkeypatch):
    now = [100.0]
    monkeypatch.setattr("swe.simulation.progress.time.monotonic", lambda: now[0])
    progress = Progress(0.0, 1.0, io.StringIO(), bar=False)
    assert not progress.due()
    now[0] += 59.0
    assert not progress.due()
    now[0] += 1.0
    assert progress.due()


def test_a_file_is_not_a_terminal(tmp_path):
    with open(tmp_path / "log", "w") as out:
        assert not is_terminal(out)
    assert not is_terminal(io.StringIO())


def test_a_launcher_s_pseudo_terminal_does_not_count(monkeypatch):
    class Terminal(io.StringIO):
        def isatty(self):
            return True

    monkeypatch.delenv("PMI_RANK", raising=False)
    monkeypatch.delenv("OMPI_COMM_WORLD_SIZE", raising=False)
    assert is_terminal(Terminal())
    monkeypatch.setenv("OMPI_COMM_WORLD_SIZE", "4")
    monkeypatch.setattr("swe.simulation.progress.os.readlink", lambda path: "/tmp/log")
    assert not is_terminal(Terminal())
    monkeypatch.setattr("swe.simulation.progress.os.readlink", lambda path: "/dev/pts/3")
    assert is_terminal(Terminal())
