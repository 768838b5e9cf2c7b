"""The colour maps: in the gamut, even, symmetric, and told apart by colour-blind eyes.

sRGB to CIELAB here is the textbook inverse of the product code (IEC 61966-2-1; CIE 15:2004). The matrices of dichromatic vision
are those of Machado, Oliveira & Fernandes 2009, IEEE Trans. Vis. Comput. Graph. 15, 1291 (severity 1; from memory), for
linear RGB.
"""

import numpy as np
import pytest

from swe.analysis.figures.palette import ABOVE, BELOW, deep, depth_path, evenly, lab_to_srgb, signed, signed_arm

PROTAN = np.array([[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]])
DEUTAN = np.array([[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]])
LINEAR_TO_XYZ = np.array(
    [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]]
)
WHITE = np.array([0.95047, 1.0, 1.08883])


def linear(srgb):
    return np.where(srgb <= 0.04045, srgb / 12.92, ((srgb + 0.055) / 1.055) ** 2.4)


def lab(linear_rgb):
    ratio = np.clip(linear_rgb, 0, 1) @ LINEAR_TO_XYZ.T / WHITE
    f = np.where(ratio > (6 / 29) ** 3, np.cbrt(ratio), ratio / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.column_stack([116 * f[:, 1] - 16, 500 * (f[:, 0] - f[:, 1]), 200 * (f[:, 1] - f[:, 2])])


def colours(colour_map):
    return colour_map(np.arange(colour_map.N))[:, :3]


def test_known_colours():
    """White, mid grey and the sRGB red: values of the standard (from memory)."""
    found = lab_to_srgb(np.array([[100.0, 0, 0], [53.585, 0, 0], [53.24, 80.09, 67.20]]))
    assert found[0] == pytest.approx([1, 1, 1], abs=2e-3)
    assert found[1] == pytest.approx([0.5, 0.5, 0.5], abs=2e-3)
    assert found[2] == pytest.approx([1, 0, 0], abs=5e-3)


@pytest.mark.parametrize("path", [depth_path, lambda r: signed_arm(BELOW, r), lambda r: signed_arm(ABOVE, r)])
def test_paths_stay_in_the_gamut(path):
    found = lab_to_srgb(evenly(path, 200))
    assert found.min() >= 0.0 and found.max() <= 1.0


@pytest.mark.parametrize("colour_map", [signed(), deep()], ids=["signed", "deep"])
def test_equal_steps_look_equal(colour_map):
    steps = np.linalg.norm(np.diff(lab(linear(colours(colour_map))), axis=0), axis=1)
    assert steps.max() < 1.05 * steps.min()


def test_depth_darkens_all_the_way():
    assert (np.diff(lab(linear(colours(deep())))[:, 0]) < 0).all()


def test_signed_map_is_symmetric_in_lightness_and_palest_at_zero():
    lightness = lab(linear(colours(signed())))[:, 0]
    assert np.allclose(lightness, lightness[::-1], atol=0.1)
    assert np.argmax(lightness) == len(lightness) // 2


@pytest.mark.parametrize("eyes", [PROTAN, DEUTAN], ids=["protan", "deutan"])
def test_signs_are_told_apart_by_colour_blind_eyes(eyes):
    """At a quarter of the scale and beyond the two signs differ by more than 20 units; 2.3 is just noticeable (from memory)."""
    assert np.allclose(eyes.sum(axis=1), 1.0, atol=1e-5)  # grey stays grey
    seen = lab(linear(colours(signed())) @ eyes.T)
    quarter = len(seen) * 3 // 8
    difference = np.linalg.norm(seen[: quarter + 1] - seen[::-1][: quarter + 1], axis=1)
    assert difference.min() > 20.0
