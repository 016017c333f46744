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


def semi_major_axis(
    period: ArrayLike,
    K1: ArrayLike,
    K2: ArrayLike,
    *,
    eccentricity: ArrayLike = 0.0,
    inclination: ArrayLike = 90.0,
) -> Floats:
    """a [solar radii] from both velocity amplitudes: P/(2 pi) sqrt(1-e^2) (K1+K2)/sin i."""
    total = _floats(K1) + _floats(K2)
    return _floats(AXIS_FACTOR * _eta(eccentricity) * total * _floats(period) / _sin(inclination))


def axis_from_masses(period: ArrayLike, total_mass: ArrayLike) -> Floats:
    """a [solar radii] by Kepler's third law from the period [d] and M1 + M2 [solar masses]."""
    return _floats(KEPLER_FACTOR * np.cbrt(_floats(total_mass) * _floats(period) ** 2))


def masses(
    period: ArrayLike,
    K1: ArrayLike,
    K2: ArrayLike,
    *,
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


def velocity_amplitude(
    period: ArrayLike,
    mass: ArrayLike,
    companion_mass: ArrayLike,
    *,
    eccentricity: ArrayLike = 0.0,
    inclination: ArrayLike = 90.0,
) -> Floats:
    """K [km/s] of a star from its mass and its companion's [solar masses]."""
    own, other = _floats(mass), _floats(companion_mass)
    cube = other**3 / ((own + other) ** 2 * MASS_FACTOR * _floats(period))
    return np.cbrt(cube) * _sin(inclination) / _eta(eccentricity)


def mass_function(period: ArrayLike, K: ArrayLike, *, eccentricity: ArrayLike = 0.0) -> Floats:
    """Mass function [solar masses] of a single-lined orbit: M_c^3 sin^3 i/(M + M_c)^2 of the companion M_c."""
    return _floats(MASS_FACTOR * _eta(eccentricity) ** 3 * _floats(K) ** 3 * _floats(period))


def companion_mass(
    function: ArrayLike, mass: ArrayLike, *, inclination: ArrayLike = 90.0
) -> Floats:
    """Mass of the unseen companion for an assumed mass of the visible star [solar masses].

    Parameters
    ----------
    function : mass function [solar masses], not negative
    mass : assumed mass of the star whose velocities were measured [solar masses]
    inclination : [deg]
        At 90 deg the result is the companion's smallest possible mass.

    Returns
    -------
    The one real root of M_c^3 sin^3 i = f (M + M_c)^2, to rounding.

    Raises
    ------
    ValueError
        If a mass is not positive, or the mass function negative.
    """
    f, m = np.broadcast_arrays(_floats(function) / _sin(inclination) ** 3, _floats(mass))
    if not (np.all(m > 0) and np.all(f >= 0)):
        raise ValueError("mass, function: expected positive masses")
    # Starts above the root, where the cubic is convex: Newton's steps fall onto it.
    found = f + 2 * np.cbrt(f * m * m) + np.sqrt(f * m)
    for _ in range(60):
        value = found**3 - f * (m + found) ** 2
        slope = 3 * found**2 - 2 * f * (m + found)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = np.where(slope != 0, value / slope, 0.0)
        found = found - step
        if np.all(np.abs(step) <= 1e-15 * np.abs(found)):
            break
    return np.asarray(found, dtype=np.float64)


def surface_gravity(mass: ArrayLike, radius: ArrayLike) -> Floats:
    """log g [dex, cgs] from mass and radius [solar]."""
    return _floats(LOGG_SUN + np.log10(_floats(mass)) - 2 * np.log10(_floats(radius)))


def surface_gravity_from_orbit(
    period: ArrayLike,
    companion_K: ArrayLike,
    radius: ArrayLike,
    *,
    eccentricity: ArrayLike = 0.0,
    inclination: ArrayLike = 90.0,
) -> Floats:
    """log g [dex, cgs] of a star of fractional radius r from its *companion's* velocities alone.

    g2 = (2 pi/P) sqrt(1-e^2) K1/(r2^2 sin i): no model of either star enters.

    References
    ----------
    Southworth, Wheatley & Sams 2007, MNRAS 379, L11; Southworth et al. 2004, MNRAS 355, 986.
    """
    speed = GRAVITY_FACTOR * _eta(eccentricity) * _floats(companion_K) / _floats(period)
    return np.log10(speed / (_floats(radius) ** 2 * _sin(inclination)))


def mean_density(mass: ArrayLike, radius: ArrayLike) -> Floats:
    """Mean density [kg/m3] from mass and radius [solar]."""
    return DENSITY_SUN * _floats(mass) / _floats(radius) ** 3


def mean_density_from_orbit(
    period: ArrayLike, radius: ArrayLike, *, mass_share: ArrayLike
) -> Floats:
    """Mean density [kg/m3] from the light curve alone: 3 pi/(G P^2 r^3) M/(M1+M2).

    Parameters
    ----------
    period : [d]
    radius : fractional radius
    mass_share : the star's share of the total mass: 1/(1+q) for star 1, q/(1+q) for star 2
    """
    seconds = _floats(period) * DAY
    return 3 * np.pi / (G * seconds**2) * _floats(mass_share) / _floats(radius) ** 3


def luminosity(radius: ArrayLike, teff: ArrayLike) -> Floats:
    """Luminosity [nominal solar] from radius [nominal solar] and effective temperature [K]."""
    area = 4 * np.pi * (_floats(radius) * R_SUN) ** 2
    return area * SIGMA_SB * _floats(teff) ** 4 / L_SUN


def bolometric_magnitude(light: ArrayLike) -> Floats:
    """Absolute bolometric magnitude of a luminosity [nominal solar] (IAU 2015 Resolution B2)."""
    return MBOL_SUN - 2.5 * np.log10(_floats(light))


def synchronous_velocity(
    period: ArrayLike, radius: ArrayLike, *, inclination: ArrayLike = 90.0
) -> Floats:
    """v sin i [km/s] of a star of radius [solar] that turns once per orbit [d], axes parallel."""
    return SPIN_FACTOR * _floats(radius) * _sin(inclination) / _floats(period)


def distance(
    magnitude: ArrayLike,
    Mbol1: ArrayLike,
    Mbol2: ArrayLike,
    *,
    bolometric_correction1: ArrayLike,
    bolometric_correction2: ArrayLike,
    extinction: ArrayLike,
) -> Floats:
    """Distance [pc] of the pair from its apparent magnitude outside eclipse, third light removed.

    Parameters
    ----------
    magnitude, extinction : [mag]
        In the band of the bolometric corrections.
    Mbol1, Mbol2 : [mag]
    bolometric_correction1, bolometric_correction2 : [mag]
        M_bol - M in the band, on the zero point of IAU 2015 B2; tables on an older zero point must be
        shifted first (Torres 2010, AJ 140, 1158).
    """
    first = 10 ** (-0.4 * (_floats(Mbol1) - _floats(bolometric_correction1)))
    second = 10 ** (-0.4 * (_floats(Mbol2) - _floats(bolometric_correction2)))
    absolute = -2.5 * np.log10(first + second)
    modulus = _floats(magnitude) - _floats(extinction) - absolute
    return _floats(10 ** (1 + modulus / 5))


def _floats(value: Any) -> Floats:
    return np.asarray(value, dtype=np.float64)


def _eta(eccentricity: ArrayLike) -> Floats:
    e = _floats(eccentricity)
    if not np.all((e >= 0) & (e < 1)):
        raise ValueError(f"eccentricity: expected 0 <= e < 1, found {e}")
    return np.sqrt(1 - e * e)


def _sin(inclination: ArrayLike) -> Floats:
    i = _floats(inclination)
    if not np.all((i > 0) & (i <= 180)):
        raise ValueError(f"inclination: expected 0 < i <= 180 deg, found {i}")
    return np.sin(np.radians(i))
