"""Closed forms of the time at a given longitude."""

from __future__ import annotations

from math import cos, nan, pi, radians, sin

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from shadowscale.orbit.kepler import mean_anomaly
from shadowscale.orbit.longitude import (
    cycles_at,
    distance_at,
    eccentricity_and_omega,
    ecosw_of_phase,
    secondary_phase,
)

eccentricities = st.floats(0.0, 0.95)
angles = st.floats(0.0, 2 * pi)

# e, omega, phase of secondary conjunction: computed by root finding on Kepler's equation.
SECONDARIES = [
    (0.2, 30.0, 0.61025900),
    (0.2, 120.0, 0.43547229),
    (0.489, 330.2, 0.76933395),
    (0.1, 45.0, 0.54509095),
]


@pytest.mark.parametrize(("e", "omega", "phase"), SECONDARIES)
def test_secondary_phase(e: float, omega: float, phase: float) -> None:
    k, h = e * cos(radians(omega)), e * sin(radians(omega))
    assert secondary_phase(k, h) == pytest.approx(phase, abs=1e-8)
    assert cycles_at(-pi / 2, ecosw=k, esinw=h) % 1.0 == pytest.approx(phase, abs=1e-8)


def test_secondary_of_an_eccentric_bright_pair() -> None:
    # Andersen et al. 1987 (e = 0.540), P = 7.64075217 d: 5 d 17 h after primary, to the hour, wants
    # omega = 47.3 +- 0.7 deg (computed).
    k, h = 0.540 * cos(radians(47.3)), 0.540 * sin(radians(47.3))
    assert secondary_phase(k, h) * 7.64075217 == pytest.approx(5 + 17 / 24, abs=0.5 / 24)


@settings(deadline=None)
@given(e=eccentricities, omega=angles, longitude=st.floats(-pi, pi))
def test_time_of_a_longitude_is_kepler_s(e: float, omega: float, longitude: float) -> None:
    k, h = e * cos(omega), e * sin(omega)
    at, primary = mean_anomaly(np.array([longitude - omega, pi / 2 - omega]), e)
    turns = (at - primary) / (2 * pi) - cycles_at(longitude, ecosw=k, esinw=h)
    assert turns == pytest.approx(round(turns), abs=1e-12)


@settings(deadline=None)
@given(e=eccentricities, omega=angles)
def test_orbit_turned_half_around_swaps_the_eclipses(e: float, omega: float) -> None:
    k, h = e * cos(omega), e * sin(omega)
    assert secondary_phase(-k, -h) == pytest.approx(1 - secondary_phase(k, h), abs=1e-12)
    assert distance_at(pi / 2, ecosw=k, esinw=h) == pytest.approx(
        distance_at(-pi / 2, ecosw=-k, esinw=-h), rel=1e-12
    )


@settings(deadline=None)
@given(ecosw=st.floats(-0.7, 0.7), esinw=st.floats(-0.6, 0.6))
def test_ecosw_of_the_phase_it_gives(ecosw: float, esinw: float) -> None:
    phase = secondary_phase(ecosw, esinw)
    assert ecosw_of_phase(phase, esinw=esinw) == pytest.approx(ecosw, abs=1e-9)


def test_circular_orbit_runs_evenly() -> None:
    assert cycles_at(pi / 2 + 0.3, ecosw=0.0, esinw=0.0) == pytest.approx(0.3 / (2 * pi), abs=1e-15)
    assert secondary_phase(0.0, 0.0) == 0.5


def test_omega() -> None:
    e, omega = eccentricity_and_omega(-0.3, -0.3)
    assert (e, omega) == pytest.approx((0.3 * 2**0.5, radians(225)))
    assert eccentricity_and_omega(0.0, 0.0) == (0.0, 0.0)


@pytest.mark.parametrize(("k", "h"), [(0.8, 0.7), (1.0, 0.0), (nan, 0.0)])
def test_refuses_open_orbits(k: float, h: float) -> None:
    with pytest.raises(ValueError, match="expected an eccentricity below 1"):
        secondary_phase(k, h)


def test_refuses_phases_outside_a_cycle() -> None:
    with pytest.raises(ValueError, match="phase: expected a number between 0 and 1"):
        ecosw_of_phase(1.2)
    with pytest.raises(ValueError, match="esinw: expected a number between"):
        ecosw_of_phase(0.5, esinw=1.0)
