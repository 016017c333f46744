"""Radial velocities."""

from __future__ import annotations

from math import cos, pi, radians, sin

import numpy as np
import pytest
from numpy.typing import NDArray

from derivatives import check_derivatives
from shadowscale.orbit import _kernels
from shadowscale.orbit.elements import Orbit
from shadowscale.orbit.sky import line_of_sight
from shadowscale.orbit.velocity import radial_velocity, velocity_shape

Floats = NDArray[np.float64]


def test_circular_orbit() -> None:
    orbit = Orbit(period=2.0, epoch=10.0)
    times = 10.0 + 2.0 * np.array([0.0, 0.25, 0.5, 0.75])
    # Star 1 is behind at the epoch and then comes toward the observer.
    first = radial_velocity(times, orbit, star=1, K=100.0, gamma=7.0)
    second = radial_velocity(times, orbit, star=2, K=50.0, gamma=7.0)
    assert first == pytest.approx([7.0, -93.0, 7.0, 107.0])
    assert second == pytest.approx([7.0, 57.0, 7.0, -43.0])


@pytest.mark.parametrize(("e", "omega"), [(0.0, 0.0), (0.3, 40.0), (0.7, 250.0)])
def test_is_the_rate_of_the_distance(e: float, omega: float) -> None:
    # K = 2 pi a1 sin i/(P sqrt(1-e^2)), so dz/dcycles = 2 pi a1 sin i w/sqrt(1-e^2): the relative
    # orbit's z moves with -w.
    orbit = Orbit(inclination=80.0, ecosw=e * cos(radians(omega)), esinw=e * sin(radians(omega)))
    cycles = np.linspace(0, 1, 50)
    step = 1e-5
    rate = (line_of_sight(cycles + step, orbit) - line_of_sight(cycles - step, orbit)) / (2 * step)
    w = velocity_shape(cycles, orbit)[:, 0]
    expected = -2 * pi * sin(radians(80.0)) / np.sqrt(1 - e * e) * w
    assert rate == pytest.approx(expected, rel=1e-5, abs=1e-5)


def test_amplitude_and_mean_over_time() -> None:
    orbit = Orbit(ecosw=0.35, esinw=-0.4)
    w = velocity_shape(np.arange(4000) / 4000, orbit)[:, 0]
    assert (w.max() - w.min()) / 2 == pytest.approx(1.0, abs=1e-6)
    assert w.mean() == pytest.approx(0.0, abs=1e-12)


def value(x: Floats) -> Floats:
    constants, out = np.empty(_kernels.CONSTANTS_SIZE), np.empty(_kernels.VELOCITY_SIZE)
    _kernels.orbit_constants(x[1], x[2], 0.0, constants)
    _kernels.velocity_point(x[0], constants, out)
    assert _kernels.velocity_point_value(x[0], constants) == pytest.approx(out[0], abs=1e-15)
    return out


@pytest.mark.parametrize("orbit", [(0.0, 0.0), (0.1, 0.0), (-0.3, 0.2), (0.1, -0.65)])
@pytest.mark.parametrize("cycles", [0.0, 0.13, 0.5, 0.71])
def test_derivatives(orbit: tuple[float, float], cycles: float) -> None:
    x = np.array([cycles, *orbit])
    check_derivatives(lambda x: value(x)[0], value(x)[1:], x, step=1e-4, tolerance=1e-7)


def test_refuses_a_third_star() -> None:
    with pytest.raises(ValueError, match="star: expected 1 or 2, found 3"):
        radial_velocity([0.0], Orbit(), star=3, K=1.0, gamma=0.0)
