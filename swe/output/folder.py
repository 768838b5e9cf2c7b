"""The result folder of a case, and what may be done to one that is not empty.

    results/<case>/
        fields.nc  stations.nc  ledger.nc  summary.json  report.md  mesh.nc
        figures/   checkpoints/   in-use (while a run writes)

Three ways to claim it:

    begin      a new or empty folder, or one that holds no result: refuses to touch an earlier result
    overwrite  removes the files of an earlier result, and nothing that this program did not make
    resume     needs an earlier result with checkpoints
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from swe.errors import FileError
from swe.output.durable import file_trouble, remove_leftovers
from swe.output.lock import OutputLock

FILES = ("fields.nc", "stations.nc", "ledger.nc", "summary.json", "report.md")
CHECKPOINTS = "step-*.checkpoint"
FIGURES = ("*.png", "*.svg", "*.pdf")


class ResultFolder:
    """A claimed result folder; use it as a context manager, which gives the claim back.

    notes   sentences that the user should see, such as a claim that was taken over
    """

    def __init__(self, path: str | Path):
        self.path = Path(path)
        self.notes: list[str] = []
        self._lock = OutputLock(self.path)

    @property
    def fields(self) -> Path:
        return self.path / "fields.nc"

    @property
    def stations(self) -> Path:
        return self.path / "stations.nc"

    @property
    def ledger(self) -> Path:
        return self.path / "ledger.nc"

    @property
    def summary(self) -> Path:
        return self.path / "summary.json"

    @property
    def figures(self) -> Path:
        return self.path / "figures"

    @property
    def checkpoints(self) -> Path:
        return self.path / "checkpoints"

    def begin(self) -> ResultFolder:
        """Claim the folder for a new result, making it when it is not there. Not collective.

        Raises FileError when it holds an earlier result, is in use, or cannot be written.
        """
        with self._claimed():
            earlier = self._made_by_us()
            if earlier:
                listed = ", ".join(str(path.relative_to(self.path)) for path in earlier[:3])
                raise FileError(
                    f"{self.path}: holds an earlier result ({listed}{' ...' if len(earlier) > 3 else ''}); "
                    "continue it with --resume, replace it with --overwrite, or choose another folder with --results"
                )
        return self

    def overwrite(self) -> ResultFolder:
        """Claim the folder and remove an earlier result, file by file; other files stay. Not collective.

        Raises FileError when it is in use or cannot be written.
        """
        with self._claimed():
            for path in self._made_by_us():
                with file_trouble(path, "removing the earlier result"):
                    path.unlink()
        return self

    def resume(self) -> ResultFolder:
        """Claim the folder to continue its result. Not collective.

        Raises FileError when it holds no checkpoint, is in use, or cannot be written.
        """
        if not any(self.checkpoints.glob(CHECKPOINTS)):
            raise FileError(f"{self.path}: nothing to resume, no checkpoint is there; run without --resume, or correct --results")
        with self._claimed():
            pass
        return self

    def release(self) -> None:
        """Give the claim back. Not collective."""
        self._lock.release()

    @contextmanager
    def _claimed(self) -> Iterator[None]:
        """Claim the folder for the block and after it, make its parts; give it back if anything fails."""
        with file_trouble(self.path, "making the result folder"):
            self.path.mkdir(parents=True, exist_ok=True)
        self._lock.acquire()
        self.notes += [self._lock.note] if self._lock.note else []
        try:
            yield
            remove_leftovers(self.path)
            for folder in (self.figures, self.checkpoints):
                with file_trouble(folder, "making the folder"):
                    folder.mkdir(exist_ok=True)
        except BaseException:
            self.release()
            raise

    def _made_by_us(self) -> list[Path]:
        """Return the files of an earlier result that are there."""
        found = [self.path / name for name in FILES]
        found += sorted(self.checkpoints.glob(CHECKPOINTS))
        found += [path for pattern in FIGURES for path in sorted(self.figures.glob(pattern))]
        return [path for path in found if path.is_file()]

    def __enter__(self) -> ResultFolder:
        return self

    def __exit__(self, *_) -> None:
        self.release()
