"""A small damped least-squares solver for the contact equations: bounds, priors, covariance."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import hypot, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.geometry.contact_equations import (
    COS2I,
    ECOSW,
    ESINW,
    LOG_RATIO,
    SUM,
    UNKNOWNS,
    Equations,
)

Floats = NDArray[np.float64]

#                 shift  ecosw  esinw  cos2i  r1+r2  ln k  ln J   l3
LOWEST = np.array([-0.1, -0.93, -0.93, 0.0, 1e-4, -5.0, -9.0, -0.3])
HIGHEST = np.array([0.1, 0.93, 0.93, 0.95, 0.95, 5.0, 9.0, 0.95])
MOST_ECCENTRIC = 0.93
SMALLEST_LOG_RATIO = 1e-3  # k = 1 is a corner of |1-k|: a solution stays on its side
LEAST_COSINE = 0.02  # of r1+r2: from a central eclipse the walk could not leave
# Steps with the first weights, then with those of the solution.
QUICK, THOROUGH = (16, 6), (50, 12)
CONVERGED = 1e-4  # what a step must still promise in chi2


@dataclass(frozen=True, eq=False)
class Guess:
    """Where to start, what may move, and what is believed beforehand (sigma inf: nothing)."""

    unknowns: Floats
    free: NDArray[np.bool_]
    centre: Floats
    sigma: Floats

    def believing(self, unknown: int, centre: float, sigma: float) -> Guess:
        """The same start there, with a prior on one unknown."""
        unknowns, centres, sigmas = self.unknowns.copy(), self.centre.copy(), self.sigma.copy()
        unknowns[unknown] = centres[unknown] = centre
        sigmas[unknown] = sigma
        free = self.free.copy()
        free[unknown] = True
        return replace(self, unknowns=unknowns, free=free, centre=centres, sigma=sigmas)


@dataclass(frozen=True, eq=False)
class Candidate:
    """One solution of the equations.

    chi2 : of the data alone; gain : (8, 5e) how the unknowns answer to the timings.
    """

    unknowns: Floats
    covariance: Floats
    gain: Floats
    chi2: float
    guess: Guess


def solve(equations: Equations, guess: Guess, *, steps: tuple[int, ...] = QUICK) -> Candidate:
    """Least squares from a guess; ends at the nearest physical solution."""
    side = np.copysign(1.0, guess.unknowns[LOG_RATIO])
    here = _bounded(guess.unknowns, side)
    for count in steps:
        answer, covariance = equations.weights(here)
        root = _whitener(covariance)
        here = _descend(equations, guess, here, root, count)
    value, slopes = equations.evaluate(here)
    whitened = root @ value
    inverse = np.zeros((UNKNOWNS, UNKNOWNS))
    inverse[np.ix_(guess.free, guess.free)] = np.linalg.inv(_normal(root @ slopes, guess))
    gain = -inverse @ (root @ slopes).T @ (root @ answer)
    return Candidate(here, inverse, gain, float(whitened @ whitened), guess)


def _descend(equations: Equations, guess: Guess, start: Floats, root: Floats, steps: int) -> Floats:
    """Levenberg-Marquardt with the weights held.

    It walks in cos i, not cos^2 i: depths of nearly equal stars have a corner at cos^2 i = 0, and the
    sign of cos i is free, so there is no bound to run into.
    """
    side = np.copysign(1.0, guess.unknowns[LOG_RATIO])
    here, damping = start, 1e-3
    value, slopes = equations.evaluate(here)
    cost = _cost(root @ value, here, guess)
    for _ in range(steps):
        cosine = max(sqrt(here[COS2I]), LEAST_COSINE * here[SUM])
        slopes[:, COS2I] *= 2 * cosine
        step, promised = _step(root @ value, root @ slopes, here, guess, damping)
        if promised <= CONVERGED * (1 + 0.01 * cost):
            break
        there = here + step
        there[COS2I] = (cosine + step[COS2I]) ** 2
        there = _bounded(there, side)
        new_value, new_slopes = equations.evaluate(there)
        new_cost = _cost(root @ new_value, there, guess)
        if new_cost < cost:
            here, value, slopes, cost = there, new_value, new_slopes, new_cost
            damping = max(damping / 10, 1e-9)
        else:
            slopes[:, COS2I] /= 2 * cosine
            damping *= 8
    return here


def _step(
    whitened: Floats, slopes: Floats, here: Floats, guess: Guess, damping: float
) -> tuple[Floats, float]:
    """A damped step and the fall of chi2 it promises."""
    gradient = slopes.T @ whitened + (here - guess.centre) / guess.sigma**2
    normal = _normal(slopes, guess)
    normal.flat[:: normal.shape[0] + 1] *= 1 + damping
    step = np.zeros(UNKNOWNS)
    step[guess.free] = -np.linalg.solve(normal, gradient[guess.free])
    return step, -float(gradient @ step)


def _normal(slopes: Floats, guess: Guess) -> Floats:
    """Normal matrix of the free unknowns, kept from being singular."""
    reduced = slopes[:, guess.free]
    normal = np.asarray(reduced.T @ reduced)
    diagonal = normal.flat[:: normal.shape[0] + 1]
    normal.flat[:: normal.shape[0] + 1] = (
        diagonal * (1 + 1e-10) + guess.sigma[guess.free] ** -2.0 + 1e-6
    )
    return normal


def _cost(whitened: Floats, here: Floats, guess: Guess) -> float:
    belief = (here - guess.centre) / guess.sigma
    return float(whitened @ whitened + belief @ belief)


def _bounded(unknowns: Floats, side: float) -> Floats:
    """The nearest values that an orbit of two stars can have, with k on its side of 1."""
    inside = np.clip(unknowns, LOWEST, HIGHEST)
    e = hypot(inside[ECOSW], inside[ESINW])
    if e > MOST_ECCENTRIC:
        inside[[ECOSW, ESINW]] *= MOST_ECCENTRIC / e
    inside[LOG_RATIO] = side * max(side * inside[LOG_RATIO], SMALLEST_LOG_RATIO)
    return inside


def _whitener(covariance: Floats) -> Floats:
    """W with W C W^T = 1; directions without any error get a little."""
    size, turn = np.linalg.eigh(covariance)
    return np.asarray((turn / np.sqrt(np.maximum(size, 1e-8 * size.max()))).T, dtype=np.float64)
