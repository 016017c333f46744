"""How far a star is from being a sphere: the Roche lobe, the tide and the rotation.

`mass_ratio` here is always the mass of *this* star over that of its companion.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def lobe_radius(mass_ratio: ArrayLike) -> Floats:
    """Volume radius of the Roche lobe in units of the distance of the stars.

    Parameters
    ----------
    mass_ratio : array of float64
        This star over its companion, positive.

    Raises
    ------
    ValueError
        If a mass ratio is not positive.

    Notes
    -----
    0.49 q^(2/3)/(0.6 q^(2/3) + ln(1 + q^(1/3))), better than 1 % for every q.

    References
    ----------
    Eggleton 1983, ApJ 268, 368.
    """
    root = np.cbrt(_positive("mass_ratio", mass_ratio))
    square = root * root
    return np.asarray(0.49 * square / (0.6 * square + np.log1p(root)), dtype=np.float64)


def fill_out(radius: ArrayLike, mass_ratio: ArrayLike, *, eccentricity: ArrayLike = 0.0) -> Floats:
    """Radius of the star over that of its Roche lobe at periastron; 1 or more is not detached.

    Parameters
    ----------
    radius : array of float64 [a]
    mass_ratio : array of float64
        This star over its companion.
    eccentricity : array of float64
    """
    nearest = 1 - _eccentricity(eccentricity)
    return _positive("radius", radius) / (lobe_radius(mass_ratio) * nearest)


def oblateness(
    radius: ArrayLike, mass_ratio: ArrayLike, *, eccentricity: ArrayLike = 0.0
) -> Floats:
    """(point - pole)/r at periastron to leading order: how far the star is from a sphere.

    Parameters
    ----------
    radius : array of float64 [a]
    mass_ratio : array of float64
        This star over its companion.
    eccentricity : array of float64

    Notes
    -----
    The tide raises 1.5 r^3/q toward the companion against the pole, a rotation in step with the orbit
    0.5 r^3 (1 + 1/q); at periastron r^3 grows as (1-e)^-3, and the rotation in step there as
    (1+e)/(1-e)^3. Against exact Roche surfaces it is low by 4 % at r = 0.1 and 16 % at r = 0.25, q = 1.
    """
    r, q, e = (
        _positive("radius", radius),
        _positive("mass_ratio", mass_ratio),
        _eccentricity(eccentricity),
    )
    cube = (r / (1 - e)) ** 3
    return np.asarray(cube * (1.5 / q + 0.5 * (1 + e) * (1 + 1 / q)), dtype=np.float64)


def _positive(name: str, value: ArrayLike) -> Floats:
    array = np.asarray(value, dtype=np.float64)
    if np.any(array <= 0):
        raise ValueError(f"{name}: expected positive numbers, found {value!r}")
    return array


def _eccentricity(value: ArrayLike) -> Floats:
    e = np.asarray(value, dtype=np.float64)
    if np.any((e < 0) | (e >= 1)):
        raise ValueError(f"eccentricity: expected 0 <= e < 1, found {value!r}")
    return e
