"""Small effects: shapes over the orbit, predicted amplitudes."""

from __future__ import annotations

from collections.abc import Callable
from math import cos, exp, pi, radians, sin

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.optimize import approx_fprime

from derivatives import check_derivatives
from shadowscale.constants import H_PLANCK, K_BOLTZMANN, C
from shadowscale.light import proximity
from shadowscale.light.proximity import (
    BEAMING1,
    BEAMING2,
    ELLIPSOIDAL,
    REFLECTION1,
    REFLECTION2,
    SHAPES_FULL_SIZE,
    SHAPES_SIZE,
    beaming_amplitude,
    beaming_factor,
    ellipsoidal_amplitude,
    gravity_darkening,
    lambert_phase,
    proximity_full,
    proximity_shapes,
    reflection_amplitude,
)
from shadowscale.orbit import _kernels

Floats = NDArray[np.float64]


def shapes(rho: float, longitude: float, inclination: float, ecosw: float = 0.0) -> Floats:
    out = np.empty(SHAPES_SIZE)
    sin2i = sin(radians(inclination)) ** 2
    proximity_shapes(rho, sin(longitude), cos(longitude), sin2i, ecosw, out)
    return out


def at_phase(phase: float, inclination: float = 90.0) -> Floats:
    return shapes(1.0, pi / 2 + 2 * pi * phase, inclination)


# The direct integral over the star's surface, to first order in the tide: r = R [1 + eps P2], local
# intensity with gravity to the power g, linear limb law.
def surface_light(u: float, g: float, longitude: float, inclination: float) -> float:
    eps = 1e-4
    x, w = np.polynomial.legendre.leggauss(60)
    theta = np.arccos(x)[:, None]
    phi = (np.arange(240) + 0.5)[None, :] * 2 * pi / 240
    n = np.stack([np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi), x[:, None] + 0 * phi])
    # The companion lies along x; the observer's direction makes the angle with cosine s.
    s = sin(longitude) * sin(radians(inclination))
    observer = np.array([s, np.sqrt(1 - s * s), 0.0])
    p2 = 1.5 * n[0] ** 2 - 0.5
    radius = 1 + eps * p2
    # Outward normal of the surface r(theta): n - grad(r)/r on the sphere.
    slope = eps * 3 * n[0] * (np.array([1.0, 0.0, 0.0])[:, None, None] - n[0] * n)
    normal = n - slope
    mu = np.einsum("i,ijk->jk", observer, normal)
    # Local gravity of an equipotential: -2 eps P2 of the distance, -2 eps P2 of the tide itself.
    light = np.where(mu > 0, mu * (1 - u + u * mu), 0.0) * radius**2 * (1 - 4 * g * eps * p2)
    return float((w[:, None] * light).sum() * 2 * pi / 240)


def test_circular_tide_is_brightest_at_quadratures() -> None:
    assert [at_phase(phase)[ELLIPSOIDAL] for phase in (0.0, 0.25, 0.5, 0.75)] == pytest.approx(
        [-1.0, 1.0, -1.0, 1.0]
    )
    assert at_phase(0.1, 60.0)[ELLIPSOIDAL] == pytest.approx(-cos(0.4 * pi))


def test_reflecting_star_shows_its_lit_side_when_behind() -> None:
    # Star 1 is behind at phase 0, star 2 at phase 1/2.
    assert at_phase(0.0)[REFLECTION1] == pytest.approx(1.0)
    assert at_phase(0.5)[REFLECTION1] == pytest.approx(0.0, abs=1e-12)
    assert at_phase(0.5)[REFLECTION2] == pytest.approx(1.0)
    assert at_phase(0.25)[[REFLECTION1, REFLECTION2]] == pytest.approx([1 / pi, 1 / pi])


def test_approaching_star_is_brighter() -> None:
    # Star 1 comes toward the observer after primary eclipse.
    assert at_phase(0.25)[BEAMING1] == pytest.approx(1.0)
    assert at_phase(0.25)[BEAMING2] == pytest.approx(-1.0)


def test_lambert_sphere() -> None:
    # Mean over a circular orbit seen edge-on against the mean over the whole sphere: 1/4 of (2/3) over 2/3
    # is 3/8 (Lambert's law, from memory; computed here by quadrature).
    x, w = np.polynomial.legendre.leggauss(2000)
    over_sphere = sum(weight * lambert_phase(at)[0] for at, weight in zip(x, w)) / 2
    assert over_sphere == pytest.approx(3 / 8, abs=1e-6)
    assert [lambert_phase(c)[0] for c in (1.0, 0.0, -1.0)] == pytest.approx([1, 1 / pi, 0])
    slope = approx_fprime(np.array([0.3]), lambda x: lambert_phase(x[0])[0], 1e-7)[0]
    assert lambert_phase(0.3)[1] == pytest.approx(slope, abs=1e-6)


def test_distance_weakens_the_effects() -> None:
    near, far = shapes(1.0, 2.0, 80.0), shapes(2.0, 2.0, 80.0)
    constant = 2 / (3 * sin(radians(80.0)) ** 2) - 1
    assert (far[ELLIPSOIDAL] + constant) * 8 == pytest.approx(near[ELLIPSOIDAL] + constant)
    assert far[[REFLECTION1, REFLECTION2]] * 4 == pytest.approx(near[[REFLECTION1, REFLECTION2]])
    assert far[BEAMING1] == near[BEAMING1]


def test_tide_is_a_second_legendre_function() -> None:
    # In an orbit seen from above only the distance changes: the disc shrinks and swells with rho^-3.
    low = radians(1.0)
    sin2i = sin(low) ** 2
    light = [sin2i * (shapes(rho, 0.7, 1.0)[ELLIPSOIDAL]) for rho in (0.8, 1.0)]
    assert light[0] - light[1] == pytest.approx(2 / 3 * (0.8**-3 - 1), rel=1e-3)


def sky(x: Floats) -> Floats:
    constants, out = np.empty(_kernels.CONSTANTS_SIZE), np.empty(_kernels.SKY_FULL_SIZE)
    _kernels.orbit_constants(x[1], x[2], x[3], constants)
    _kernels.sky_full(x[0], constants, x[4], out)
    return out


def full(x: Floats) -> Floats:
    out = np.empty(SHAPES_FULL_SIZE)
    proximity_full(sky(x), 1 - x[3], x[1], out)
    return out


@pytest.mark.parametrize("orbit", [(0.0, 0.0), (0.2, -0.1), (-0.3, 0.4)])
@pytest.mark.parametrize("cycles", [0.0, 0.11, 0.25, 0.5, 0.83])
def test_derivatives(orbit: tuple[float, float], cycles: float) -> None:
    x = np.array([cycles, *orbit, 0.08, 1e-4])
    check_derivatives(
        lambda x: full(x)[:SHAPES_SIZE],
        full(x)[SHAPES_SIZE:].reshape(5, 5),
        x,
        step=1e-4,
        tolerance=1e-6,
    )


# (u, g), factor 0.15 (15+u)(1+g)/(3-u): Morris & Naftilan 1993, ApJ 419, 344, confirmed by a first-order
# surface integral.
@pytest.mark.parametrize(
    ("u", "g", "alpha"),
    [
        (0.0, 0.0, 0.75),
        (0.5, 0.32, 1.2276),
        (0.6, 0.32, 1.2870),
        (0.5, 1.0, 1.8600),
        (0.3, 1.0, 1.7000),
        (1.0, 0.0, 1.2000),
        (0.6, 0.3, 1.2675),
    ],
)
def test_ellipsoidal_factor(u: float, g: float, alpha: float) -> None:
    found = ellipsoidal_amplitude(0.1, 1.0, inclination=90.0, linear_limb=u, gravity_darkening=g)
    assert found == pytest.approx(alpha * 1e-3, abs=5e-8)


def test_ellipsoidal_factor_is_the_surface_integral() -> None:
    for u, g in ((0.0, 0.0), (0.6, 0.0), (1.0, 0.0), (0.5, 0.32), (0.3, 1.0)):
        bright, faint = (surface_light(u, g, at, 90.0) for at in (0.0, pi / 2))
        amplitude = (bright - faint) / (bright + faint) / 1e-4
        expected = ellipsoidal_amplitude(
            0.1, 1.0, inclination=90.0, linear_limb=u, gravity_darkening=g
        )
        assert amplitude == pytest.approx(expected / 1e-3, rel=2e-3)


# Primaries of published pairs (sources in the tests of absolute dimensions), u = 0.5, g = 0.32: computed.
@pytest.mark.parametrize(
    ("r", "q", "i", "amplitude"),
    [
        (0.25721, 2.536 / 3.908, 89.14, 0.0136),
        (0.22397, 0.599 / 0.610, 87.6, 0.0136),
        (0.15681, 2.327 / 2.389, 76.0, 0.0044),
        (0.14449, 1.325 / 2.263, 88.332, 0.0022),
        (0.10009, 2.3581 / 2.5444, 88.6, 0.0011),
        (0.06731, 0.2141 / 0.2310, 89.769, 0.00035),
        (0.03242, 1.0337 / 1.1949, 89.548, 4e-5),
    ],
)
def test_ellipsoidal_amplitudes_of_known_pairs(
    r: float, q: float, i: float, amplitude: float
) -> None:
    assert ellipsoidal_amplitude(r, q, inclination=i) == pytest.approx(
        amplitude, rel=0.06, abs=5e-6
    )


@pytest.mark.parametrize(
    ("teff", "wavelength", "factor"),
    [
        (4000.0, 600.0, 6.010),
        (5772.0, 550.0, 4.581),
        (10000.0, 450.0, 3.334),
        (20000.0, 550.0, 1.793),
        (5772.0, 786.0, 3.3102),
        (6500.0, 786.0, 2.9954),
    ],
)
def test_beaming_factor(teff: float, wavelength: float, factor: float) -> None:
    # Loeb & Gaudi 2003, ApJL 588, L117: x e^x/(e^x - 1).
    assert beaming_factor(teff, wavelength) == pytest.approx(factor, abs=6e-4)


def test_beaming_is_the_doppler_shift_of_a_black_body() -> None:
    # D^3 B_nu(nu/D) of an approaching source, differentiated numerically.
    nu = C / 550e-9

    def flux(doppler: float) -> float:
        shifted = nu / doppler
        return doppler**3 * shifted**3 / (exp(H_PLANCK * shifted / (K_BOLTZMANN * 5772.0)) - 1)

    slope = (flux(1 + 1e-5) - flux(1 - 1e-5)) / 2e-5 / flux(1.0)
    assert beaming_factor(5772.0, 550.0) == pytest.approx(slope, rel=1e-8)
    assert beaming_amplitude(100.0, teff=5772.0, wavelength=550.0) == pytest.approx(
        1528e-6, abs=1e-6
    )


@pytest.mark.parametrize(
    ("r", "amplitude"), [(0.05, 0.00167), (0.10, 0.00667), (0.15, 0.0150), (0.20, 0.0267)]
)
def test_reflection_of_a_lambert_sphere(r: float, amplitude: float) -> None:
    # (2/3) r^2 of the companion's light at full phase: computed.
    assert reflection_amplitude(r, 1.0) == pytest.approx(amplitude, abs=6e-6 + 0.004 * amplitude)
    assert reflection_amplitude(r, 0.3, albedo=0.5) == pytest.approx(
        0.15 * reflection_amplitude(r, 1.0)
    )


def test_gravity_darkening_joins_both_kinds_of_envelope() -> None:
    assert gravity_darkening(5772.0, 550.0) == pytest.approx(0.08 * beaming_factor(5772.0, 550.0))
    assert gravity_darkening(9000.0, 550.0) == pytest.approx(0.25 * beaming_factor(9000.0, 550.0))
    assert 0.08 < gravity_darkening(7000.0, 550.0) / beaming_factor(7000.0, 550.0) < 0.25
    # The Rayleigh-Jeans limit: intensity goes as the temperature.
    assert gravity_darkening(2e5, 50000.0) == pytest.approx(0.25, abs=1e-3)


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: ellipsoidal_amplitude(0.0, 1.0, inclination=90.0), "radius: expected a positive"),
        (lambda: ellipsoidal_amplitude(0.1, 0.0, inclination=90.0), "companion_mass: expected"),
        (lambda: reflection_amplitude(0.1, 1.2), "companion_light: expected 0...1"),
        (lambda: beaming_factor(-1.0, 500.0), "teff: expected a positive number"),
        (lambda: beaming_factor(5000.0, 0.0), "wavelength: expected a positive number"),
    ],
)
def test_refuses(call: Callable[[], float], words: str) -> None:
    with pytest.raises(ValueError, match=words):
        call()


def test_shapes_are_numbered_once_each() -> None:
    places = (ELLIPSOIDAL, REFLECTION1, REFLECTION2, BEAMING1, BEAMING2)
    assert sorted(places) == list(range(proximity.SHAPES_SIZE))
