"""Where a rank's wall time goes, by phase."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import contextmanager


class Phases:
    """Adds up wall seconds by name. Not collective."""

    def __init__(self) -> None:
        self.seconds: dict[str, float] = {}

    @contextmanager
    def __call__(self, name: str) -> Iterator[None]:
        begin = time.perf_counter()
        try:
            yield
        finally:
            self.seconds[name] = self.seconds.get(name, 0.0) + time.perf_counter() - begin
