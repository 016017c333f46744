"""The hidden fraction of a limb-darkened disc, for every law and any size of the dark disc."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale.light._kernels import eclipse_points
from shadowscale.light.laws import Coefficients, Law, law_named

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class HiddenFraction:
    """Hidden fraction and its derivatives at each separation; read-only arrays.

    Attributes
    ----------
    value, by_separation, by_ratio : (n,) float64
        The fraction, and its derivatives at fixed everything else.
    by_coefficients : (n, m) float64
    """

    value: Floats
    by_separation: Floats
    by_ratio: Floats
    by_coefficients: Floats


def hidden_fraction(
    separation: ArrayLike, ratio: float, law: str, coefficients: Coefficients
) -> Floats:
    """Fraction of a star's light that a dark disc in front of it hides.

    Parameters
    ----------
    separation : (n,) float64 [radii of the star behind]
        Distance of the centres on the sky, not negative.
    ratio : float
        Radius of the front disc over that of the one behind; may exceed 1.
    law : str
        A name from `shadowscale.light.laws.LAWS`.
    coefficients : (m,) float64
        As many as the law has.

    Returns
    -------
    (n,) float64
        0 outside eclipse, 1 when nothing is left; accurate to 1e-12 (linear, quadratic), 1e-9 (others).

    Raises
    ------
    ValueError
        If a separation is negative or not a number, `ratio` is not positive, the law is not known, a
        coefficient is missing, or the coefficients leave the disc no light.

    Notes
    -----
    Linear and quadratic laws in closed form, the others by a quadrature along the edge of the dark disc
    (see `shadowscale.light._kernels`). Nothing is special about d = 0, d = p, d = |1-p| and d = 1+p.
    Where a law's intensity is negative near the limb the result is kept within 0...1.

    References
    ----------
    Mandel & Agol 2002, ApJ 580, L171. Agol, Luger & Foreman-Mackey 2020, AJ 159, 123.
    """
    return hidden_fraction_derivatives(separation, ratio, law, coefficients).value


def hidden_fraction_derivatives(
    separation: ArrayLike, ratio: float, law: str, coefficients: Coefficients
) -> HiddenFraction:
    """The hidden fraction with its derivatives to separation, ratio and each coefficient.

    Parameters
    ----------
    separation, ratio, law, coefficients
        As `hidden_fraction` takes them.

    Returns
    -------
    HiddenFraction
        Derivatives are finite everywhere: 0 outside eclipse and where all is hidden, the one-sided
        limit or a large number at the contacts, where the second derivatives are infinite.

    Raises
    ------
    ValueError
        As `hidden_fraction`.
    """
    found = law_named(law)
    d = np.asarray(separation, dtype=np.float64)
    c = np.ascontiguousarray(coefficients, dtype=np.float64)
    _check(d, ratio, found, c)
    out = np.empty((d.size, 3 + c.size))
    eclipse_points(np.ascontiguousarray(d).ravel(), float(ratio), found.code, c, out)
    out.setflags(write=False)
    value, by_separation, by_ratio = (out[:, i].reshape(d.shape) for i in range(3))
    return HiddenFraction(value, by_separation, by_ratio, out[:, 3:].reshape(*d.shape, c.size))


def _check(d: Floats, ratio: float, law: Law, c: Floats) -> None:
    if not np.all(d >= 0):
        raise ValueError(f"separation must not be negative or NaN; found {d[~(d >= 0)].flat[0]}")
    if not (np.isfinite(ratio) and ratio > 0):
        raise ValueError(f"ratio must be a positive number; found {ratio}")
    if c.shape != (len(law.coefficients),):
        wanted = ", ".join(law.coefficients)
        raise ValueError(f"coefficients of the {law.name} law are {wanted}; found {c.tolist()}")
    if not (np.all(np.isfinite(c)) and law.mean_intensity(c) > 0):
        raise ValueError(f"coefficients must leave the disc some light; found {c.tolist()}")
