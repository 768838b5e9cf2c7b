"""The table of constituents against published tables and an independent library."""

import numpy as np
import pytest
import tide_catalogues
from tide_libraries import SHARED, THEIRS
from utide._ut_constants import ut_constants

from swe.errors import InputError
from swe.tide.constituents import TABLE, constituents

# Doodson numbers, degrees per hour, amplitude of Hartmann & Wenzel 1995 (m), Love factor: open tidal libraries. Amplitude of
# Schwiderski 1980 (m): from memory.
PUBLISHED = {
    "M2": ((2, 0, 0, 0, 0, 0), 28.9841042, 0.244206, 0.693, 0.242334),
    "S2": ((2, 2, -2, 0, 0, 0), 30.0000000, 0.113607, 0.693, 0.112841),
    "N2": ((2, -1, 0, 1, 0, 0), 28.4397295, 0.046757, 0.693, 0.046398),
    "K2": ((2, 2, 0, 0, 0, 0), 30.0821373, 0.030869, 0.693, 0.030704),
    "K1": ((1, 1, 0, 0, 0, 0), 15.0410686, 0.142399, 0.736, 0.141565),
    "O1": ((1, -1, 0, 0, 0, 0), 13.9430356, 0.101293, 0.695, 0.100514),
    "P1": ((1, 1, -2, 0, 0, 0), 14.9589314, 0.047123, 0.706, 0.046843),
    "Q1": ((1, -2, 0, 1, 0, 0), 13.3986609, 0.019394, 0.695, 0.019256),
    "Mf": ((0, 2, 0, 0, 0, 0), 1.0980330, 0.042014, 0.693, 0.041742),
    "Mm": ((0, 1, 0, -1, 0, 0), 0.5443747, 0.022193, 0.693, 0.022026),
}

ASTRONOMICAL = [constituent for constituent in TABLE.values() if constituent.amplitude]


@pytest.mark.parametrize("name", PUBLISHED)
def test_published_table(name):
    doodson, speed, amplitude, love, older = PUBLISHED[name]
    constituent = TABLE[name]
    assert constituent.doodson == doodson
    assert constituent.speed == pytest.approx(speed, abs=1e-7)
    assert constituent.period == pytest.approx(360.0 / speed, rel=1e-6)
    assert constituent.amplitude == amplitude
    assert constituent.love_factor == pytest.approx(love, abs=5e-4)
    # The two scalings in use differ by 0.7 %; a value of the other one would show here.
    assert constituent.amplitude / older == pytest.approx(1.0067, abs=0.0015)


@pytest.mark.parametrize("name", SHARED)
def test_speeds_of_an_independent_library(name):
    """utide 0.4, table in cycles per hour."""
    assert TABLE[name].speed == pytest.approx(360.0 * ut_constants.const.freq[THEIRS[name]], abs=1e-7)


def test_the_library_knows_nearly_all():
    assert set(TABLE) - set(SHARED) == {"Mtm", "MSqm", "MNS2"}


@pytest.mark.parametrize("constituent", ASTRONOMICAL, ids=lambda c: c.name)
def test_amplitudes_and_offsets_are_those_of_the_catalogue(constituent):
    """Hartmann & Wenzel 1995, degree 2: cosines of a sign for species 0 and 2, sines for species 1 (Cartwright & Tayler 1971)."""
    size = tide_catalogues.lines("hw1995")[constituent.doodson] * tide_catalogues.SIZE[constituent.species]
    assert constituent.amplitude == pytest.approx(abs(size), abs=6e-7)
    offset = {0: (0.0, 180.0), 1: (-90.0, 90.0), 2: (180.0, 0.0)}[constituent.species][int(size > 0)]
    assert constituent.offset == offset


@pytest.mark.parametrize("constituent", ASTRONOMICAL, ids=lambda c: c.name)
def test_amplitudes_of_an_older_catalogue(constituent):
    """Cartwright & Edden 1973, given to 1e-5 before scaling: within 6e-4 or a few of its last digits."""
    size = abs(tide_catalogues.lines("cte1973")[constituent.doodson]) * tide_catalogues.SIZE[constituent.species]
    assert constituent.amplitude == pytest.approx(size, rel=6e-4, abs=2e-5)


def test_no_large_line_is_missing():
    """Lines of the catalogue above 3 mm, other than satellites, are in the table."""
    heads = {constituent.doodson[:3] for constituent in ASTRONOMICAL}
    for key, size in tide_catalogues.lines("hw1995").items():
        if abs(size) * tide_catalogues.SIZE[key[0]] > 0.003 and any(key[:3]):
            assert key[:3] in heads


@pytest.mark.parametrize(
    ("name", "love"),
    [("J1", 0.691), ("OO1", 0.693), ("pi1", 0.703), ("psi1", 0.528), ("phi1", 0.666), ("2N2", 0.693), ("Ssa", 0.693)],
)
def test_love_factors_near_the_resonance(name, love):
    """Wahr 1981, table 5, from memory; psi1 and phi1 lie beyond the resonance."""
    assert TABLE[name].love_factor == pytest.approx(love, abs=3e-3)


def test_compound_constituents_are_sums():
    """By definition."""
    for constituent in TABLE.values():
        if constituent.parts and constituent.name != "M3":
            assert constituent.speed == pytest.approx(sum(n * TABLE[part].speed for part, n in constituent.parts), abs=1e-12)
            assert constituent.amplitude == constituent.love_factor == 0.0
    assert TABLE["MK3"].offset == 90.0 and TABLE["MO3"].offset == -90.0
    assert TABLE["2SM2"].doodson == (2, 4, -4, 0, 0, 0)


def test_names_in_either_case():
    assert [constituent.name for constituent in constituents(["m2", " MU2", "mSF"])] == ["M2", "mu2", "MSf"]


def test_unknown_name():
    with pytest.raises(InputError, match='tidal constituent "M22" is not known; did you mean M2. known are M2, S2, N2, K2'):
        constituents(["S2", "M22"])
    with pytest.raises(InputError, match='"?wind" is not known; known are M2'):
        constituents(["wind"])


def test_name_given_twice():
    with pytest.raises(InputError, match="tidal constituent K1 is given twice"):
        constituents(["K1", "M2", "k1"])


def test_names_are_distinct_whatever_the_case():
    assert len({name.lower() for name in TABLE}) == len(TABLE)
    numbers = [constituent.doodson for constituent in ASTRONOMICAL]
    assert len(set(numbers)) == len(numbers) and np.all(np.array([c.speed for c in TABLE.values()]) > 0)
