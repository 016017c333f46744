"""Places on the sky: the textbook formula, its derivatives, light time, the minima."""

from __future__ import annotations

from math import cos, nan, pi, radians, sin, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.optimize import brentq

from derivatives import check_derivatives
from shadowscale.constants import C_KM_S, DAY
from shadowscale.orbit import _kernels
from shadowscale.orbit.elements import Orbit, light_time_cycles, secondary_delay
from shadowscale.orbit.kepler import mean_anomaly, true_anomaly
from shadowscale.orbit.longitude import secondary_phase
from shadowscale.orbit.sky import (
    conjunction_phases,
    line_of_sight,
    minimum_phases,
    sky_derivatives,
    sky_separation,
)

Floats = NDArray[np.float64]


def orbit_of(e: float, omega: float, inclination: float, light_time: float = 0.0) -> Orbit:
    k, h = e * cos(radians(omega)), e * sin(radians(omega))
    return Orbit(inclination=inclination, ecosw=k, esinw=h, light_time=light_time)


def textbook(cycles: Floats, e: float, omega: float) -> tuple[Floats, Floats]:
    """rho and nu + omega by the anomalies, omega in radians."""
    start = mean_anomaly(np.pi / 2 - omega, e)
    nu = true_anomaly(start + 2 * pi * cycles, e)
    return (1 - e * e) / (1 + e * np.cos(nu)), nu + omega


def raw(x: Floats) -> Floats:
    """Everything the kernels know at (cycles, ecosw, esinw, cos2i, light time)."""
    constants, out = np.empty(_kernels.CONSTANTS_SIZE), np.empty(_kernels.SKY_FULL_SIZE)
    _kernels.orbit_constants(x[1], x[2], x[3], constants)
    _kernels.sky_full(x[0], constants, x[4], out)
    return out


def values(x: Floats) -> Floats:
    return raw(x)[[_kernels.DELTA, _kernels.RHO, _kernels.SIN_L, _kernels.COS_L]]


def slopes(x: Floats) -> Floats:
    blocks = (_kernels.DELTA_CYCLES, _kernels.RHO_BY, _kernels.SIN_L_BY, _kernels.COS_L_BY)
    return np.array([raw(x)[start : start + 5] for start in blocks])


@settings(deadline=None)
@given(
    cycles=st.floats(-20, 20),
    e=st.floats(0, 0.95),
    omega=st.floats(0, 2 * pi),
    inclination=st.floats(30, 90),
)
def test_is_the_textbook_formula(cycles: float, e: float, omega: float, inclination: float) -> None:
    orbit = Orbit(inclination=inclination, ecosw=e * cos(omega), esinw=e * sin(omega))
    rho, longitude = textbook(np.array([cycles]), e, omega)
    sine = np.sin(longitude) * sin(radians(inclination))
    # 1 - sine^2 loses half of the digits where the centres meet.
    expected = rho**2 * (1 - sine**2)
    assert sky_separation([cycles], orbit) ** 2 == pytest.approx(expected, abs=3e-12)
    assert line_of_sight([cycles], orbit) == pytest.approx(-rho * sine, abs=1e-11)


def test_star_1_is_behind_at_the_epoch() -> None:
    orbit = Orbit(period=3.2, epoch=100.0, inclination=88.0, ecosw=0.2, esinw=-0.3)
    assert line_of_sight([100.0, 103.2], orbit) == pytest.approx(
        -(1 - 0.13) / 0.7 * sin(radians(88))
    )
    assert line_of_sight([100.0 + 3.2 * secondary_phase(0.2, -0.3)], orbit)[0] > 0


def test_keeps_its_digits_a_million_cycles_away() -> None:
    orbit = orbit_of(0.3, 70.0, 89.0)
    phase = np.linspace(-0.4, 0.4, 41)
    assert sky_separation(phase + 2.0**20, orbit) == pytest.approx(
        sky_separation(phase, orbit), abs=5e-9
    )


def test_value_derivatives_and_full_agree() -> None:
    generator = np.random.default_rng(5)
    for x in random_points(generator, 200):
        constants, point = np.empty(_kernels.CONSTANTS_SIZE), np.empty(_kernels.SKY_SIZE)
        _kernels.orbit_constants(x[1], x[2], x[3], constants)
        _kernels.sky_point(x[0], constants, x[4], point)
        full = raw(x)
        assert point == pytest.approx(full[: _kernels.SKY_SIZE], rel=1e-12, abs=1e-14)
        alone = _kernels.sky_point_value(x[0], constants, x[4])
        assert alone == pytest.approx((full[0], full[1]), abs=1e-15)
        assert full[_kernels.SIN_L] ** 2 + full[_kernels.COS_L] ** 2 == pytest.approx(1.0)


def random_points(generator: np.random.Generator, count: int) -> Floats:
    e, omega = generator.uniform(0, 0.8, count), generator.uniform(0, 2 * pi, count)
    cycles = generator.uniform(-3, 3, count)
    cos2i = generator.uniform(0.001, 0.3, count)
    light = generator.choice([0.0, 1e-4, -1e-3], count)
    return np.column_stack([cycles, e * np.cos(omega), e * np.sin(omega), cos2i, light])


@pytest.mark.parametrize("seed", range(4))
def test_derivatives_at_random_points(seed: int) -> None:
    for x in random_points(np.random.default_rng(seed), 30):
        e = np.hypot(x[1], x[2])
        step = 1e-4 * (1 - e) ** 2
        check_derivatives(values, slopes(x), x, step=step, tolerance=2e-7)


@pytest.mark.parametrize("cycles", [0.0, 0.0123, 0.25, 0.5, 0.77])
@pytest.mark.parametrize("light", [0.0, 2e-4])
def test_derivatives_of_circular_orbits(cycles: float, light: float) -> None:
    x = np.array([cycles, 0.0, 0.0, 0.01, light])
    check_derivatives(values, slopes(x), x, step=1e-4, tolerance=1e-8)


@pytest.mark.parametrize("orbit", [(0.0, 0.0), (0.3, 0.0), (0.0, 0.3), (-0.4, -0.2), (0.1, -0.6)])
def test_derivatives_at_conjunctions(orbit: tuple[float, float]) -> None:
    for cycles in (0.0, secondary_phase(*orbit)):
        x = np.array([cycles, *orbit, 0.02, 1e-4])
        check_derivatives(values, slopes(x), x, step=1e-5, tolerance=1e-7)


@pytest.mark.parametrize("orbit", [(0.0, 0.0), (0.3, 0.2)])
def test_derivatives_edge_on(orbit: tuple[float, float]) -> None:
    def edge_on(x: Floats) -> Floats:
        return values(np.array([*x, 0.0, 1e-4]))

    def edge_on_slopes(x: Floats) -> Floats:
        return slopes(np.array([*x, 0.0, 1e-4]))[:, :3]

    x = np.array([0.02, *orbit])
    check_derivatives(edge_on, edge_on_slopes(x), x, step=1e-4, tolerance=1e-7)
    by_cos2i = (values(np.array([*x, 1e-9, 1e-4])) - values(np.array([*x, 0.0, 1e-4]))) / 1e-9
    assert slopes(np.array([*x, 0.0, 1e-4]))[:, 3] == pytest.approx(by_cos2i, rel=1e-5, abs=1e-6)


def test_a_central_eclipse_gives_finite_derivatives() -> None:
    found = sky_derivatives([0.0], Orbit())
    assert found[0, 0] < 1e-15
    assert np.all(np.isfinite(found))


def test_epoch_stays_conjunction_when_the_orbit_changes() -> None:
    for k, h in ((0.0, 0.0), (0.2, -0.4), (-0.5, 0.3)):
        orbit = Orbit(inclination=87.0, ecosw=k, esinw=h, light_time=3e-4)
        rho = (1 - k * k - h * h) / (1 + h)
        assert sky_separation([0.0], orbit) == pytest.approx(rho * cos(radians(87.0)), rel=1e-12)


@settings(deadline=None)
@given(e=st.floats(0, 0.9), omega=st.floats(0, 360), cycles=st.floats(-1, 1))
def test_orbit_turned_half_around_swaps_the_eclipses(e: float, omega: float, cycles: float) -> None:
    one, other = orbit_of(e, omega, 85.0), orbit_of(e, omega + 180.0, 85.0)
    later = conjunction_phases(one)[1]
    assert sky_separation([cycles + later], one) == pytest.approx(
        sky_separation([cycles], other), abs=1e-9 / (1 - e)
    )


# e, omega, i; minimum separation against conjunction at primary and secondary [1e-6 cycles], and
# between the minima: computed by Kepler's equation and minimisation.
MINIMA = [
    (0.2, 30.0, 89.0, -5.9, 10.8, 0.61027577),
    (0.2, 120.0, 89.0, 2.8, -8.1, 0.43546140),
    (0.489, 330.2, 89.3, -15.4, 3.5, 0.76935286),
    (0.1, 45.0, 87.0, -24.8, 37.9, 0.54515370),
]


@pytest.mark.parametrize(("e", "omega", "i", "first", "second", "between"), MINIMA)
def test_minima_are_not_conjunctions(
    e: float, omega: float, i: float, first: float, second: float, between: float
) -> None:
    orbit = orbit_of(e, omega, i)
    minima, conjunctions = minimum_phases(orbit), conjunction_phases(orbit)
    assert minima[0] == pytest.approx(first * 1e-6, abs=0.06e-6)
    assert minima[1] - conjunctions[1] == pytest.approx(second * 1e-6, abs=0.06e-6)
    assert minima[1] - minima[0] == pytest.approx(between, abs=1e-8)


def retarded(
    cycles: float, e: float, omega: float, *, inclination: float, axes: tuple[float, float]
) -> Floats:
    """Each star where its own light left it; axes a1/(cP), a2/(cP). Returns star 2 less star 1 (x, y).

    The slow truth: both emission times by iteration, no expansion in v/c.
    """
    total = sum(axes)
    sin_i, cos_i = sin(radians(inclination)), cos(radians(inclination))
    places = []
    for axis, sign in ((axes[0], -1.0), (axes[1], 1.0)):
        emitted = cycles
        for _ in range(40):
            rho, longitude = textbook(np.array([emitted]), e, radians(omega))
            away = -sign * axis * rho[0] * np.sin(longitude[0]) * sin_i
            emitted = cycles - away
        x = sign * axis / total * rho[0] * np.cos(longitude[0])
        y = sign * axis / total * rho[0] * np.sin(longitude[0]) * cos_i
        places.append(np.array([x, y]))
    return places[1] - places[0]


# P [d], e, omega, i, K1, K2 [km/s], delay [s]: numerical integration with retarded times; the last is
# the check value P = 3.2 d, M = 1.2 + 0.5 (their K computed by Kepler's third law).
LIGHT_TIMES = [
    (1.6697739, 0.0, 0.0, 90.0, 131.4, 202.5, 10.891),
    (4.4672235, 0.0, 0.0, 90.0, 73.05, 124.78, 21.199),
    (8.569, 0.0, 0.0, 90.0, 62.2, 102.8, 31.915),
    (10.0, 0.3, 60.0, 90.0, 50.0, 100.0, 42.70),
    (20.178321, 0.31654, 155.50, 89.548, 49.948, 57.736, 12.52),
    (3.2, 0.0, 0.0, 89.5, 50.6176, 121.4822, 20.80),
    (1.268389985, 0.0, 0.0, 90.0, 72.23, 77.95, 0.666),  # CM Dra (Morales et al. 2009)
    # NLTT 11748, 0.15 and 0.71 solar masses: 4.6 s (Kaplan 2010, ApJ 717, L108, abstract)
    (0.235, 0.0, 0.0, 90.0, 271.0 * 0.15 / 0.71, 271.0, 4.61),
    # 2M 1938+4603, q = 0.2691: 2.06 +- 0.12 s measured (arXiv 1204.3321, abstract; K from memory)
    (0.1257653, 0.0, 0.0, 90.0, 65.7, 65.7 / 0.2691, 2.059),
]


@pytest.mark.parametrize(("P", "e", "omega", "i", "K1", "K2", "delay"), LIGHT_TIMES)
def test_light_time_delays_the_secondary(
    P: float, e: float, omega: float, i: float, K1: float, K2: float, delay: float
) -> None:
    light = light_time_cycles(K1, K2, eccentricity=e, inclination=i)
    seen, still = orbit_of(e, omega, i, light), orbit_of(e, omega, i)
    late = conjunction_phases(seen)[1] - conjunction_phases(still)[1]
    assert late * P * DAY == pytest.approx(delay, abs=0.006)
    assert late == pytest.approx(
        secondary_delay(K1, K2, ecosw=seen.ecosw, esinw=seen.esinw), rel=2e-3
    )


@pytest.mark.parametrize(("P", "e", "omega", "i", "K1", "K2", "delay"), LIGHT_TIMES)
def test_light_time_against_each_star_s_own(
    P: float, e: float, omega: float, i: float, K1: float, K2: float, delay: float
) -> None:
    factor = sqrt(1 - e * e) / (2 * pi * C_KM_S * sin(radians(i)))
    axes = (K1 * factor, K2 * factor)
    orbit = orbit_of(e, omega, i, axes[1] - axes[0])

    def across(cycles: float) -> float:
        return float(retarded(cycles, e, omega, inclination=i, axes=axes)[0])

    # The observed primary is the zero of time here.
    shift = brentq(across, -1e-3, 1e-3, xtol=1e-15)
    beta = (K1 + K2) / C_KM_S
    for cycles in (0.01, -0.02, 0.3, conjunction_phases(orbit)[1] + 0.004, 0.8):
        place = retarded(cycles + shift, e, omega, inclination=i, axes=axes)
        assert sky_separation([cycles], orbit)[0] == pytest.approx(
            float(np.hypot(*place)), abs=3 * beta**2
        )


def test_light_time_needs_both_stars() -> None:
    # Moving both stars by the delay of the eclipsed one would give half: P (K2-K1)/(2 pi c).
    assert light_time_cycles(80.0, 80.0, eccentricity=0.2, inclination=88.0) == 0.0
    assert secondary_delay(50.0, 100.0) == pytest.approx(50 / (pi * C_KM_S))


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"period": 0.0}, "period: expected a positive number"),
        ({"period": nan}, "period: expected a positive number"),
        ({"epoch": nan}, "epoch: expected a finite number"),
        ({"inclination": 90.1}, "inclination: expected 0...90 deg"),
        ({"light_time": 0.2}, "light_time: expected a small part of a cycle"),
        ({"ecosw": 0.9, "esinw": 0.9}, "expected an eccentricity below 1"),
    ],
)
def test_orbit_refuses(arguments: dict[str, float], words: str) -> None:
    with pytest.raises(ValueError, match=words):
        Orbit(**arguments)


def test_light_time_refuses() -> None:
    with pytest.raises(ValueError, match="eccentricity: expected"):
        light_time_cycles(1.0, 2.0, eccentricity=1.0, inclination=90.0)
    with pytest.raises(ValueError, match="inclination: expected above 0"):
        light_time_cycles(1.0, 2.0, eccentricity=0.0, inclination=0.0)
