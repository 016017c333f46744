"""Light that one disc hides of another, good enough to turn depths into brightness.

A linear limb-darkening law with u = 0.5 stands for every star here: the contact times carry the
geometry, and the full fit has the real laws (`shadowscale.light`).
"""

from __future__ import annotations

from math import acos, asin, cos, pi, sin, sqrt

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale._compiled import compiled

Floats = NDArray[np.float64]

LINEAR_LIMB = 0.5
_STEP = 1e-5
_X, _W = np.polynomial.legendre.leggauss(24)
_COS = np.cos((_X + 1) * np.pi / 2)  # of t, and the weights of the integral of f sin t over 0...pi
_WEIGHT = _W * np.pi / 2 * np.sin((_X + 1) * np.pi / 2)


def hidden_light(separation: ArrayLike, ratio: ArrayLike, limb: float = LINEAR_LIMB) -> Floats:
    """Fraction of a star's light that a dark disc hides.

    Parameters
    ----------
    separation : (n,) float64 [radii of the star behind]
    ratio : (n,) float64
        Radius of the disc in front over that of the star.
    limb : float
        u of the linear law.

    Returns
    -------
    (n,) float64
        Good to 1e-9 for ratios of 0.05...20.
    """
    d, p = np.broadcast_arrays(
        np.asarray(separation, dtype=np.float64), np.asarray(ratio, dtype=np.float64)
    )
    out = np.empty(d.size)
    _fill(np.abs(d).ravel(), p.ravel(), limb, out)
    return out.reshape(d.shape)


def hidden_light_slopes(separation: Floats, ratio: Floats) -> Floats:
    """Hidden fraction and its derivatives to separation and to ln ratio, (n, 3)."""
    out = np.empty((separation.size, 3))
    _fill_slopes(separation, ratio, out)
    return out


@compiled
def _hidden(d: float, p: float, limb: float) -> float:
    """Gauss-Legendre in t, r = sin theta, theta = mid - half cos t over the partly covered ring."""
    whole = 1 - limb / 3
    if d >= 1 + p:
        return 0.0
    if p >= 1 + d:
        return 1.0
    inner = min(abs(d - p), 1.0)
    light = 0.0
    if p > d:  # rings nearer the centre are hidden whole
        rest = 1 - inner * inner
        light = (1 - limb) * inner * inner + limb * 2 / 3 * (1 - rest * sqrt(rest))
    low, high = asin(inner), asin(min(d + p, 1.0))
    mid, half = (high + low) / 2, (high - low) / 2
    if half > 0:
        ring = 0.0
        for n in range(_COS.size):
            theta = mid - half * _COS[n]
            r, mu = sin(theta), cos(theta)
            covered = (r * r + d * d - p * p) / max(2 * d * r, 1e-300)
            covered = acos(min(1.0, max(-1.0, covered)))
            ring += _WEIGHT[n] * r * mu * (1 - limb + limb * mu) * covered
        light += 2 / pi * half * ring
    return light / whole


@compiled
def _fill(separation: Floats, ratio: Floats, limb: float, out: Floats) -> None:
    for n in range(separation.size):
        out[n] = _hidden(separation[n], ratio[n], limb)


@compiled
def _fill_slopes(separation: Floats, ratio: Floats, out: Floats) -> None:
    for n in range(separation.size):
        d, p = separation[n], ratio[n]
        out[n, 0] = _hidden(d, p, LINEAR_LIMB)
        below, above = _hidden(abs(d - _STEP), p, LINEAR_LIMB), _hidden(d + _STEP, p, LINEAR_LIMB)
        out[n, 1] = (above - below) / (2 * _STEP)
        less = _hidden(d, p * (1 - _STEP), LINEAR_LIMB)
        more = _hidden(d, p * (1 + _STEP), LINEAR_LIMB)
        out[n, 2] = (more - less) / (2 * _STEP)
