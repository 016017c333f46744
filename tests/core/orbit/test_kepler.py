"""Kepler's equation and the anomalies."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from shadowscale.orbit._kernels import SERIES_LIMIT
from shadowscale.orbit.kepler import eccentric_anomaly, mean_anomaly, true_anomaly

eccentricities = st.floats(0.0, 0.99)


def test_worked_example() -> None:
    # Meeus, Astronomical Algorithms, ch. 30 (from memory): M = 5 deg, e = 0.1 -> E = 5.554589 deg.
    found = np.degrees(eccentric_anomaly(np.radians(5.0), 0.1))
    assert found == pytest.approx(5.554589254, abs=1e-9)


@pytest.mark.parametrize("e", [0.0, 1e-9, 0.01, 0.3, 0.4, 0.4000001, 0.7, 0.95, 0.99])
def test_agrees_with_bracketed_roots(e: float) -> None:
    # Computed with scipy.optimize.brentq.
    for mean in np.linspace(-9.0, 9.0, 37):
        expected = brentq(lambda x, m=mean: x - e * np.sin(x) - m, mean - 1, mean + 1, xtol=1e-15)
        assert eccentric_anomaly(mean, e) == pytest.approx(expected, abs=2e-14 / (1.001 - e))


@pytest.mark.parametrize("mean", [1e-9, 1e-4, 0.01, 0.1])
def test_keeps_its_digits_near_periastron_of_a_long_orbit(mean: float) -> None:
    # Computed with mpmath, 40 digits.
    with mpmath.workdps(40):
        e = mpmath.mpf(0.99)
        expected = mpmath.findroot(
            lambda x: x - e * mpmath.sin(x) - mpmath.mpf(mean),
            mean / (1 - 0.99) if mean < 1e-3 else (6 * mean) ** (1 / 3),
        )
    assert eccentric_anomaly(mean, 0.99) == pytest.approx(float(expected), rel=2e-14)


@settings(deadline=None)
@given(mean=st.floats(-1e3, 1e3), e=eccentricities)
def test_satisfies_the_equation(mean: float, e: float) -> None:
    found = eccentric_anomaly(mean, e)
    assert found - e * np.sin(found) == pytest.approx(mean, rel=1e-15, abs=4e-15)


def test_both_solutions_agree_where_one_hands_over() -> None:
    mean = np.linspace(-np.pi, np.pi, 1001)
    below, above = (eccentric_anomaly(mean, SERIES_LIMIT + step) for step in (-1e-13, 1e-13))
    assert above == pytest.approx(below, abs=1e-12)


@settings(deadline=None)
@given(mean=st.floats(-50, 50), e=eccentricities)
def test_true_anomaly_and_back(mean: float, e: float) -> None:
    nu = true_anomaly(mean, e)
    assert abs(nu - mean) < np.pi
    assert mean_anomaly(nu, e) == pytest.approx(mean, abs=1e-12)


def test_true_anomaly_is_the_angle_of_the_ellipse() -> None:
    mean, e = np.linspace(0.1, 6.0, 30), 0.6
    big = eccentric_anomaly(mean, e)
    nu = true_anomaly(mean, e)
    assert np.cos(nu) == pytest.approx((np.cos(big) - e) / (1 - e * np.cos(big)), abs=1e-14)
    assert np.sin(nu) == pytest.approx(0.8 * np.sin(big) / (1 - e * np.cos(big)), abs=1e-14)


@pytest.mark.parametrize("e", [-0.1, 1.0, np.nan])
def test_refuses_what_is_no_ellipse(e: float) -> None:
    with pytest.raises(ValueError, match="eccentricity: expected 0 <= e < 1"):
        eccentric_anomaly(0.3, e)
    with pytest.raises(ValueError, match="eccentricity: expected 0 <= e < 1"):
        mean_anomaly(0.3, e)
