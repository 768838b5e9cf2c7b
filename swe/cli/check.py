"""`swe check CASE`: validate a case and its inputs, and say what would run."""

from __future__ import annotations


def run(options) -> int:
    from swe.case.reading import read_case
    from swe.simulation.check import check

    case = read_case(options.case)
    for line in (*case.summary_lines(), "", *check(case, options.ranks)):
        print(line)
    return 0
