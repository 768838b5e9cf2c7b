"""`swe cite CASE`: the references of exactly the methods that a case uses."""

from __future__ import annotations


def run(options) -> int:
    from swe.case.reading import read_case
    from swe.simulation.references import cite

    for line in cite(read_case(options.case)):
        print(line)
    return 0
