"""Limits that chance passes with a given probability, of a Gaussian and of chi-squared.

Written out here since scipy.special, which has them, takes longer to import than all of a fit.
"""

from __future__ import annotations

from math import erfc, exp, inf, lgamma, log, pi, sqrt

EXACT = 1e-14
MOST = 100_000  # terms


def gaussian_limit(chance: float) -> float:
    """Sigmas that a Gaussian error exceeds, to either side, with a probability below one."""
    x = sqrt(-2.0 * log(chance))  # a little above the answer
    for _ in range(60):
        step = (erfc(x / sqrt(2.0)) - chance) * sqrt(pi / 2.0) * exp(0.5 * x * x)
        x += step
        if abs(step) <= EXACT * x:
            break
    return x


def chi2_limit(freedom: float, chance: float) -> float:
    """Chi-squared that `freedom` degrees of freedom exceed with a probability below one half.

    From the cube-root approximation (Wilson & Hilferty 1931, PNAS 17, 684) by Newton's steps on the
    logarithm of the probability.
    """
    shape, spread = freedom / 2.0, 2.0 / (9.0 * freedom)
    root = 1.0 - spread + gaussian_limit(2.0 * chance) * sqrt(spread)
    x = shape * root**3
    for _ in range(60):
        tail = gamma_tail(shape, x)
        step = log(tail / chance) * tail / exp((shape - 1.0) * log(x) - x - lgamma(shape))
        x += step
        if abs(step) <= EXACT * x:
            break
    return 2.0 * x


def gamma_tail(shape: float, x: float) -> float:
    """The regularised incomplete gamma function Q(shape, x), x > 0.

    By its series below the mean, by its continued fraction above (Abramowitz & Stegun 1964, 6.5.29 and
    6.5.31; the fraction by Lentz 1976, Applied Optics 15, 668).
    """
    front = exp(shape * log(x) - x - lgamma(shape))
    if x < shape + 1.0:
        term = total = 1.0 / shape
        for n in range(1, MOST):
            term *= x / (shape + n)
            total += term
            if term <= EXACT * total:
                break
        return 1.0 - front * total
    b = x + 1.0 - shape
    c, d = inf, 1.0 / b
    value = d
    for n in range(1, MOST):
        a = n * (shape - n)
        b += 2.0
        d = 1.0 / (a * d + b)
        c = b + a / c
        value *= c * d
        if abs(c * d - 1.0) <= EXACT:
            break
    return front * value
