"""How far the ratio of the radii may go: its likelihood profile, where the valley is curved.

In partial eclipses k, inclination, limb darkening and third light move together along a valley that
is far from straight, and the curvature at the minimum tells too little (or too much). So k is held at
values on both sides, the rest fitted again, until chi-squared is one above the minimum; the points
found there give the 68.3 % limits along the valley (Wilks 1938; Pawitan 2001, In All Likelihood).
Near the inclination where the smaller disc just fits into the larger there are two valleys, with and
without a flat bottom, each hidden from the other by the kink between them: both are followed.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from math import acos, cos, degrees, log, radians

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.alternatives import Branch
from shadowscale.fit.least_squares import covariance
from shadowscale.fit.problem import Fitted
from shadowscale.fit.system import System

Floats = NDArray[np.float64]
NAME = "radius_ratio"
PLATEAU = 3.3  # in chi-squared: a minimum above it holds less than 16 % of the probability
FIRST = 0.7  # of the linear sigma: where the profile is tried first
LARGEST_FIRST = 0.3  # and at most this share of k itself
MOST_TRIES = 9
PROBE, MOST_PROBES = 1.5, 8  # factors of k that a plateau is followed by
TOLD = 2.0  # rise of chi-squared from which on the data tell something
NARROW = 0.4  # in the root of the rise: near enough to interpolate
NEAR_TANGENCY = 1.0  # in the logarithm of cos i
ACROSS = 1.4  # factor of cos i of the tangency at which the other valley is looked for
STRAIGHT = 0.15  # relative departure of both limits from the linear sigma that is left alone


@dataclass(frozen=True, eq=False)
class Valley:
    """Coordinates (m,) of the fit at both 68.3 % limits of k, and at the best point met on the way."""

    below: Floats
    above: Floats
    best: Fitted


def valley(best: Fitted, fit: Callable[[System], Fitted]) -> Valley | None:
    """Profile k around a fit; None where k is not free or the linear errors serve.

    `fit` fits a system from where it stands. A better minimum met on the way is handed back.
    """
    if NAME not in best.system.free:
        return None
    at = best.objective.vector.index[NAME]
    matrix, _ = covariance(best.minimum.normal)
    sigma = float(np.sqrt(max(matrix[at, at], 0.0)))
    if not np.isfinite(sigma) or sigma <= 0.0:
        return None
    direction = matrix[:, at] / sigma
    below, low = _limit(best, fit, direction=-direction, at=at)
    above, high = _limit(best, fit, direction=direction, at=at)
    lowest = min((best, low, high), key=lambda each: each.chi2)
    straight = all(abs(place.step - 1.0) < STRAIGHT for place in (below, above))
    if straight and lowest is best:
        return None
    return Valley(below.x, above.x, lowest)


def widened(
    best: Fitted, ends: tuple[Floats, Floats] | None, branches: Sequence[Branch]
) -> tuple[Floats, Floats] | None:
    """The limits of k, reaching out to other minima that the data hardly tell from the best.

    A minimum that holds a sixth of the probability or more, exp(-delta/2) times that of the best, lies
    within the central 68.3 %, wherever the profile around the best first rises by one. `ends` itself is handed back where there are none such.
    """
    if NAME not in best.system.free:
        return ends
    at = best.objective.vector.index[NAME]
    equal = [
        branch.fitted.minimum.x
        for branch in branches
        if branch.delta_chi2 < PLATEAU and branch.fitted.system.free == best.system.free
    ]
    if not equal:
        return ends
    below, above = ends or _linear_ends(best, at)
    below = min([below, *equal], key=lambda x: float(x[at]))
    above = max([above, *equal], key=lambda x: float(x[at]))
    return below, above


def _linear_ends(best: Fitted, at: int) -> tuple[Floats, Floats]:
    matrix, _ = covariance(best.minimum.normal)
    shift = matrix[:, at] / np.sqrt(matrix[at, at])
    return best.minimum.x - shift, best.minimum.x + shift


@dataclass(frozen=True, eq=False)
class _Place:
    """A point of the profile: coordinates, linear sigmas from the minimum, root of the rise."""

    x: Floats
    step: float
    root: float


def _limit(
    best: Fitted, fit: Callable[[System], Fitted], *, direction: Floats, at: int
) -> tuple[_Place, Fitted]:
    """The point where chi-squared is one above the best, and the lowest fit met on the way."""
    lower, upper = (float(bound[at]) for bound in best.objective.vector.bounds)
    lowest, inner, outer = best, _Place(best.minimum.x, 0.0, 0.0), None
    step = min(FIRST, LARGEST_FIRST * best.minimum.x[at] / abs(float(direction[at])))
    for _ in range(MOST_TRIES):
        wanted = best.minimum.x[at] + step * direction[at]
        if not lower < wanted < upper:
            step = (inner.step + step) / 2
            continue
        held = _held(best, inner.x + (step - inner.step) * direction, at=at, wanted=wanted)
        fitted = _lower(held, fit)
        rise = fitted.chi2 - best.chi2
        if rise < lowest.chi2 - best.chi2:
            lowest = fitted
        x = np.insert(fitted.minimum.x, at, wanted)
        place = _Place(x, step, np.sqrt(max(rise, 0.0)))
        inner, outer = (place, outer) if rise < 1.0 else (inner, place)
        if outer is not None and outer.root - inner.root < NARROW:
            break
        step = _next_step(inner, outer)
    if outer is None:
        return inner, lowest
    return _beyond(_between(inner, outer), best, fit, sign=np.sign(direction[at]), at=at), lowest


def _beyond(
    place: _Place, best: Fitted, fit: Callable[[System], Fitted], *, sign: float, at: int
) -> _Place:
    """Farther out where chi-squared does not go on rising: a plateau below two tells nothing."""
    lower, upper = (float(bound[at]) for bound in best.objective.vector.bounds)
    for _ in range(MOST_PROBES):
        wanted = float(place.x[at]) * PROBE**sign
        if not lower < wanted < upper:
            break
        fitted = _lower(_held(best, place.x, at=at, wanted=wanted), fit)
        rise = fitted.chi2 - best.chi2
        if rise > TOLD:
            break
        place = _Place(np.insert(fitted.minimum.x, at, wanted), np.inf, np.sqrt(max(rise, 0.0)))
    return place


def _next_step(inner: _Place, outer: _Place | None) -> float:
    """Farther out while the rise is below one; then between, nearer the inner end where it rises steeply."""
    if outer is None:
        return inner.step * min(3.0, max(1.3, 1.15 / max(inner.root, 0.2)))
    share = (1.0 - inner.root) / (outer.root - inner.root)
    return inner.step + min(max(share, 0.25), 0.75) * (outer.step - inner.step)


def _held(best: Fitted, start: Floats, *, at: int, wanted: float) -> System:
    """The system at `start`, its k held at `wanted`."""
    vector = best.objective.vector
    start = start.copy()
    start[at] = wanted
    values = vector.unpack(np.clip(start, *vector.bounds))
    free = tuple(name for name in best.system.free if name != NAME)
    return replace(best.system.with_values(values), free=free)


def _lower(held: System, fit: Callable[[System], Fitted]) -> Fitted:
    """The fit from where `held` stands, or from beyond the inner tangency if that is lower."""
    fitted = fit(held)
    if "inclination" not in held.free:
        return fitted
    values = fitted.system.values
    ratio, ecc2 = values["radius_ratio"], values["ecosw"] ** 2 + values["esinw"] ** 2
    distance = (1 - ecc2) / (1 + values["esinw"])
    tangency = values["radius_sum"] * abs(1 - ratio) / (1 + ratio) / distance
    cosine = cos(radians(values["inclination"]))
    if not (tangency > 0.0 and abs(log(max(cosine, 1e-9) / tangency)) < NEAR_TANGENCY):
        return fitted
    beyond = tangency * (ACROSS if cosine < tangency else 1 / ACROSS)
    if beyond >= 1.0:
        return fitted
    other = fit(fitted.system.with_values({"inclination": degrees(acos(beyond))}))
    return min(fitted, other, key=lambda each: each.chi2)


def _between(inner: _Place, outer: _Place) -> _Place:
    """Interpolate to a rise of one in its root, which is nearly linear in the distance."""
    share = (1.0 - inner.root) / (outer.root - inner.root)
    x = inner.x + share * (outer.x - inner.x)
    return _Place(x, inner.step + share * (outer.step - inner.step), 1.0)
