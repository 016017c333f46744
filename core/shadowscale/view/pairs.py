"""Two quantities and their common uncertainty: the ellipse, and which way it is weak."""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.fit.solution import Solution
from shadowscale.view.written import symbol

ONE_SIGMA_JOINT = sqrt(2.2957489)  # radius that holds 68.3 % of two Gaussian quantities together
MARGINAL = 1.0  # radius whose shadows on the axes are the quoted errors
SAMPLES = 121


@dataclass(frozen=True, eq=False)
class Pair:
    """The picture of two quantities.

    inner, outer : (n, 2) float64; the ellipse whose shadows are the quoted errors, and the one that
    holds 68.3 % of both together
    weak : (2, 2) float64; ends of the long axis
    """

    names: tuple[str, str]
    centre: tuple[float, float]
    errors: tuple[float, float]
    correlation: float
    inner: Floats
    outer: Floats
    weak: Floats
    words: str


def choices(solution: Solution) -> tuple[str, ...]:
    """The quantities that can be paired: those of the correlation matrix that have an error."""
    return tuple(
        name
        for name in solution.correlation_names
        if name in solution.estimates and solution.estimates[name].plus
    )


def most_correlated(solution: Solution) -> tuple[str, str] | None:
    """The pair of free quantities with the strongest correlation; None with fewer than two."""
    names = [name for name in choices(solution) if name in solution.system.free]
    if len(names) < 2:
        return None
    rows = [solution.correlation_names.index(name) for name in names]
    part = np.abs(np.nan_to_num(solution.correlations[np.ix_(rows, rows)]))
    np.fill_diagonal(part, -1.0)
    first, second = np.unravel_index(int(np.argmax(part)), part.shape)
    return names[min(first, second)], names[max(first, second)]


def pair(solution: Solution, first: str, second: str) -> Pair:
    """The common uncertainty of two quantities; KeyError if one has no error."""
    names = solution.correlation_names
    estimates = [solution.estimates[name] for name in (first, second)]
    errors = tuple(((e.plus or 0.0) + (e.minus or 0.0)) / 2 for e in estimates)
    rho = float(solution.correlations[names.index(first), names.index(second)])
    rho = float(np.clip(np.nan_to_num(rho), -0.999999, 0.999999))
    circle = np.linspace(0, 2 * np.pi, SAMPLES)
    unit = np.column_stack(
        (np.cos(circle), rho * np.cos(circle) + sqrt(1 - rho**2) * np.sin(circle))
    )
    centre = (estimates[0].value, estimates[1].value)
    shape = unit * np.array(errors)
    long_axis = (
        np.array([1.0, 1.0 if rho >= 0 else -1.0]) * sqrt((1 + abs(rho)) / 2) * np.array(errors)
    )
    return Pair(
        (first, second),
        centre,
        (errors[0], errors[1]),
        rho,
        centre + MARGINAL * shape,
        centre + ONE_SIGMA_JOINT * shape,
        np.vstack((centre - long_axis, centre + long_axis)),
        _words(first, second, rho),
    )


def _words(first: str, second: str, rho: float) -> str:
    a, b = symbol(first), symbol(second)
    number = f"{rho:+.2f}".replace("-", "\N{MINUS SIGN}")
    if abs(rho) < 0.3:
        return f"{a} and {b} hardly know each other (correlation {number})."
    together = "raised together" if rho > 0 else "one raised, the other lowered"
    gain = 1 / sqrt(1 - rho**2)
    return (
        f"Weak direction: {a} and {b} {together} (correlation {number}). "
        f"Knowing one beforehand would shrink the other's error {gain:.1f} times."
    )
