"""Bounded least squares on normal equations: Levenberg and Marquardt's damping, projected on a box.

The damping follows the quality of each step (Nielsen 1999, IMM-REP-1999-05, from memory).

The objective hands over chi-squared, gradient and Gauss-Newton matrix together (they cost one pass
over the data), so that no Jacobian of all points is ever stored.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

# On the floor of a curved valley (quantities that the data hardly tell apart) steps go on for ever
# and win nothing: PATIENCE of them that win less than STALLED in chi-squared end the search. That is
# a seventh of a sigma from the minimum at most, in the direction that the data do not know anyway.
PATIENCE = 4
STALLED = 0.02
REJECTIONS = 16
BLOCKED = 1.0  # promise of a step that may be left when every trial was rejected


@dataclass(frozen=True, eq=False)
class Normal:
    """Chi-squared at x, with J^T W r (downhill) and J^T W J."""

    chi2: float
    downhill: Floats
    matrix: Floats


@dataclass(frozen=True, eq=False)
class Minimum:
    """Where the search ended."""

    x: Floats
    normal: Normal
    iterations: int
    converged: bool

    @property
    def chi2(self) -> float:
        """Chi-squared at the minimum."""
        return self.normal.chi2


def minimise(
    objective: Callable[[Floats], Normal],
    start: Floats,
    *,
    bounds: tuple[Floats, Floats],
    most: int = 60,
    tolerance: float = 1e-7,
    stalled: float = STALLED,
) -> Minimum:
    """Go downhill from `start` within `bounds`.

    Parameters
    ----------
    objective : callable
        x to `Normal`; chi-squared may be inf where the model cannot be.
    start : (m,) float64
    bounds : (lower, upper), each (m,) float64
    most : int
        Steps at the most.
    tolerance : float
        Ends when a full step promises less than this in chi-squared.
    stalled : float
        Ends as well when PATIENCE steps together win less than this.

    Returns
    -------
    Minimum
        `converged` is False when `most` steps did not suffice.
    """
    lower, upper = bounds
    x = np.clip(start, lower, upper)
    here = objective(x)
    damping, growth = 1e-3, 2.0
    gains: list[float] = []
    for iteration in range(1, most + 1):
        moving = _moving(x, here.downhill, lower, upper)
        promised = _promise(here, moving)
        if promised < tolerance:
            return Minimum(x, here, iteration, True)
        room = lower - x, upper - x
        for _ in range(REJECTIONS):
            step = _step(here, moving, damping, room=room)
            there = objective(np.clip(x + step, lower, upper))
            if there.chi2 < here.chi2:
                break
            damping, growth = max(damping, 1e-8) * growth, growth * 2.0
        else:
            # No step however short goes down: the floor, as far as the numbers tell.
            return Minimum(x, here, iteration, promised < BLOCKED)
        gained = here.chi2 - there.chi2
        expected = float(step @ (2.0 * here.downhill - here.matrix @ step))
        quality = min(gained / expected, 1.0) if expected > 0.0 else 1.0
        damping *= max(0.1, 1.0 - (2.0 * quality - 1.0) ** 3)
        growth = 2.0
        gains.append(gained)
        x, here = np.clip(x + step, lower, upper), there
        if len(gains) >= PATIENCE and sum(gains[-PATIENCE:]) < stalled:
            return Minimum(x, here, iteration, True)
    return Minimum(x, here, most, False)


def _moving(x: Floats, downhill: Floats, lower: Floats, upper: Floats) -> NDArray[np.bool_]:
    """Coordinates that are free to follow the slope."""
    at_lower = (x <= lower) & (downhill < 0.0)
    at_upper = (x >= upper) & (downhill > 0.0)
    return ~(at_lower | at_upper)


def _scaled(normal: Normal, moving: NDArray[np.bool_]) -> tuple[Floats, Floats, Floats]:
    """The moving part of the normal equations with a unit diagonal."""
    matrix = normal.matrix[np.ix_(moving, moving)]
    scale = np.sqrt(np.maximum(np.diag(matrix), 1e-300))
    return matrix / np.outer(scale, scale), normal.downhill[moving] / scale, scale


def _solve(matrix: Floats, right: Floats) -> Floats:
    """Solve a symmetric system; by least squares where it is singular."""
    solved: NDArray[Any]
    try:
        solved = np.linalg.solve(matrix, right)
    except np.linalg.LinAlgError:
        solved = np.linalg.lstsq(matrix, right, rcond=1e-14)[0]
    return np.asarray(solved, dtype=np.float64)


def _step(
    normal: Normal, moving: NDArray[np.bool_], damping: float, *, room: tuple[Floats, Floats]
) -> Floats:
    """The damped step within `room` (down, up); what would leave it stops there, and the rest follows.

    Cutting a step off at the bounds alone would leave the floor of the valley.
    """
    step = np.zeros(moving.size)
    free = moving.copy()
    while free.any():
        right = normal.downhill - normal.matrix[:, ~free] @ step[~free]
        scaled, downhill, scale = _scaled(Normal(normal.chi2, right, normal.matrix), free)
        step[free] = _solve(scaled + damping * np.eye(scale.size), downhill) / scale
        out = free & ((step < room[0]) | (step > room[1]))
        if not out.any():
            break
        step = np.clip(step, *room)
        free &= ~out
    return step


def _promise(normal: Normal, moving: NDArray[np.bool_]) -> float:
    """How much chi-squared an undamped step would win on the quadratic model."""
    if not moving.any():
        return 0.0
    matrix, right, _ = _scaled(normal, moving)
    return float(right @ _solve(matrix + 1e-12 * np.eye(right.size), right))


def covariance(normal: Normal) -> tuple[Floats, NDArray[np.bool_]]:
    """Covariance (m, m) from the normal equations, and which coordinates the data do not hold.

    A coordinate is not held when it is alone in a direction of no curvature.
    """
    scale = np.sqrt(np.maximum(np.diag(normal.matrix), 0.0))
    held = scale > 0.0
    safe = np.where(held, scale, 1.0)
    scaled = normal.matrix / np.outer(safe, safe)
    values, vectors = np.linalg.eigh(scaled)
    small = values < 1e-13 * max(values[-1], 1e-300)
    inverse = (vectors / np.where(small, 1e-13 * values[-1], values)) @ vectors.T
    loose = ~held | ((vectors[:, small] ** 2).sum(axis=1) > 0.3)
    return inverse / np.outer(safe, safe), loose
