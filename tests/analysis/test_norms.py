"""Norms of Williamson et al. 1992, J. Comput. Phys. 102, 211: by hand, and their scaling."""

import numpy as np
import pytest

from swe.analysis.norms import Norms, norms


def test_by_hand():
    """Areas 1 and 3; reference 2, 4; error 1, -2."""
    found = norms(np.array([3.0, 2.0]), np.array([2.0, 4.0]), np.array([1.0, 3.0]))
    assert found.l1 == pytest.approx((1 * 1 + 3 * 2) / (1 * 2 + 3 * 4), rel=1e-15)
    assert found.l2 == pytest.approx(np.sqrt((1 + 3 * 4) / (4 + 3 * 16)), rel=1e-15)
    assert found.linf == 0.5


def test_vectors_use_their_length():
    """Reference (3, 4) and (0, 1), errors of length 1 and 2."""
    reference = np.array([[3.0, 4.0], [0.0, 1.0]])
    found = norms(reference + [[1.0, 0.0], [0.0, 2.0]], reference, np.ones(2))
    assert found == Norms(l1=pytest.approx(3 / 6), l2=pytest.approx(np.sqrt(5 / 26)), linf=pytest.approx(2 / 5))


def test_a_uniform_relative_error_is_itself_in_every_norm():
    random = np.random.default_rng(5)
    reference, area = random.normal(size=50), random.uniform(1, 2, size=50)
    found = norms(1.01 * reference, reference, area)
    assert [found.l1, found.l2, found.linf] == pytest.approx([0.01] * 3, rel=1e-12)


def test_scale_of_area_does_not_matter_and_equal_fields_have_no_error():
    random = np.random.default_rng(6)
    field, reference, area = random.normal(size=(3, 20))
    area = np.abs(area)
    scaled, plain = norms(field, reference, 1e9 * area), norms(field, reference, area)
    assert [scaled.l1, scaled.l2, scaled.linf] == pytest.approx([plain.l1, plain.l2, plain.linf], rel=1e-12)
    assert norms(field, field, area) == Norms(0.0, 0.0, 0.0)


def test_refusals():
    with pytest.raises(ValueError, match="one shape"):
        norms(np.ones(3), np.ones(4), np.ones(4))
    with pytest.raises(ValueError, match="zero on every face"):
        norms(np.ones(3), np.zeros(3), np.ones(3))
