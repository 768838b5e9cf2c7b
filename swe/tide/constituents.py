"""The table of tidal constituents: Doodson numbers, phase offset, equilibrium amplitude, Love factor.

    V = n . (tau, s, h, p, N', p') + offset                   speed = n . rates

n are plain multiples (no 5 added). tau is counted from midnight; tables that count it from noon have the offsets of the
diurnal constituents with the opposite sign. Offsets make all equilibrium amplitudes A positive with the shapes

    long period  A (1/2 - 3/2 sin^2 lat)        diurnal  A sin 2 lat        semidiurnal  A cos^2 lat

Amplitudes, m, are those of the catalogue of Hartmann & Wenzel 1995 (Geophys. Res. Lett. 22, 3553), degree 2, all bodies
added: A = |Hs| sqrt(15/32 pi), for long periods |Hs| sqrt(5/4 pi), Hs in the normalisation of Cartwright & Tayler 1971. They
are chosen over the older ones of Schwiderski 1980, which are smaller by 0.6 to 0.8 %, because amplitudes, minor constituents and
the satellites of `nodal` then come from one source that can be recomputed; Cartwright & Edden 1973 gives the same to 6e-4.

Love factor 1 + k2 - h2: the solid earth yields to the same forces and carries the gauge with it. Wahr 1981 (Geophys. J. R.
astr. Soc. 64, 677), earth model 1066A: 0.693 for semidiurnal and long periods, and for diurnal ones, w in rad/s, eq. 4.18,

    0.695 + 0.00123 (w - w_O1)/(w_fcn - w),   w_fcn = 1.0021714 x 7.292115e-5      (resonance of the fluid core)

Compound constituents are born in shallow water and have no equilibrium tide; their V and offset are sums over their parts.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches

from swe.constants import DEGREE
from swe.errors import InputError
from swe.tide.astronomy import rates

LOVE_BAND = 0.693
LOVE_O1, LOVE_RESONANCE = 0.695, 0.00123
CORE_SPEED = 1.0021714 * 7.292115e-5
"""Speed of the free core nutation in the rotating frame, rad s-1."""


@dataclass(frozen=True)
class Constituent:
    """One line of the tide.

    doodson     multiples of tau, s, h, p, N', p'
    offset      degrees
    amplitude   of the equilibrium tide, m; 0 for what has none
    parts       (name, multiple) of the constituents whose f and u it takes; empty: its own
    """

    name: str
    doodson: tuple[int, int, int, int, int, int]
    offset: float
    amplitude: float
    parts: tuple[tuple[str, float], ...] = ()

    @property
    def species(self) -> int:
        """Cycles per lunar day: 0 long period, 1 diurnal, 2 semidiurnal, more for shallow water."""
        return self.doodson[0]

    @property
    def speed(self) -> float:
        """Degrees per hour, at 2000-01-01 12:00."""
        return float(rates() @ self.doodson)

    @property
    def period(self) -> float:
        """Hours."""
        return 360.0 / self.speed

    @property
    def love_factor(self) -> float:
        """1 + k2 - h2; 0 for what has no equilibrium tide."""
        if self.amplitude == 0.0:
            return 0.0
        if self.species != 1:
            return LOVE_BAND
        speed, o1 = (DEGREE * degrees / 3600.0 for degrees in (self.speed, TABLE["O1"].speed))
        return LOVE_O1 + LOVE_RESONANCE * (speed - o1) / (CORE_SPEED - speed)


# Name, Doodson numbers, offset, amplitude.
_ASTRONOMICAL = (
    Constituent("M2", (2, 0, 0, 0, 0, 0), 0.0, 0.244206),
    Constituent("S2", (2, 2, -2, 0, 0, 0), 0.0, 0.113607),
    Constituent("N2", (2, -1, 0, 1, 0, 0), 0.0, 0.046757),
    Constituent("K2", (2, 2, 0, 0, 0, 0), 0.0, 0.030869),
    Constituent("nu2", (2, -1, 2, -1, 0, 0), 0.0, 0.008882),
    Constituent("mu2", (2, -2, 2, 0, 0, 0), 0.0, 0.007468),
    Constituent("L2", (2, 1, 0, -1, 0, 0), 180.0, 0.006903),
    Constituent("T2", (2, 2, -3, 0, 0, 1), 0.0, 0.006641),
    Constituent("2N2", (2, -2, 0, 2, 0, 0), 0.0, 0.006187),
    Constituent("eps2", (2, -3, 2, 1, 0, 0), 0.0, 0.001804),
    Constituent("lambda2", (2, 1, -2, 1, 0, 0), 180.0, 0.001801),
    Constituent("eta2", (2, 3, 0, -1, 0, 0), 0.0, 0.001727),
    Constituent("R2", (2, 2, -1, 0, 0, -1), 180.0, 0.000948),
    Constituent("K1", (1, 1, 0, 0, 0, 0), 90.0, 0.142399),
    Constituent("O1", (1, -1, 0, 0, 0, 0), -90.0, 0.101293),
    Constituent("P1", (1, 1, -2, 0, 0, 0), -90.0, 0.047123),
    Constituent("Q1", (1, -2, 0, 1, 0, 0), -90.0, 0.019394),
    Constituent("J1", (1, 2, 0, -1, 0, 0), 90.0, 0.007965),
    Constituent("NO1", (1, 0, 0, 1, 0, 0), 90.0, 0.007962),
    Constituent("OO1", (1, 3, 0, 0, 0, 0), 90.0, 0.004357),
    Constituent("rho1", (1, -2, 2, -1, 0, 0), -90.0, 0.003681),
    Constituent("sigma1", (1, -3, 2, 0, 0, 0), -90.0, 0.003095),
    Constituent("pi1", (1, 1, -3, 0, 0, 1), -90.0, 0.002755),
    Constituent("2Q1", (1, -3, 0, 2, 0, 0), -90.0, 0.002566),
    Constituent("phi1", (1, 1, 2, 0, 0, 0), 90.0, 0.002028),
    Constituent("chi1", (1, 0, 2, -1, 0, 0), 90.0, 0.001524),
    Constituent("theta1", (1, 2, -2, 1, 0, 0), 90.0, 0.001523),
    Constituent("SO1", (1, 3, -2, 0, 0, 0), 90.0, 0.001321),
    Constituent("psi1", (1, 1, 1, 0, 0, -1), 90.0, 0.001114),
    Constituent("Mf", (0, 2, 0, 0, 0, 0), 0.0, 0.042014),
    Constituent("Mm", (0, 1, 0, -1, 0, 0), 0.0, 0.022193),
    Constituent("Ssa", (0, 0, 2, 0, 0, 0), 0.0, 0.019547),
    Constituent("Mtm", (0, 3, 0, -1, 0, 0), 0.0, 0.008044),
    Constituent("Msm", (0, 1, -2, 1, 0, 0), 0.0, 0.004244),
    Constituent("MSf", (0, 2, -2, 0, 0, 0), 0.0, 0.003682),
    Constituent("Sa", (0, 0, 1, 0, 0, -1), 0.0, 0.003104),
    Constituent("MSqm", (0, 4, -2, 0, 0, 0), 0.0, 0.001285),
    # Of degree 3: no equilibrium tide here. f and u by the rule of Schureman 1958, table 2.
    Constituent("M3", (3, 0, 0, 0, 0, 0), 180.0, 0.0, (("M2", 1.5),)),
)

_COMPOUND = {
    "2SM2": {"S2": 2, "M2": -1},
    "MNS2": {"M2": 1, "N2": 1, "S2": -1},
    "MO3": {"M2": 1, "O1": 1},
    "SO3": {"S2": 1, "O1": 1},
    "MK3": {"M2": 1, "K1": 1},
    "SK3": {"S2": 1, "K1": 1},
    "MN4": {"M2": 1, "N2": 1},
    "M4": {"M2": 2},
    "MS4": {"M2": 1, "S2": 1},
    "MK4": {"M2": 1, "K2": 1},
    "S4": {"S2": 2},
    "2MN6": {"M2": 2, "N2": 1},
    "M6": {"M2": 3},
    "2MS6": {"M2": 2, "S2": 1},
    "2MK6": {"M2": 2, "K2": 1},
    "2SM6": {"S2": 2, "M2": 1},
    "S6": {"S2": 3},
    "M8": {"M2": 4},
}


def _table() -> dict[str, Constituent]:
    table = {constituent.name: constituent for constituent in _ASTRONOMICAL}
    for name, parts in _COMPOUND.items():
        doodson = tuple(sum(n * table[part].doodson[i] for part, n in parts.items()) for i in range(6))
        offset = sum(n * table[part].offset for part, n in parts.items())
        table[name] = Constituent(name, doodson, offset, 0.0, tuple(parts.items()))
    return table


TABLE = _table()
"""All constituents by name: astronomical ones by species and size, then compound ones."""

_BY_LETTERS = {name.lower(): name for name in TABLE}


def constituents(names: Iterable[str]) -> tuple[Constituent, ...]:
    """Return the constituents of these names, upper and lower case alike. Not collective.

    Raises InputError for a name that is unknown, or given twice.
    """
    found = tuple(_constituent(name) for name in names)
    for i, constituent in enumerate(found):
        if constituent in found[:i]:
            raise InputError(f"tidal constituent {constituent.name} is given twice; give each one once")
    return found


def _constituent(name: str) -> Constituent:
    letters = name.strip().lower()
    if letters in _BY_LETTERS:
        return TABLE[_BY_LETTERS[letters]]
    near = get_close_matches(letters, _BY_LETTERS, n=1, cutoff=0.5)
    hint = f"; did you mean {_BY_LETTERS[near[0]]}?" if near else ";"
    raise InputError(f'tidal constituent "{name}" is not known{hint} known are {", ".join(TABLE)}')
