"""Colour maps: what is seen as equal steps is equal steps, for colour-blind eyes too.

Levels and times use matplotlib's `viridis` and `cividis` (the latter made for colour-blind viewers by Nunez, Anderton &
Renslow 2018, PLoS ONE 13, e0199239). Depths run in CIELAB from pale sand over teal to navy,

    L* = 95 - 77 r,   C* = 30 - 7 r,   hue 100 + 186 r deg

Signed levels need a diverging map. Matplotlib's own colour-blind-safe ones (berlin, managua, vanimo) are dark at
zero, where most of a map of levels lies, and arrows would drown in them. So one is made here in CIELAB: near-white at zero,
both arms with the same lightness and chroma,

    L* = 96 - 60 r,   C* = 46 sin(pi/2 min(r / 0.8, 1)),   hue 280 deg (blue, below) or 60 deg (orange-brown, above)

In both, r in 0..1 is re-spaced so that equal steps of the value are equal steps of the CIE 1976 colour difference. The arms
of the signed map differ along the blue-yellow direction, which people without red or green cones keep.
CIELAB to sRGB: CIE 15:2004 and IEC 61966-2-1, white point D65.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

import numpy as np
from matplotlib.colors import ListedColormap

HEIGHT = "viridis"
"""Highest levels: quantities that start from zero."""

MOMENT = "cividis"
"""Times."""

SERIES = ("#0072b2", "#d55e00", "#009e73", "#cc79a7", "#56b4e9", "#e69f00", "#000000")
"""Lines and bars: the colour-blind-safe set of Okabe & Ito 2008, "Color universal design", reordered."""

BELOW, ABOVE = 280.0, 60.0
"""Hues of the two arms of the signed map, degrees: the most colourful pair that a screen can show down to L* = 36."""

LAND = "#e4e1dc"
INK = "#2b2b2b"

_WHITE_D65 = np.array([0.95047, 1.0, 1.08883])
_XYZ_TO_LINEAR = np.array(
    [[3.2404542, -1.5371385, -0.4985314], [-0.9692660, 1.8760108, 0.0415560], [0.0556434, -0.2040259, 1.0572252]]
)


def lab_to_srgb(lab: np.ndarray) -> np.ndarray:
    """Return sRGB (n, 3) of CIELAB colours (n, 3); values outside 0..1 lie outside the screen's gamut."""
    f = np.column_stack([lab[:, 0] + 16.0, lab[:, 0] + 16.0, lab[:, 0] + 16.0]) / 116.0
    f = f + np.column_stack([lab[:, 1] / 500.0, np.zeros(len(lab)), -lab[:, 2] / 200.0])
    xyz = _WHITE_D65 * np.where(f > 6.0 / 29.0, f**3, 3.0 * (6.0 / 29.0) ** 2 * (f - 4.0 / 29.0))
    linear = xyz @ _XYZ_TO_LINEAR.T
    return np.where(linear <= 0.0031308, 12.92 * linear, 1.055 * np.abs(linear) ** (1.0 / 2.4) - 0.055)


def signed_arm(hue_degrees: float, r: np.ndarray) -> np.ndarray:
    """Return CIELAB (n, 3) along one arm of the signed map, r from 0 (pale) to 1 (dark)."""
    return _lab(96.0 - 60.0 * r, 46.0 * np.sin(0.5 * np.pi * np.minimum(r / 0.8, 1.0)), np.full_like(r, hue_degrees))


def depth_path(r: np.ndarray) -> np.ndarray:
    """Return CIELAB (n, 3) along the map of depths, r from 0 (shallow) to 1 (deep)."""
    return _lab(95.0 - 77.0 * r, 30.0 - 7.0 * r, 100.0 + 186.0 * r)


def evenly(path: Callable[[np.ndarray], np.ndarray], count: int) -> np.ndarray:
    """Return `count` CIELAB colours (count, 3) along a path at equal colour differences."""
    fine = np.linspace(0.0, 1.0, 4001)
    travelled = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(path(fine), axis=0), axis=1))])
    return path(np.interp(np.linspace(0.0, travelled[-1], count), travelled, fine))


def signed() -> ListedColormap:
    """Return the diverging map: blue below zero, pale at zero, orange-brown above."""
    below, above = (evenly(partial(signed_arm, hue), 128) for hue in (BELOW, ABOVE))
    return _map(np.concatenate([below[::-1], above[1:]]), "signed level")


def deep() -> ListedColormap:
    """Return the map of depths: pale where shallow, navy where deep."""
    return _map(evenly(depth_path, 256), "depth")


def _lab(lightness: np.ndarray, chroma: np.ndarray, hue_degrees: np.ndarray) -> np.ndarray:
    hue = np.radians(hue_degrees)
    return np.column_stack([lightness, chroma * np.cos(hue), chroma * np.sin(hue)])


def _map(lab: np.ndarray, name: str) -> ListedColormap:
    # the paths stay within the gamut; only rounding is clipped
    return ListedColormap(np.clip(lab_to_srgb(lab), 0.0, 1.0), name=name)
