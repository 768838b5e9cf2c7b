"""Catalogues of the tide-generating potential, as shipped with the open tidal library pyTMD (MIT licence).

Hartmann & Wenzel 1995 and Cartwright & Tayler 1971 / Cartwright & Edden 1973; both in the normalisation of Cartwright & Tayler.
"""

from collections import defaultdict
from functools import cache
from importlib.util import find_spec
from pathlib import Path

import numpy as np

SIZE = {0: np.sqrt(5 / (4 * np.pi)), 1: np.sqrt(15 / (32 * np.pi)), 2: np.sqrt(15 / (32 * np.pi))}
"""Level in m on the shapes of swe.tide per unit of a catalogue, by species."""


@cache
def lines(name: str) -> dict[tuple[int, ...], float]:
    """Doodson numbers -> size in m, signed: degree 2, all bodies added, no planets in the argument."""
    planets = 5 if name == "hw1995" else 0
    found = defaultdict(float)
    path = Path(find_spec("pyTMD").submodule_search_locations[0]) / "data" / f"{name}_tab.txt"
    for row in path.read_text().splitlines()[1:]:
        words = row.split()
        numbers = [int(word) for word in words[: 7 + planets]]
        if numbers[0] == 2 and not any(numbers[7:]):
            found[tuple(numbers[1:7])] += float(words[7 + planets])
    return dict(found)


def satellites(name: str, main: tuple[int, ...], least: float) -> dict[tuple[int, int, int], float]:
    """Multiples of p, N', p' -> size over that of the main line, for lines of the same multiples of tau, s, h."""
    table = lines(name)
    ratios = {
        tuple(np.subtract(key, main)[3:].tolist()): size / table[main] for key, size in table.items() if key[:3] == main[:3]
    }
    return {key: ratio for key, ratio in ratios.items() if any(key) and abs(ratio) >= least}
