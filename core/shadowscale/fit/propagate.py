"""Carrying the covariance of what was fitted to everything that follows from it."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
STEP = 0.02  # of a sigma: small enough to be linear, large enough for round-off


@dataclass(frozen=True, eq=False)
class Spread:
    """Values of many quantities with their joint linear covariance.

    names : of the quantities; values : (n,); slope : (n, m) to the m inputs; covariance : (m, m) of those
    below, above : (n,) shifts of the quantities at the two limits of a curved valley, zero without one;
        the covariance is then what is left across the valley
    """

    names: tuple[str, ...]
    values: Floats
    slope: Floats
    covariance: Floats
    below: Floats
    above: Floats

    @property
    def joint(self) -> Floats:
        """(n, n) covariance of the quantities."""
        along = (self.above - self.below) / 2
        matrix: Floats = self.slope @ self.covariance @ self.slope.T + np.outer(along, along)
        return matrix

    @property
    def across(self) -> Floats:
        """(n,) standard deviations across the valley; without one, of everything."""
        variance = np.einsum("ij,jk,ik->i", self.slope, self.covariance, self.slope)
        deviation: Floats = np.sqrt(np.maximum(variance, 0.0))
        return deviation

    @property
    def limits(self) -> tuple[Floats, Floats]:
        """(n,) 68.3 % limits below and above, both positive."""
        down = np.maximum(0.0, np.maximum(-self.below, -self.above))
        up = np.maximum(0.0, np.maximum(self.below, self.above))
        return np.hypot(self.across, down), np.hypot(self.across, up)


def propagated(
    function: Callable[[Floats], Mapping[str, float]],
    centre: Floats,
    covariance: Floats,
    *,
    bounds: tuple[Floats, Floats],
    ends: tuple[Floats, Floats] | None = None,
) -> Spread:
    """Linear propagation by central differences of a small fraction of each input's sigma.

    Where a bound is nearer than the step, the difference is one-sided. Quantities that are NaN at
    the centre are left out. `ends` are inputs (m,) at the limits of a curved valley, whose direction
    the covariance then leaves out.
    """
    here = function(centre)
    names = tuple(name for name, value in here.items() if np.isfinite(value))
    values = np.array([here[name] for name in names])
    sigma = np.sqrt(np.maximum(np.diag(covariance), 0.0))
    slope = np.zeros((len(names), centre.size))
    lower, upper = bounds
    for column in np.flatnonzero(sigma > 0.0):
        step = STEP * sigma[column]
        above, below = centre.copy(), centre.copy()
        above[column] = min(centre[column] + step, upper[column])
        below[column] = max(centre[column] - step, lower[column])
        width = above[column] - below[column]
        if width > 0.0:
            slope[:, column] = _difference(function, above, below, names) / width
    below, above = (
        np.zeros(len(names)) if ends is None else _difference(function, end, centre, names)
        for end in (ends or (centre, centre))
    )
    return Spread(names, values, slope, covariance, below, above)


def _difference(
    function: Callable[[Floats], Mapping[str, float]],
    above: Floats,
    below: Floats,
    names: Sequence[str],
) -> Floats:
    high, low = function(above), function(below)
    found: Floats = np.array([high.get(name, np.nan) - low.get(name, np.nan) for name in names])
    if "omega" in names:  # an angle: the short way round
        at = names.index("omega")
        found[at] = (found[at] + 180.0) % 360.0 - 180.0
    found[~np.isfinite(found)] = 0.0
    return found
