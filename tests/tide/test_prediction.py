"""Levels from harmonic constants."""

from datetime import datetime

import numpy as np
import pytest
import utide

from swe.errors import InputError
from swe.tide.prediction import Prediction

START = datetime(2015, 4, 2, 18)
NAMES = ["M2", "S2", "N2", "K2", "K1", "O1", "P1", "Q1", "M4", "MS4", "MN4", "M6"]
RNG = np.random.default_rng(5)
AMPLITUDE, LAG = RNG.uniform(0.02, 1.0, (len(NAMES), 3)), RNG.uniform(0.0, 360.0, (len(NAMES), 3))
HOURS = 3600.0 * np.arange(0, 60 * 24, 5)


def stamps(seconds):
    return np.datetime64(START) + (1000 * seconds).astype("timedelta64[ms]")


def constants_of(times, record, latitude=26.565):
    """utide's analysis of a record with exact nodal factors, its switches as plain as they can be."""
    options = dict(method="ols", nodal=True, trend=False, conf_int="none", verbose=False, Rayleigh_min=0.5)
    return utide.solve(times, record, lat=latitude, constit=NAMES, **options)


def test_reconstruction_of_utide():
    """The same constants through utide 0.4, at the latitude where its satellites of degree 3 vanish for diurnal constituents.

    What differs: P1 and S2, which it modulates by 1.2 and 0.2 %; degree 3 of semidiurnal ones, 0.3 %; a minute of the moon's
    way, 0.03 degrees. Together below 0.3 % of the sum of amplitudes.
    """
    ours = Prediction.of(NAMES, AMPLITUDE, LAG, START, 0.0).level(HOURS)
    coefficients = constants_of(stamps(HOURS), ours[:, 0])
    order = [NAMES.index(name) for name in coefficients.name]
    for point in range(3):
        coefficients.A, coefficients.g, coefficients.mean = AMPLITUDE[order, point], LAG[order, point], 0.0
        theirs = utide.reconstruct(stamps(HOURS), coefficients, verbose=False, min_SNR=0).h
        difference = np.abs(ours[:, point] - theirs).max()
        print(f"{difference:.4f} m of {AMPLITUDE[:, point].sum():.3f} m")
        assert difference < 0.003 * AMPLITUDE[:, point].sum()


def test_analysis_gives_the_constants_back():
    """200 days through utide's analysis: 1 % and 1 degree, of which P1 takes most (see above)."""
    times = 3600.0 * np.arange(0, 200 * 24)
    record = Prediction.of(NAMES, AMPLITUDE[:, :1], LAG[:, :1], START, 0.0).level(times)[:, 0]
    found = constants_of(stamps(times), record)
    order = [NAMES.index(name) for name in found.name]
    given = AMPLITUDE[order, 0] * np.exp(-1j * np.radians(LAG[order, 0]))
    back = found.A * np.exp(-1j * np.radians(found.g))
    assert np.abs(back - given).max() < 0.015 * AMPLITUDE[:, 0].max()
    main = [k for k, name in enumerate(found.name) if name in ("M2", "N2", "O1", "K1")]
    assert np.all(np.abs(back - given)[main] < 0.005 * np.abs(given)[main])


def test_constant_argument():
    """S2 has V = 2 x 15 degrees x hours UTC and no modulation: H cos(30 deg t - g), t hours since midnight. By definition."""
    tide = Prediction.of(["S2"], [[1.3]], [[40.0]], datetime(2031, 3, 1, 3), 0.0)
    hours = np.array([0.0, 1.0, 4.5, 200.25])
    assert np.allclose(tide.level(3600.0 * hours)[:, 0], 1.3 * np.cos(np.radians(30.0 * (hours + 3.0) - 40.0)), atol=1e-10)


def test_many_times_equal_single_ones():
    tide = Prediction.of(NAMES, AMPLITUDE, LAG, START, 7200.0)
    times = np.array([-10.0, 0.0, 1000.0, 5e6])
    many = tide.level(times)
    assert many.shape == (4, 3) and tide.level(1000.0).shape == (3,)
    for k, time in enumerate(times):
        assert np.allclose(many[k], tide.level(time), atol=1e-13)
    assert not many[:2].any() and many[2].any()


@pytest.mark.parametrize(
    ("amplitude", "lag", "said"),
    [
        (
            [[0.1, 0.2]],
            [[1.0, 2.0]],
            r"amplitudes \(1, 2\) and lags \(1, 2\) for 2 constituents; both must be \(constituents, points\)",
        ),
        ([[0.1], [0.2]], [[1.0, 2.0], [0.0, 0.0]], r"amplitudes \(2, 1\) and lags \(2, 2\)"),
        ([[0.1], [-0.2]], [[1.0], [2.0]], "K1 at point 0 has amplitude -0.2 m and lag 2 degrees; give an amplitude from 0 up"),
        ([[0.1], [0.2]], [[1.0], [np.nan]], "K1 at point 0 has amplitude 0.2 m and lag nan degrees"),
    ],
)
def test_wrong_constants(amplitude, lag, said):
    with pytest.raises(InputError, match=said):
        Prediction.of(["M2", "K1"], amplitude, lag, START, 0.0)
