"""The verb `tides`."""

import re
from datetime import datetime

import pytest

from swe.cli.main import main
from swe.tide.constituents import TABLE
from swe.tide.listing import listing


def test_one_line_of_the_table(capsys):
    """K1 on 2031-03-01: Doodson numbers, speed, period, amplitude, Love factor as published; f, u, V+u as in test_arguments."""
    assert main(["tides", "--date", "2031-03-01", "k1"]) == 0
    head, _, names, row, *_ = capsys.readouterr().out.splitlines()
    assert head == "tidal constituents at 2031-03-01 00:00 UTC"
    assert names.split() == [
        "name",
        "tau",
        "s",
        "h",
        "p",
        "N'",
        "p'",
        "deg/h",
        "period",
        "h",
        "amplitude",
        "Love",
        "f",
        "u",
        "V+u",
    ]
    fixed = ["K1", "1", "1", "0", "0", "0", "0", "15.0410686", "23.9345", "0.142399", "0.736"]
    assert row.split()[:11] == fixed
    assert [float(word) for word in row.split()[11:]] == pytest.approx([0.958, 8.41, 77.02], abs=0.02)


def test_all_constituents(capsys):
    assert main(["tides", "--date", "2031-03-01T06:00"]) == 0
    said = capsys.readouterr().out
    assert [line.split()[0] for line in said.splitlines()[3 : 3 + len(TABLE)]] == list(TABLE)
    assert re.search(r"^M4 .* -  +- ", said, re.MULTILINE)


def test_columns_stand_below_each_other():
    lines = listing(TABLE, datetime(1999, 12, 31, 23, 59))[2 : 3 + len(TABLE)]
    assert len({len(line) for line in lines}) == 1
    assert all(0.0 <= float(line.split()[-1]) < 360.0 for line in lines[1:])


def test_today_is_the_default(capsys):
    assert main(["tides", "M2"]) == 0
    assert re.match(r"tidal constituents at \d{4}-\d\d-\d\d 00:00 UTC\n", capsys.readouterr().out)


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["M22"], 'tidal constituent "M22" is not known; did you mean M2?'),
        (["--date", "1 March"], "--date 1 March: is no date; write 2031-03-01 or 2031-03-01T06:00 (UTC)"),
        (["--date", "1031-03-01"], "tide: the year 1031 is outside 1900 to 2100; give a date within them"),
    ],
)
def test_mistakes(capsys, words, said):
    assert main(["tides", *words]) == 2
    assert capsys.readouterr().err.startswith(said)
