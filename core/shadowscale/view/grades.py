"""How well the data hold a quantity: its error beside its value, and what it is correlated with."""

from __future__ import annotations

from math import log10

import numpy as np

from shadowscale.fit.solution import Estimate, Solution
from shadowscale.fit.system import System
from shadowscale.quantities import Quantity, parse_key

WELL, FAIRLY, BADLY, NOT_SAID = "well", "fairly", "badly", ""
WELL_BELOW, BADLY_ABOVE = 0.01, 0.05  # relative errors: 1 % is the usual wish, 5 % is of little use
STRONG = 0.9  # a correlation above this is said to be strong
PER_DEX, PER_MAGNITUDE = 2.302585, 0.921034  # relative error of what a logarithm stands for
_AROUND_ZERO = {
    "third_light": "of all light",
    "ecosw": "of 1",
    "esinw": "of 1",
    "eccentricity": "of 1",
}
_VELOCITIES = ("gamma1", "gamma2", "offset1", "offset2")


def relative_error(
    system: System, quantity: Quantity, estimate: Estimate
) -> tuple[float | None, str]:
    """The larger error over the value; None where there is none.

    Where a value lies around zero, or counts from somewhere else, the error is measured by what is
    natural for it, which the words name: all light, the period, the largest velocity.
    """
    errors = [error for error in (estimate.minus, estimate.plus) if error]
    if not errors:
        return None, ""
    error, name = max(errors), quantity.name
    if quantity.unit == "dex(cm/s2)":
        return error * PER_DEX, ""
    if quantity.unit == "mag":
        return error * PER_MAGNITUDE, ""
    if name in _AROUND_ZERO:
        return error, _AROUND_ZERO[name]
    scale, words = abs(estimate.value), ""
    if name == "epoch":
        scale, words = system.values.get("period", 0.0), "of the period"
    elif name in _VELOCITIES:
        scale = max(system.values.get(each, 0.0) for each in ("K1", "K2"))
        words = "of the larger K"
    return (error / scale if scale > 0 else None), words


def grade(relative: float | None) -> str:
    """`well`, `fairly` or `badly` held by the data; empty where that cannot be said."""
    if relative is None:
        return NOT_SAID
    if relative <= WELL_BELOW:
        return WELL
    return BADLY if relative > BADLY_ABOVE else FAIRLY


def bar(relative: float | None) -> float:
    """Length 0 to 1 of a bar from an error of 0.01 % (short) to the whole value (full)."""
    if relative is None or relative <= 0:
        return 0.0
    return min(1.0, max(0.06, (log10(relative) + 4.0) / 4.0))


def strongest_correlations(solution: Solution) -> dict[str, tuple[float, str]]:
    """Of each quantity the strongest correlation, and with which it is."""
    names, matrix = solution.correlation_names, solution.correlations
    basic = np.array([parse_key(name).quantity.basic for name in names], dtype=bool)
    # A derived quantity is no news to the basic ones that it is made of.
    news = (basic[:, None] == basic) & ~np.eye(len(names), dtype=bool) & np.isfinite(matrix)
    size = np.where(news, np.abs(matrix), -1.0)
    best = size.argmax(axis=1) if names else ()
    return {
        names[row]: (float(matrix[row, at]), names[at])
        for row, at in enumerate(best)
        if news[row, at]
    }
