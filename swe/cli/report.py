"""`swe report FOLDER`: figures and tables of a finished or running result."""

from __future__ import annotations

from pathlib import Path


def run(options) -> int:
    from swe.analysis.figures import draw_all
    from swe.analysis.tables import report
    from swe.output.durable import atomic_write

    folder = Path(options.results)
    print(report(folder))
    atomic_write(folder / "report.md", report(folder, markdown=True).encode())
    for path in draw_all(folder):
        print(path)
    return 0
