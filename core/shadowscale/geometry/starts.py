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

Floats = NDArray[np.float64]

NAMES = (
    "radius_sum",
    "radius_ratio",
    "inclination",
    "ecosw",
    "esinw",
    "surface_brightness_ratio",
)
PARTS = (0.5, 0.15, 0.85)  # of the range of ln k that partial depths allow
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
    best, others, _ = solutions(ground)
    for solution in (best, *others):
        yield solution.unknowns
    yield from (guess.unknowns for guess in ground.guesses)
    yield from _with_ratios(ground, best.unknowns)
    for factor in STEEPER:
        yield _inclined(ground, best.unknowns, factor)


def _with_ratios(ground: Ground, best: Floats) -> Iterator[Floats]:
    """The orbit of the best solution with other ratios, read as partial eclipses."""
    partial = tuple(replace(eclipse, flat=False) for eclipse in ground.eclipses)
    low, high = (max(ground.log_ratios[0], -2.3), min(ground.log_ratios[1], 1.1))
    guess = replace(ground.guesses[0], unknowns=best)
    for part in PARTS:
        log_ratio = low + part * (high - low)
        yield placed(guess.believing(LOG_RATIO, log_ratio, 1.0), partial, ground.equations).unknowns


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
