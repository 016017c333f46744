"""The hidden fraction by plain integration over circles around the disc's centre, to any precision."""

from __future__ import annotations

from collections.abc import Callable

import mpmath
from mpmath import mp, mpf


def slow_hidden_fraction(
    intensity: Callable[[mpf], mpf], d: float, p: float, *, digits: int = 20
) -> mpf:
    """Light of a sphere of radius 1 hidden by a dark disc of radius p at distance d.

    Every circle of radius r around the sphere's centre is hidden over the angle 2 kappa(r):
    beta = integral I(r) 2 kappa r dr / integral I(r) 2 pi r dr. Tanh-sinh quadrature does not mind
    the square roots at the ends, nor branch points just beyond them.
    """
    with mp.workdps(digits):
        d, p, one, zero = mpf(d), mpf(p), mpf(1), mpf(0)

        def light(r: mpf) -> mpf:
            return intensity(mpmath.sqrt((1 - r) * (1 + r))) * r

        def crossed(r: mpf) -> mpf:
            # sin^2(kappa/2) = (p-d+r)(p+d-r)/(4dr), from the triangle of sides d, r, p
            share = (p - d + r) * (p + d - r) / (4 * d * r)
            return light(r) * mpmath.asin(mpmath.sqrt(min(one, max(zero, share)))) * 2 / mp.pi

        whole, first, last = min(one, max(zero, p - d)), min(one, abs(d - p)), min(one, d + p)
        hidden = mpmath.quad(light, [zero, whole]) if whole > 0 else zero
        if last > first:
            hidden += mpmath.quad(crossed, [first, last])
        return hidden / mpmath.quad(light, [zero, one])
