"""Places from which the full fit may start: every kind of pair that the eclipses do not exclude."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from math import cos, isfinite, log, radians

import numpy as np
from numpy.typing import NDArray

from shadowscale.geometry.classical import (
    Ground,
    described,
    log_brightness,
    placed,
    plane,
    prepared,
    solutions,
)
from shadowscale.geometry.contact_equations import (
    COS2I,
    LOG_BRIGHTNESS,
    LOG_RATIO,
    SUM,
)
from shadowscale.geometry.contacts import EclipseTiming
from shadowscale.geometry.least_squares import THOROUGH, Candidate, solve

Floats = NDArray[np.float64]

NAMES = (
    "radius_sum",
    "radius_ratio",
    "inclination",
    "ecosw",
    "esinw",
    "surface_brightness_ratio",
)
PARTS = (0.1, 0.9, 0.3, 0.7)  # of the range of ln k that partial depths allow
FIRM = 0.02  # of a ratio that is tried
STEEPER = (0.3, 1.5)  # times cos^2 i: depths thinned by third light, or hidden edges
SAME_RATIO, SAME_SUM, SAME_COSINE = 0.1, 0.03, 0.01  # starts nearer than that are one
MOST = 8


def starts(
    primary: EclipseTiming, secondary: EclipseTiming | None, *, period: float
) -> tuple[dict[str, float], ...]:
    """See `shadowscale.geometry.contacts.starting_points`."""
    if not (isfinite(period) and period > 0):
        raise ValueError(f"period: expected a positive number, found {period}")
    ground = prepared(primary, secondary)
    found: list[dict[str, float]] = []
    for unknowns in _places(ground):
        point = {name: described(unknowns)[name] for name in NAMES}
        if not any(_same(point, other) for other in found):
            found.append(point)
    return tuple(found[:MOST])


def _places(ground: Ground) -> Iterator[Floats]:
    """Unknowns of each start, the most likely first."""
    best, others, _ = solutions(ground, steps=THOROUGH)
    for solution in (best, *others):
        yield solution.unknowns
    if ground.flat:
        yield from (guess.unknowns for guess in ground.guesses)
        yield from _as_partial(ground, best.unknowns)
    else:
        yield from _with_ratios(ground, best)
    for factor in STEEPER:
        yield _inclined(ground, best.unknowns, factor)


def _with_ratios(ground: Ground, best: Candidate) -> Iterator[Floats]:
    """Other ratios, each with the orbit and inclination that the same eclipses then ask for."""
    low, high = ground.log_ratios
    for part in PARTS:
        guess = best.guess.believing(LOG_RATIO, low + part * (high - low), FIRM)
        begin = placed(guess, ground.eclipses, ground.equations)
        yield solve(ground.equations, begin, steps=THOROUGH).unknowns


def _as_partial(ground: Ground, best: Floats) -> Iterator[Floats]:
    """The same orbit with stars between the extremes, should the flat part be an illusion."""
    partial = tuple(replace(eclipse, flat=False) for eclipse in ground.eclipses)
    low, high = max(ground.log_ratios[0], log(0.1)), min(ground.log_ratios[1], log(3.0))
    guess = replace(ground.guesses[0], unknowns=best).believing(LOG_RATIO, (low + high) / 2, FIRM)
    yield placed(guess, partial, ground.equations).unknowns


def _inclined(ground: Ground, best: Floats, factor: float) -> Floats:
    """The best solution with another inclination, the durations kept."""
    unknowns = best.copy()
    along, across = plane(unknowns, ground.equations)
    outer = np.flatnonzero(~ground.equations.inner)
    cos2i = min(max(factor * best[COS2I], 1e-4 * factor), 0.9)
    square = (along[outer] + across[outer] * cos2i).mean()
    unknowns[COS2I], unknowns[SUM] = cos2i, min(float(np.sqrt(square)), 0.9)
    unknowns[LOG_BRIGHTNESS] = log_brightness(unknowns, ground.eclipses, ground.equations)
    return unknowns


def _same(one: dict[str, float], other: dict[str, float]) -> bool:
    cosines = [cos(radians(point["inclination"])) for point in (one, other)]
    return (
        abs(log(one["radius_ratio"] / other["radius_ratio"])) < SAME_RATIO
        and abs(one["radius_sum"] / other["radius_sum"] - 1) < SAME_SUM
        and abs(cosines[0] - cosines[1]) < SAME_COSINE
        and abs(one["ecosw"] - other["ecosw"]) + abs(one["esinw"] - other["esinw"]) < 0.02
    )
