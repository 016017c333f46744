"""From the orbit's numbers to masses, radii, gravities, luminosities and distance.

Units: P [d], K [km/s], i [deg], fractional radii r = R/a, masses, radii and luminosities in nominal
solar units (IAU 2015 Resolution B3; Prsa et al. 2016, AJ 152, 41). Every function takes numbers or
arrays that broadcast, so samples go through as they are and errors keep their correlations.
Nothing is rounded; no value is assumed in silence.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale.constants import (
    AXIS_FACTOR,
    DAY,
    DENSITY_SUN,
    GRAVITY_FACTOR,
    KEPLER_FACTOR,
    L_SUN,
    LOGG_SUN,
    MASS_FACTOR,
    MBOL_SUN,
    R_SUN,
    SIGMA_SB,
    SPIN_FACTOR,
    G,
)

Floats = NDArray[np.float64]


def semi_major_axis(period: ArrayLike, total_mass: ArrayLike) -> Floats:
    """a [solar radii] by Kepler's third law from the period [d] and M1 + M2 [solar masses]."""
    return _floats(KEPLER_FACTOR * np.cbrt(_floats(total_mass) * _floats(period) ** 2))


def semi_major_axis_of_velocities(
    period: ArrayLike,
    K1: ArrayLike,
    K2: ArrayLike,
    eccentricity: ArrayLike = 0.0,
    inclination: ArrayLike = 90.0,
) -> Floats:
    """a [solar radii] from both velocity amplitudes: P/(2 pi) sqrt(1-e^2) (K1+K2)/sin i."""
    total = _floats(K1) + _floats(K2)
    return _floats(AXIS_FACTOR * _eta(eccentricity) * total * _floats(period) / _sin(inclination))


def masses(
    period: ArrayLike,
    K1: ArrayLike,
    K2: ArrayLike,
    eccentricity: ArrayLike = 0.0,
    inclination: ArrayLike = 90.0,
) -> tuple[Floats, Floats]:
    """M1 and M2 [solar masses] of a double-lined system.

    M1,2 sin^3 i = P/(2 pi G) (1-e^2)^(3/2) (K1+K2)^2 K2,1: the star that moves less is the heavier.
    """
    first, second = _floats(K1), _floats(K2)
    factor = MASS_FACTOR * _floats(period) * (first + second) ** 2
    factor = factor * (_eta(eccentricity) / _sin(inclination)) ** 3
    return factor * second, factor * first


def velocity_amplitudes(
    period: ArrayLike,
    M1: ArrayLike,
    M2: ArrayLike,
    eccentricity: ArrayLike = 0.0,
    inclination: ArrayLike = 90.0,
) -> tuple[Floats, Floats]:
    """K1 and K2 [km/s] of two masses [solar]: `masses` inverted."""
    first, second = _floats(M1), _floats(M2)
    total = np.cbrt((first + second) / (MASS_FACTOR * _floats(period)))
    total = total * _sin(inclination) / _eta(eccentricity)
    share = second / (first + second)
    return total * share, total * (1 - share)


def mass_function(period: ArrayLike, K: ArrayLike, eccentricity: ArrayLike = 0.0) -> Floats:
    """Mass function [solar masses] of a single-lined orbit: m^3 sin^3 i/(M + m)^2, m the companion."""
    return _floats(MASS_FACTOR * _eta(eccentricity) ** 3 * _floats(K) ** 3 * _floats(period))


def companion_mass(
    period: ArrayLike,
    K: ArrayLike,
    eccentricity: ArrayLike,
    inclination: ArrayLike,
    mass: ArrayLike,
) -> Floats:
    """Mass of the companion for an assumed mass of the star whose velocities were measured.

    Parameters
    ----------
    period : [d]
    K : [km/s]
        Semi-amplitude of the star that was measured, not negative.
    eccentricity : number
    inclination : [deg]
        At 90 deg the result is the companion's smallest possible mass.
    mass : [solar masses]
        Assumed for the star that was measured.

    Returns
    -------
    float64 [solar masses]
        The one real root m of m^3 sin^3 i = f (M + m)^2, to rounding.

    Raises
    ------
    ValueError
        If the mass is not positive, or the amplitude negative.
    """
    function = mass_function(period, K, eccentricity) / _sin(inclination) ** 3
    f, m = np.broadcast_arrays(function, _floats(mass))
    if np.any(m <= 0) or np.any(f < 0):
        raise ValueError("mass, K: expected a positive mass and no negative amplitude")
    # The start lies above the root, where the cubic is convex: Newton's steps fall onto it.
    found = f + 2 * np.cbrt(f * m * m) + np.sqrt(f * m)
    for _ in range(60):
        value = found**3 - f * (m + found) ** 2
        slope = 3 * found**2 - 2 * f * (m + found)
        step = np.divide(value, slope, out=np.zeros_like(found), where=slope > 0)
        found = found - step
        if not np.any(np.abs(step) > 1e-15 * found):
            break
    return _floats(found)


def logg(mass: ArrayLike, radius: ArrayLike) -> Floats:
    """log g [dex, cgs] from mass and radius [solar]."""
    return _floats(LOGG_SUN + np.log10(_floats(mass)) - 2 * np.log10(_floats(radius)))


def logg_companion(
    period: ArrayLike,
    K: ArrayLike,
    eccentricity: ArrayLike,
    inclination: ArrayLike,
    radius: ArrayLike,
) -> Floats:
    """log g [dex, cgs] of the companion, of fractional radius r, of the star that moves with K [km/s].

    g2 = (2 pi/P) sqrt(1-e^2) K1/(r2^2 sin i): no model of either star enters.

    References
    ----------
    Southworth, Wheatley & Sams 2007, MNRAS 379, L11; Southworth et al. 2004, MNRAS 355, 986.
    """
    speed = GRAVITY_FACTOR * _eta(eccentricity) * _floats(K) / _floats(period)
    return _floats(np.log10(speed / (_floats(radius) ** 2 * _sin(inclination))))


def mean_density(mass: ArrayLike, radius: ArrayLike) -> Floats:
    """Mean density [kg/m3] from mass and radius [solar]."""
    return _floats(DENSITY_SUN * _floats(mass) / _floats(radius) ** 3)


def mean_densities(
    period: ArrayLike, r1: ArrayLike, r2: ArrayLike, mass_ratio: ArrayLike
) -> tuple[Floats, Floats]:
    """Mean densities [kg/m3] of both stars without any velocity, for a mass ratio q = M2/M1.

    3 pi/(G P^2 r1^3 (1+q)) and 3 pi q/(G P^2 r2^3 (1+q)); P in days, r fractional radii.
    """
    q = _floats(mass_ratio)
    whole = 3 * np.pi / (G * (_floats(period) * DAY) ** 2 * (1 + q))
    return whole / _floats(r1) ** 3, whole * q / _floats(r2) ** 3


def luminosity(radius: ArrayLike, teff: ArrayLike) -> Floats:
    """Luminosity [nominal solar] from radius [nominal solar] and effective temperature [K]."""
    area = 4 * np.pi * (_floats(radius) * R_SUN) ** 2
    return area * SIGMA_SB * _floats(teff) ** 4 / L_SUN


def bolometric_magnitude(light: ArrayLike) -> Floats:
    """Absolute bolometric magnitude of a luminosity [nominal solar] (IAU 2015 Resolution B2)."""
    return MBOL_SUN - 2.5 * np.log10(_floats(light))


def synchronous_velocity(
    radius: ArrayLike, period: ArrayLike, inclination: ArrayLike = 90.0
) -> Floats:
    """v sin i [km/s] of a star of radius [solar] that turns once per orbit [d], axes parallel."""
    return SPIN_FACTOR * _floats(radius) * _sin(inclination) / _floats(period)


def distance(
    magnitude: ArrayLike,
    bolometric: tuple[ArrayLike, ArrayLike],
    corrections: tuple[ArrayLike, ArrayLike],
    extinction: ArrayLike,
) -> Floats:
    """Distance [pc] of the pair from its apparent magnitude outside eclipse, third light removed.

    Parameters
    ----------
    magnitude, extinction : [mag]
        In the band of the bolometric corrections.
    bolometric : Mbol1, Mbol2 [mag]
    corrections : bolometric corrections of both stars [mag]
        M_bol - M in the band, on the zero point of IAU 2015 B2; tables on an older zero point must be
        shifted first (Torres 2010, AJ 140, 1158).
    """
    light = sum(
        10 ** (-0.4 * (_floats(whole) - _floats(correction)))
        for whole, correction in zip(bolometric, corrections, strict=True)
    )
    modulus = _floats(magnitude) - _floats(extinction) + 2.5 * np.log10(light)
    return _floats(10 ** (1 + modulus / 5))


def _floats(value: Any) -> Floats:
    return np.asarray(value, dtype=np.float64)


def _eta(eccentricity: ArrayLike) -> Floats:
    e = _floats(eccentricity)
    if np.any((e < 0) | (e >= 1)):
        raise ValueError(f"eccentricity: expected 0 <= e < 1, found {e}")
    return np.sqrt(1 - e * e)


def _sin(inclination: ArrayLike) -> Floats:
    i = _floats(inclination)
    if np.any((i <= 0) | (i > 180)):
        raise ValueError(f"inclination: expected 0 < i <= 180 deg, found {i}")
    return np.sin(np.radians(i))
