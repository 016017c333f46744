"""The model's light curves and velocities against other people's, computed another way."""

from __future__ import annotations

from math import cos, degrees, pi, radians, sin

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.optimize import brentq

from fit_examples import (
    eccentricity_of,
    invented,
    outside_light,
    outside_velocity,
    secondary_phase,
)
from shadowscale.fit.curves import model_curves
from shadowscale.fit.model import model_light, model_light_at_phases, model_velocities
from shadowscale.fit.system import System

Floats = NDArray[np.float64]
# batman-package is off by 1e-9 to 3e-8 itself (measured against the hidden fraction by quadrature of
# many digits, at the separations of these pairs); the engine by 7e-9 at the most.
BATMAN = 4e-8


def _drawn(seed: int) -> System:
    """A random pair with a random orbit; k on both sides of one."""
    random = np.random.default_rng(seed)
    ratio = float(np.exp(random.uniform(-1.3, 1.3)))
    total = float(random.uniform(0.05, 0.35))
    e, omega = float(random.uniform(0.0, 0.5)), float(random.uniform(0, 360))
    lowest = degrees(np.arccos(0.8 * total * (1 - e)))  # deep enough that both stars are eclipsed
    limb = [(float(random.uniform(0.2, 0.6)), float(random.uniform(0.0, 0.3))) for _ in (1, 2)]
    return invented(
        law="quadratic", limb=limb, bands={"V": float(random.uniform(0.1, 1.5))},
        third=float(random.uniform(0.0, 0.3)), velocities=False, radius_sum=total,
        radius_ratio=ratio, inclination=float(random.uniform(lowest, 90.0)),
        ecosw=e * cos(radians(omega)), esinw=e * sin(radians(omega)),
    )  # fmt: skip


def _times(system: System, count: int = 1500) -> Floats:
    """Times through both eclipses and around, in several cycles before and after the epoch."""
    phases = np.concatenate(
        [
            np.linspace(-0.15, 0.15, count),
            secondary_phase(system) + np.linspace(-0.15, 0.15, count),
            np.linspace(-3.0, 4.0, 200),
        ]
    )
    return system.value("epoch") + phases * system.value("period")


@pytest.mark.parametrize("seed", range(12))
def test_light_of_random_pairs(seed: int) -> None:
    """Source: batman-package (Kreidberg 2015, PASP 127, 1161) for both stars, orbit by scipy."""
    system = _drawn(seed)
    time = _times(system)
    expected = outside_light(system, "V", time)

    assert expected.min() < 0.99 * expected.max()
    np.testing.assert_allclose(model_light(system, "V", time), expected, rtol=0, atol=BATMAN)


@pytest.mark.parametrize(
    ("ratio", "inclination"), [(0.4, 90.0), (1.0, 90.0), (2.5, 89.0), (0.8, 80.0), (1.25, 80.0)]
)
def test_light_of_marked_geometries(ratio: float, inclination: float) -> None:
    """Total, annular, equal and partial eclipses. Source: batman-package."""
    system = invented(
        law="quadratic", limb=((0.5, 0.1), (0.3, 0.3)), radius_sum=0.25, radius_ratio=ratio,
        inclination=inclination, velocities=False,
    )  # fmt: skip
    time = _times(system)

    np.testing.assert_allclose(
        model_light(system, "V", time), outside_light(system, "V", time), rtol=0, atol=BATMAN
    )


def _averaged(system: System, time: Floats, exposure: float) -> Floats:
    """Mean of batman-package's light over each exposure, by 800 points of the midpoint rule."""
    parts = 800
    shifts = ((np.arange(parts) + 0.5) / parts - 0.5) * exposure / 86400.0
    grid = (time[:, None] + shifts[None, :]).ravel()
    return outside_light(system, "V", grid).reshape(time.size, parts).mean(axis=1)


@pytest.mark.parametrize("exposure", [120.0, 1800.0, 9000.0])
@pytest.mark.parametrize("seed", [1, 4, 7])
def test_light_is_averaged_over_the_exposure(exposure: float, seed: int) -> None:
    """Up to 30-minute exposures and longer than an eclipse. Source: batman-package and a mean.

    A mean of 800 points is off by about (1/800)^2/24 times the kink of the curve over an exposure:
    4e-8 of its depth at the most.
    """
    instant = _drawn(seed)
    system = invented(
        law="quadratic", limb=[instant.limb_darkening(star, "V") for star in (1, 2)],
        velocities=False, exposure=exposure,
    ).with_values(instant.values)  # fmt: skip
    phases = np.concatenate(
        [np.linspace(-0.1, 0.1, 60), secondary_phase(system) + np.linspace(-0.1, 0.1, 60)]
    )
    time = system.value("epoch") + phases * system.value("period")

    np.testing.assert_allclose(
        model_light(system, "V", time), _averaged(system, time, exposure), rtol=0, atol=1e-7
    )


def test_light_repeats_after_many_cycles() -> None:
    system = _drawn(3)
    phases = np.linspace(-0.1, 0.6, 500)
    near = model_light_at_phases(system, "V", phases)
    far = model_light_at_phases(system, "V", phases + 1000)

    # A Julian date of 64 bits is rounded to 4e-5 s, in which light changes by up to 1e-8.
    np.testing.assert_allclose(far, near, rtol=0, atol=2e-8)


# ---------------------------------------------------------------- light time


def _middle(system: System, guess: float) -> float:
    """Phase of the middle of an eclipse: the point in the middle of both half-depth crossings.

    For a circular orbit the eclipse is symmetric, so that this is its middle.
    """
    period, epoch = system.value("period"), system.value("epoch")

    def light(phase: float) -> float:
        return float(model_light(system, "V", np.array([epoch + phase * period]))[0])

    half = (1 + light(guess)) / 2
    left = brentq(lambda phase: light(phase) - half, guess - 0.1, guess, xtol=1e-13)
    right = brentq(lambda phase: light(phase) - half, guess, guess + 0.1, xtol=1e-13)
    return float((left + right) / 2)


KAPLAN = {"period": 3.2, "M1": 1.2, "M2": 0.5, "inclination": 89.5}


def _kaplan(*, light_time: bool) -> System:
    """P = 3.2 d, M = 1.2 + 0.5, R = 1.3 + 0.6 solar, i = 89.5 deg: a by Kepler's third law by hand."""
    a = 4.2082783458296 * (1.7 * 3.2**2) ** (1 / 3)  # [solar radii], IAU 2015 B3
    whole = 50.5927316922 * a * sin(radians(89.5)) / 3.2  # K1 + K2 [km/s]
    return invented(
        law="quadratic", limb=((0.4, 0.2), (0.4, 0.2)), light_time=light_time, period=3.2,
        radius_sum=1.9 / a, radius_ratio=0.6 / 1.3, inclination=89.5, K1=whole * 0.5 / 1.7,
        K2=whole * 1.2 / 1.7,
    )  # fmt: skip


def test_secondary_is_late_by_kaplans_delay() -> None:
    """Source: Kaplan 2010, ApJL 717, L108: P (K2 - K1)/(pi c) = 20.8 s for these stars, not 10.4 s.

    Half-way down, the stars are cos(theta) times as far behind one another as at conjunction: 0.3 %.
    """
    with_delay, without = _kaplan(light_time=True), _kaplan(light_time=False)
    delay = (_middle(with_delay, 0.5) - _middle(without, 0.5)) * 3.2 * 86400

    assert delay == pytest.approx(20.8, abs=0.1)
    assert _middle(with_delay, 0.0) == pytest.approx(0.0, abs=5e-7)


@pytest.mark.parametrize(
    ("period", "amplitudes", "seconds"),
    [(1.6697739, (131.4, 202.5), 10.8911), (4.4672235, (73.05, 124.78), 21.1994),
     (8.569, (62.2, 102.8), 31.9153)],
    ids=["zeta Phe", "YZ Cas", "TZ Men"],
)  # fmt: skip
def test_delay_of_circular_orbits(
    period: float, amplitudes: tuple[float, float], seconds: float
) -> None:
    """Source: numerical integration of both stars' retarded positions (computed apart, sect. 5.5 of the
    project's reference values); equal to Kaplan's formula."""
    k1, k2 = amplitudes
    shape = {"period": period, "K1": k1, "K2": k2, "inclination": 90.0, "radius_sum": 0.02}
    found = _middle(invented(light_time=True, **shape), 0.5)

    assert (found - 0.5) * period * 86400 == pytest.approx(seconds, abs=0.01)


def _retarded(system: System) -> float:
    """Phase of the secondary less that of the primary, with each star at its own retarded time.

    Barycentric orbits, r1 = -(a1/a) r and r2 = (a2/a) r; light of star n left at t - z_n/c. Solved by
    iteration and bracketing: no expansion in v/c.
    """
    e, omega = eccentricity_of(system)
    w, period = radians(omega), system.value("period") * 86400
    k = {star: system.value(f"K{star}") for star in (1, 2)}
    sine = sin(radians(system.value("inclination")))
    a = {star: k[star] * period * np.sqrt(1 - e**2) / (2 * pi * sine) for star in (1, 2)}  # [km]
    light_speed = 299792.458

    def place(star: int, t: float) -> tuple[float, float]:
        """x on the sky and z away from the observer [km]."""
        mean = 2 * pi * t / period
        ecc = brentq(lambda x: x - e * sin(x) - mean, mean - 1, mean + 1, xtol=1e-14)
        nu = 2 * np.arctan2(np.sqrt(1 + e) * sin(ecc / 2), np.sqrt(1 - e) * cos(ecc / 2))
        rho = (1 - e**2) / (1 + e * cos(nu))
        angle = nu + w + (0.0 if star == 1 else pi)
        return a[star] * rho * cos(angle), a[star] * rho * sin(angle) * sine

    def seen(star: int, t: float) -> float:
        left = t
        for _ in range(30):
            left = t - place(star, left)[1] / light_speed
        return place(star, left)[0]

    def apart(t: float) -> float:
        return seen(1, t) - seen(2, t)

    near = {}
    for at, angle in (("primary", pi / 2), ("secondary", 3 * pi / 2)):
        nu = angle - w
        ecc = 2 * np.arctan2(np.sqrt(1 - e) * sin(nu / 2), np.sqrt(1 + e) * cos(nu / 2))
        t = (ecc - e * sin(ecc)) / (2 * pi) * period
        near[at] = brentq(apart, t - 2000, t + 2000, xtol=1e-7)
    return float(((near["secondary"] - near["primary"]) / period) % 1.0)


@pytest.mark.parametrize(
    ("e", "omega", "period", "amplitudes"),
    [(0.3, 60.0, 10.0, (50.0, 100.0)), (0.31654, 155.50, 20.178321, (49.948, 57.736)),
     (0.45, 250.0, 5.0, (140.0, 60.0))],
)  # fmt: skip
def test_delay_of_eccentric_orbits(
    e: float, omega: float, period: float, amplitudes: tuple[float, float]
) -> None:
    """Source: both stars at their own retarded times, solved without any expansion (above)."""
    shape = {"ecosw": e * cos(radians(omega)), "esinw": e * sin(radians(omega)), "period": period,
             "K1": amplitudes[0], "K2": amplitudes[1], "inclination": 90.0, "radius_sum": 0.06,
             "radius_ratio": 0.95}  # fmt: skip
    system = invented(light_time=True, **shape)
    found = _middle(system, secondary_phase(system))
    still = _middle(invented(light_time=False, **shape), secondary_phase(system))
    delay = (found - still) * period * 86400
    expected = (_retarded(system) - secondary_phase(system)) * period * 86400

    assert abs(expected) > 10
    assert delay == pytest.approx(expected, abs=0.02)


# ---------------------------------------------------------------- velocities


@pytest.mark.parametrize(("e", "omega"), [(0.0, 0.0), (0.3, 77.0), (0.55, 250.0)])
def test_velocities_of_both_stars(e: float, omega: float) -> None:
    """Source: Kepler's equation by scipy's Newton iteration and gamma +- K [cos(nu + w) + e cos w] (textbook)."""
    system = invented(
        ecosw=e * cos(radians(omega)), esinw=e * sin(radians(omega)), gamma1=-12.0, gamma2=3.5
    )
    time = system.value("epoch") + np.linspace(-7.3, 9.1, 211)

    for star in (1, 2):
        np.testing.assert_allclose(
            model_velocities(system, star, time),
            outside_velocity(system, star, time),
            rtol=0,
            atol=1e-8,
        )


def test_star_1_approaches_after_its_eclipse() -> None:
    """Star 1 is behind at phase zero; after it, it comes towards us. The signs are a convention that
    light alone fixes: half a cycle either way would be another star."""
    system = invented()
    after = system.value("epoch") + 0.25 * system.value("period")

    assert model_velocities(system, 1, np.array([after]))[0] == pytest.approx(-14.2 - 98.4)
    assert model_velocities(system, 2, np.array([after]))[0] == pytest.approx(-14.2 + 112.9)


def test_no_velocity_without_an_amplitude() -> None:
    with pytest.raises(KeyError, match=r"gamma1|K1"):
        model_velocities(invented(velocities=False), 1, np.zeros(2))


def test_only_two_stars() -> None:
    with pytest.raises(ValueError, match=r"star: expected 1 or 2, found 3"):
        model_velocities(invented(), 3, np.zeros(2))


def test_curves_for_pictures_are_the_model() -> None:
    system = invented(bands={"V": 0.6, "I": 0.8})
    phases = np.linspace(-0.25, 0.75, 41)
    curves = model_curves(system, phases)
    time = system.value("epoch") + phases * system.value("period")

    assert set(curves.light) == {"V", "I"}
    np.testing.assert_array_equal(curves.light["I"], model_light(system, "I", time))
    assert curves.rv2 is not None
    np.testing.assert_array_equal(curves.rv2, model_velocities(system, 2, time))
    assert model_curves(invented(velocities=False), phases).rv1 is None
