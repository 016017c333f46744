"""The hidden fraction by plain integration over circles around the disc's centre, to any precision."""

from __future__ import annotations

from collections.abc import Callable

import mpmath
from mpmath import mp, mpf

# Places, as fractions of an interval, between which tanh-sinh quadrature meets no singularity that is
# not at an end or far away compared with the piece.
_PIECES = [mpf(10) ** -k for k in (15, 12, 9, 6, 3, 1)]


def _integral(integrand: Callable[[mpf], mpf], start: mpf, end: mpf) -> mpf:
    if end <= start:
        return mpf(0)
    width = end - start
    left = [start + width * f for f in _PIECES]
    right = [end - width * f for f in reversed(_PIECES)]
    return mpmath.quad(integrand, [start, *left, *right, end])


def slow_hidden_fraction(
    intensity: Callable[[mpf], mpf], d: float, p: float, *, digits: int = 25
) -> mpf:
    """Light of a sphere of radius 1 hidden by a dark disc of radius p at distance d.

    Every circle of radius r around the sphere's centre is hidden over the angle 2 kappa(r):
    beta = integral I(r) 2 kappa r dr / integral I(r) 2 pi r dr.
    """
    with mp.workdps(digits):
        d, p, one = mpf(d), mpf(p), mpf(1)

        def light(r: mpf) -> mpf:
            return intensity(mpmath.sqrt((1 - r) * (1 + r))) * r

        def crossed(r: mpf) -> mpf:
            # sin^2(kappa/2) = (p-d+r)(p+d-r)/(4dr), from the triangle of sides d, r, p
            share = (p - d + r) * (p + d - r) / (4 * d * r)
            return light(r) * mpmath.asin(mpmath.sqrt(min(one, max(mpf(0), share)))) * 2 / mp.pi

        whole = min(one, max(mpf(0), p - d))
        first = min(one, abs(d - p))
        hidden = _integral(light, mpf(0), whole) + _integral(crossed, first, min(one, d + p))
        return hidden / _integral(light, mpf(0), one)
