"""How far the ratio of the radii may go: its likelihood profile, where the valley is curved.

In partial eclipses k, inclination, limb darkening and third light move together along a valley that
is far from straight, and the curvature at the minimum tells too little (or too much). So k is held at
values on both sides and the rest fitted again (profile likelihood: Pawitan 2001, In All Likelihood):
until chi-squared is one above the minimum (Wilks 1938), farther where it rises slowly from there on,
and over other minima. The limits leave 15.9 % of the likelihood beyond on either side, integrated over
ln k, to which it is all one which star is called the first.
Near the inclination where the smaller disc just fits into the larger there are two valleys, with and
without a flat bottom, each hidden from the other by the kink between them: both are followed.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from itertools import pairwise
from math import acos, cos, degrees, exp, log, pi, radians, sqrt
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.least_squares import covariance
from shadowscale.fit.problem import Fitted
from shadowscale.fit.system import System

Floats = NDArray[np.float64]
Piece = tuple[float, Callable[[float], Floats]]
NAME = "radius_ratio"
FIRST = 0.7  # of the linear sigma: where the profile is tried first
LARGEST_FIRST = 0.3  # and at most this share of k itself
MOST_TRIES = 9
FARTHER, MOST_FARTHER = 1.6, 9  # how the tail is followed: each distance so many times the last
STEEP = 1.6  # root of the rise at twice the distance of the limit; 2 in a parabola: no tail
ENOUGH, TOO_FAR = (
    2.6,
    4.0,
)  # root of the rise where a tail is left; where it went too far to tell its share
LEAST = 0.3  # share of the first piece at which a limit stands at the least
BEYOND, MOST_BEYOND = 0.159, 0.25  # share of the likelihood beyond a limit, as it should and may be
NARROW = 0.4  # in the root of the rise: near enough to interpolate
NEAR_TANGENCY = 1.0  # in the logarithm of cos i
ACROSS = 1.4  # factor of cos i of the tangency at which the other valley is looked for
STRAIGHT = 0.15  # relative departure of both limits from the linear sigma that is left alone


@dataclass(frozen=True, eq=False)
class Valley:
    """Coordinates (m,) of the fit at both 68.3 % limits of k, and at the best point met on the way.

    tail : whether a limit reaches out over a slow rise or to another minimum
    """

    below: Floats
    above: Floats
    best: Fitted
    tail: bool


def valley(
    best: Fitted, fit: Callable[[System], Fitted], branches: Sequence[Fitted] = ()
) -> Valley | None:
    """Profile k around a fit; None where k is not free or the linear errors serve.

    `fit` fits a system from where it stands. A better minimum met on the way is handed back.
    `branches` are other minima under the same weights.
    """
    if NAME not in best.system.free:
        return None
    at = best.objective.vector.index[NAME]
    sigma, direction = _linear(best, at)
    if not np.isfinite(sigma) or sigma <= 0.0:
        return None
    below = _side(best, fit, direction=-direction, at=at)
    above = _side(best, fit, direction=direction, at=at)
    lowest = min((best, below.lowest, above.lowest), key=lambda each: each.chi2)
    others = [each for each in branches if each.system.free == best.system.free]
    pieces = tuple(_pieces(best, side, others, at=at) for side in (below, above))
    total = sum(mass for each in pieces for mass, _ in each)
    tail = any(sum(mass for mass, _ in each[1:]) > MOST_BEYOND * total for each in pieces)
    straight = all(abs(side.limit.step - 1.0) < STRAIGHT for side in (below, above))
    if straight and not tail and lowest is best:
        return None
    return Valley(_end(pieces[0], total), _end(pieces[1], total), lowest, tail)


def _linear(fitted: Fitted, at: int) -> tuple[float, Floats]:
    """Sigma of k, and how all coordinates go with it, one sigma's way."""
    matrix, _ = covariance(fitted.minimum.normal)
    sigma = float(np.sqrt(max(matrix[at, at], 0.0)))
    return sigma, matrix[:, at] / sigma if sigma > 0.0 else matrix[:, at]


@dataclass(frozen=True, eq=False)
class _Place:
    """A point of the profile: coordinates, linear sigmas from the minimum, root of the rise."""

    x: Floats
    step: float
    root: float


@dataclass(frozen=True, eq=False)
class _Side:
    """Where chi-squared is one above the best, places farther out, and the lowest fit met on the way."""

    limit: _Place
    tail: tuple[_Place, ...]
    lowest: Fitted


def _side(best: Fitted, fit: Callable[[System], Fitted], *, direction: Floats, at: int) -> _Side:
    """Follow the profile to one side."""
    lower, upper = (float(bound[at]) for bound in best.objective.vector.bounds)
    lowest, inner, outer = best, _Place(best.minimum.x, 0.0, 0.0), None

    def place(start: _Place, step: float) -> _Place:
        nonlocal lowest
        wanted = best.minimum.x[at] + step * direction[at]
        held = _held(best, start.x + (step - start.step) * direction, at=at, wanted=wanted)
        fitted = _lower(held, fit)
        lowest = min(lowest, fitted, key=lambda each: each.chi2)
        rise = max(fitted.chi2 - best.chi2, 0.0)
        return _Place(np.insert(fitted.minimum.x, at, wanted), step, np.sqrt(rise))

    def inside(step: float) -> bool:
        return bool(lower < best.minimum.x[at] + step * direction[at] < upper)

    step = min(FIRST, LARGEST_FIRST * best.minimum.x[at] / abs(float(direction[at])))
    for _ in range(MOST_TRIES):
        if not inside(step):
            step = (inner.step + step) / 2
            continue
        found = place(inner, step)
        inner, outer = (found, outer) if found.root < 1.0 else (inner, found)
        if outer is not None and outer.root - inner.root < NARROW:
            break
        step = _next_step(inner, outer)
    if outer is None:
        return _Side(inner, (), lowest)
    limit = _between(inner, outer)
    tail: list[_Place] = []
    step = 2.0 * limit.step
    for _ in range(MOST_FARTHER):
        if not inside(step):
            break
        found = place(tail[-1] if tail else limit, step)
        if not tail and found.root > TOO_FAR:
            step = (limit.step + step) / 2
            continue
        tail.append(found)
        if tail[0].root > STEEP or found.root > ENOUGH:
            break
        step *= FARTHER
    return _Side(limit, tuple(tail), lowest)


def _end(pieces: Sequence[Piece], total: float) -> Floats:
    """Coordinates beyond which 15.9 % of the likelihood lie, to one side."""
    wanted = BEYOND * total
    for mass, where in reversed(pieces):
        if mass >= wanted:
            return where(1.0 - wanted / mass)
        wanted -= mass
    return pieces[0][1](LEAST)


def _pieces(best: Fitted, side: _Side, branches: Sequence[Fitted], *, at: int) -> list[Piece]:
    """One side, going outward: likelihood, and coordinates where a share of it is passed.

    The first piece ends where chi-squared is one above the best.
    """
    places = _continued([_Place(best.minimum.x, 0.0, 0.0), side.limit, *side.tail], at)
    sign = np.sign(side.limit.x[at] - best.minimum.x[at])
    pieces: list[Piece] = [
        (_mass(inner, outer, at), partial(_passed, inner, outer))
        for inner, outer in pairwise(places)
    ]
    reached = sign * float(places[-1].x[at])
    beyond = [each for each in branches if sign * each.minimum.x[at] > reached]
    for each in sorted(beyond, key=lambda each: sign * each.minimum.x[at]):
        sigma, _ = _linear(each, at)
        width = sigma / float(each.minimum.x[at])
        mass = width * sqrt(2 * pi) * exp(-max(each.chi2 - best.chi2, 0.0) / 2)
        pieces.append((mass, partial(_at_branch, each)))
    return pieces


def _at_branch(branch: Fitted, _share: float) -> Floats:
    return branch.minimum.x


def _continued(places: list[_Place], at: int) -> list[_Place]:
    """The places, and one where chi-squared has risen enough if it goes on as between the last two."""
    inner, outer = places[-2:]
    slope = (outer.root - inner.root) / log(outer.x[at] / inner.x[at])
    if outer.root >= ENOUGH or abs(slope) < 1e-6 or outer.root <= inner.root:
        return places
    x = outer.x.copy()
    x[at] *= exp((ENOUGH - outer.root) / slope)
    return [*places, _Place(x, np.inf, ENOUGH)]


def _mass(inner: _Place, outer: _Place, at: int) -> float:
    """Likelihood between two places, the root of the rise taken as linear in ln k."""
    width = abs(log(outer.x[at] / inner.x[at]))
    rise = outer.root - inner.root
    if abs(rise) < 1e-6:
        return width * exp(-(inner.root**2) / 2)
    normal = NormalDist()
    share = (normal.cdf(outer.root) - normal.cdf(inner.root)) / rise
    return float(width * sqrt(2 * pi) * share)


def _passed(inner: _Place, outer: _Place, share: float) -> Floats:
    """Coordinates between two places where that share of the likelihood between them is passed."""
    rise, way = outer.root - inner.root, share
    if abs(rise) > 1e-6:
        normal = NormalDist()
        first, last = normal.cdf(inner.root), normal.cdf(outer.root)
        way = (normal.inv_cdf(first + share * (last - first)) - inner.root) / rise
    return inner.x + way * (outer.x - inner.x)


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
