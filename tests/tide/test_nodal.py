"""Nodal factors and angles against Schureman's closed formulas, an independent library and the catalogues."""

import numpy as np
import pytest
import tide_catalogues
from tide_libraries import THEIRS
from utide._ut_constants import ut_constants

from swe.constants import DEGREE
from swe.tide.arguments import Arguments
from swe.tide.constituents import TABLE, constituents
from swe.tide.nodal import Modulation
from swe.tide.satellites import SATELLITES

NODE = np.arange(0.0, 360.0)
"""Longitude N of the ascending node, degrees."""

# Longitudes that a record may meet: p turns in 8.85 years, N in 18.6.
RNG = np.random.default_rng(3)
ANY = RNG.uniform(0.0, 360.0, (6, 400))


def modulation(name, longitudes, only_node=False):
    """f e^{iu}, with or without the satellites in p and p'."""
    whole = Modulation.of(constituents([name]))
    if only_node:
        node = (whole.angles[:, 0] == 0) & (whole.angles[:, 2] == 0)
        whole = Modulation(whole.powers, whole.ratios[:, node], whole.angles[node])
    f, u = whole.factors(longitudes)
    return (f * np.exp(1j * u))[0]


def at_nodes(node):
    longitudes = np.zeros((6, len(node)))
    longitudes[4] = -node
    return longitudes


def schureman():
    """f e^{iu} over N by the closed formulas of Schureman 1958, SP 98, paragraphs and numbers from memory.

    I inclination of the moon's orbit to the equator; xi, nu the usual arcs. K1 and K2 are the sum of a lunar and a solar part.
    """
    w, i, n = 23.452 * DEGREE, 5.145 * DEGREE, NODE * DEGREE
    incl = np.arccos(np.cos(w) * np.cos(i) - np.sin(w) * np.sin(i) * np.cos(n))
    nu = np.arctan2(np.sin(i) * np.sin(n), np.cos(i) * np.sin(w) + np.sin(i) * np.cos(w) * np.cos(n))
    half_sum = np.arctan2(np.cos((w - i) / 2) * np.sin(n / 2), np.cos((w + i) / 2) * np.cos(n / 2))
    half_difference = np.arctan2(np.sin((w - i) / 2) * np.sin(n / 2), np.sin((w + i) / 2) * np.cos(n / 2))
    xi = n - half_sum - half_difference
    even = 1 - 1.5 * np.sin(i) ** 2
    k1 = np.sin(2 * incl) / (np.sin(2 * w) * even) * np.exp(-1j * nu)
    k2 = np.sin(incl) ** 2 / (np.sin(w) ** 2 * even) * np.exp(-2j * nu)
    # Sun's part of the mean amplitude: 0.3347 and 0.0727 in units of the moon's.
    sun1, sun2 = 0.3347 / (0.3347 + np.sin(2 * w) * even), 0.0727 / (0.0727 + np.sin(w) ** 2 * even)
    return {
        "M2": (np.cos(incl / 2) / (np.cos(w / 2) * np.cos(i / 2))) ** 4 * np.exp(2j * (xi - nu)),
        "O1": np.sin(incl)
        * np.cos(incl / 2) ** 2
        / (np.sin(w) * np.cos(w / 2) ** 2 * np.cos(i / 2) ** 4)
        * np.exp(1j * (2 * xi - nu)),
        "J1": k1,
        "OO1": np.sin(incl)
        * np.sin(incl / 2) ** 2
        / (np.sin(w) * np.sin(w / 2) ** 2 * np.cos(i / 2) ** 4)
        * np.exp(-1j * (2 * xi + nu)),
        "Mf": np.sin(incl) ** 2 / (np.sin(w) ** 2 * np.cos(i / 2) ** 4) * np.exp(-2j * xi),
        "Mm": (2 / 3 - np.sin(incl) ** 2) / ((2 / 3 - np.sin(w) ** 2) * even) + 0j,
        "K1": sun1 + (1 - sun1) * k1,
        "K2": sun2 + (1 - sun2) * k2,
    }


CLOSED = schureman()
SAME_AS = {"N2": "M2", "2N2": "M2", "mu2": "M2", "nu2": "M2", "Q1": "O1", "2Q1": "O1", "sigma1": "O1", "rho1": "O1", "Mtm": "Mf"}
RANGES = {"M2": (0.9632, 1.0378), "O1": (0.8057, 1.1828), "K1": (0.8817, 1.1128), "K2": (0.7462, 1.3162), "Mf": (0.6252, 1.4518)}


@pytest.mark.parametrize("name", [*CLOSED, *SAME_AS])
def test_closed_formulas(name):
    """Within 1e-3 in f and 0.1 degrees in u for every position of the node."""
    closed = CLOSED[SAME_AS.get(name, name)]
    ours = modulation(name, at_nodes(NODE), only_node=True)
    df, du = np.abs(np.abs(ours) - np.abs(closed)).max(), np.degrees(np.abs(np.angle(ours / closed))).max()
    print(f"{name}: f {df:.5f}, u {du:.3f}")
    assert df < 1e-3
    assert du < 0.1


@pytest.mark.parametrize("name", RANGES)
def test_published_ranges(name):
    """Schureman 1958, table 14."""
    f = np.abs(modulation(name, at_nodes(NODE), only_node=True))
    assert (f.min(), f.max()) == pytest.approx(RANGES[name], abs=1.5e-3)


@pytest.mark.parametrize("name", ["M2", "N2", "K2", "K1", "O1", "Q1", "L2", "J1", "NO1", "M4", "MN4", "MK3", "MO3", "M6"])
def test_an_independent_library(name):
    """utide 0.4 (Foreman's satellites), those of degree 2, at any position of node and perigee: 1e-3 in f, 0.1 degrees in u.

    Its table is older (Cartwright & Tayler 1971) and drops more: four times as much for Q1, L2, J1 and NO1. Compound constituents
    by powers of the parts; tolerance times the number of parts.
    """
    theirs = np.ones(ANY.shape[1], dtype=complex)
    for part, power in TABLE[name].parts or ((name, 1),):
        theirs *= _theirs(part) ** power
    count = sum(abs(n) for _, n in TABLE[name].parts) or (4 if name in ("Q1", "L2", "J1", "NO1") else 1)
    ours = modulation(name, ANY)
    assert np.abs(np.abs(ours) - np.abs(theirs)).max() < 1e-3 * count
    assert np.degrees(np.abs(np.angle(ours / theirs))).max() < 0.1 * count


def _theirs(name):
    table = ut_constants.sat
    mine = (table.iconst == THEIRS[name] + 1) & (table.ilatfac == 0)
    turns = table.deldood[mine] @ ANY[3:] / 360.0 + table.phcorr[mine, np.newaxis]
    return 1 + table.amprat[mine] @ np.exp(2j * np.pi * turns)


@pytest.mark.parametrize("name", SATELLITES)
def test_satellites_are_those_of_the_catalogue(name):
    """Hartmann & Wenzel 1995: no more, no fewer, equal to the last digit given."""
    theirs = tide_catalogues.satellites("hw1995", TABLE[name].doodson, 3e-4)
    assert {line[:3] for line in SATELLITES[name]} == set(theirs)
    for *angle, ratio in SATELLITES[name]:
        assert ratio == pytest.approx(theirs[tuple(angle)], abs=5.1e-5)


@pytest.mark.parametrize("name", ["M2", "N2", "K2", "K1", "O1", "Q1", "Mf", "Mm"])
def test_another_catalogue(name):
    """All of a group in Cartwright & Edden 1973, at any position of node and perigee: 1e-3 in f, 0.1 degrees in u.

    That catalogue ends at 1e-5, which is 3e-4 of Mm: twice as much there.
    """
    ours, theirs = modulation(name, ANY), group("cte1973", name)
    loose = 2 if name == "Mm" else 1
    assert np.abs(np.abs(ours) - np.abs(theirs)).max() < 1e-3 * loose
    assert np.degrees(np.abs(np.angle(ours / theirs))).max() < 0.1 * loose


def group(catalogue, name):
    whole = np.ones(ANY.shape[1], dtype=complex)
    for angle, ratio in tide_catalogues.satellites(catalogue, TABLE[name].doodson, 0.0).items():
        whole += ratio * np.exp(1j * DEGREE * (np.array(angle) @ ANY[3:]))
    return whole


@pytest.mark.parametrize("name", ["M2", "S2", "N2", "K2", "K1", "O1", "Q1", "Mf", "Mm"])
def test_what_is_left_out_is_small(name):
    """The whole group of the catalogue, at any position of node and perigee: below 1e-3; S2, taken as the sun's, 0.003."""
    assert np.abs(modulation(name, ANY) - group("hw1995", name)).max() < (3e-3 if name == "S2" else 1e-3)


@pytest.mark.parametrize("name", ["S2", "P1", "T2", "R2", "pi1", "phi1", "psi1", "Sa", "Ssa", "S4", "S6"])
def test_constituents_of_the_sun_are_not_modulated(name):
    assert np.array_equal(modulation(name, ANY), np.ones(ANY.shape[1]))


def test_compound_factors_are_products():
    """By definition: 2SM2 takes M2 with multiple -1, so that f is multiplied and u subtracted; M3 is M2 to 3/2."""
    f, u = Modulation.of(constituents(["M2", "K1", "2SM2", "M4", "MK3", "M3"])).factors(ANY)
    assert np.allclose(f[2:], [f[0], f[0] ** 2, f[0] * f[1], f[0] ** 1.5], rtol=1e-13)
    assert np.allclose(u[2:], [-u[0], 2 * u[0], u[0] + u[1], 1.5 * u[0]], atol=1e-13)


def test_the_node_turns_in_18_6_years():
    """f of K2 comes back after 18.613 years; common knowledge, checked to 0.03 years."""
    days = np.arange(0.0, 10000.0, 5.0)
    f = Arguments.of(constituents(["K2"])).nodal(days)[0][0]
    peaks = days[1:-1][(f[1:-1] > f[:-2]) & (f[1:-1] > f[2:])]
    assert len(peaks) == 2
    assert np.diff(peaks) / 365.25 == pytest.approx([18.613], abs=0.03)
