"""The period against its double and its half: the eclipses decide.

On twice the period each eclipse falls apart into those of even and of odd cycles. If they differ, twice the period is right.
If they are alike, and only one eclipse a cycle is seen, two equal stars on twice the period would look the same;
then the depth tells which is likelier.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np

from shadowscale.errors import NoSolutionError
from shadowscale.timing.fold import Dip, find_dips, phases
from shadowscale.timing.light_points import LightPoints
from shadowscale.timing.refine import Refined, dip_near, refined
from shadowscale.timing.weigh import Weighed, as_good
from shadowscale.timing.window_fit import SeenEclipse

DIFFER = 5.0  # [sigma] of a difference between the two minima
# What a measurement may be off: relative to depth or duration, and the same for a single point in the eclipse.
DEPTH_FLOOR, DURATION_FLOOR, MIDDLE_FLOOR = (0.01, 0.4), (0.04, 1.2), (0.01, 0.3)
FAR = 3e-3  # relative difference of two periods that are not the same
WIDEST_PAIR = 0.6  # r1 + r2: two lobes that touch have 0.76 (Eggleton 1983, ApJ 268, 368, q = 1)
DARK_POWER = 2.5  # depth^2.5 is about the brightness ratio of a companion of main sequence


@dataclass(frozen=True, eq=False)
class Settled:
    """The period chosen, why, the other possible one, and the numbers of the decision."""

    refined: Refined
    words: str
    other: float | None = None
    numbers: Mapping[str, float] = field(default_factory=dict)


def settled(points: LightPoints, results: list[Weighed]) -> Settled:
    """Choose among the weighed candidates, and then between a period, its double and its half."""
    good = as_good(results)
    single = good[0].refined
    _check_repeats(single)
    chosen = _settled_one(points, single)
    others = [
        each.refined.period
        for each in good[1:]
        if abs(each.refined.period / chosen.refined.period - 1) > FAR
    ]
    if others and chosen.other is None:
        words = f"{chosen.words}; {others[0]:.6g} d fits the observed nights as well"
        return replace(chosen, words=words, other=others[0])
    return chosen


def _settled_one(points: LightPoints, single: Refined) -> Settled:
    double = _doubled(points, single)
    if double is not None:
        differing = _differences(double.eclipses)
        name = max(differing, key=lambda key: differing[key])
        if differing[name] > DIFFER:
            words = (
                f"even and odd minima differ in {name} by {differing[name]:.1f} sigma, so the period "
                "is twice that of the dips"
            )
            return Settled(double, words, None, differing)
    if len(single.eclipses) == 1:
        return _of_one_minimum(single, double)
    numbers = _differences(single.eclipses[:2])
    if max(numbers.values()) > DIFFER:
        return _of_two_minima(single, double, numbers)
    # Equal minima half a cycle apart: the question is that of one minimum on half the period.
    half = _halved(points, single)
    if half is None or half.eclipses[0].signal < single.eclipses[0].signal:
        return _of_two_minima(single, double, numbers)
    return _of_one_minimum(half, single)


def _doubled(points: LightPoints, single: Refined) -> Refined | None:
    """The deeper eclipse on twice the period, as two; None if only even or odd ones were observed."""
    timing = single.eclipses[0].fit.timing
    width = timing.duration / 1.3
    dip = Dip(timing.middle, width, timing.depth, single.eclipses[0].signal ** 2)
    pair = (
        dip_near(timing.middle / 2, width / 2, dip),
        dip_near(timing.middle / 2 + 0.5, width / 2, dip),
    )
    cycles = (points.time - single.origin) / (2 * single.period)
    for each in pair:
        away = np.abs((cycles - each.middle + 0.5) % 1 - 0.5)
        if np.count_nonzero(away < 0.3 * each.width) < 4:
            return None
    found = refined(points, 2 * single.period, single.origin, pair)
    if found is None or len(found.eclipses) < 2:
        return None
    return found if all(one.signal > 2 for one in found.eclipses) else None


def _differences(pair: tuple[SeenEclipse, ...]) -> dict[str, float]:
    """How far two minima differ [sigma], with a floor for what a measurement may be off.

    The floor grows where few points trace an eclipse: then it matters where on the branches they fall.
    """
    first, second = (one.fit.timing for one in pair)
    errors = [np.sqrt(np.diag(one.covariance)) for one in (first, second)]
    few = 1 / max(min(_points_inside(one) for one in pair), 1)
    apart = abs((first.middle - second.middle) % 1 - 0.5)
    depth = (first.depth + second.depth) / 2
    duration = (first.duration + second.duration) / 2

    def sigmas(difference: float, place: int, unit: float, floors: tuple[float, float]) -> float:
        floor = (floors[0] + floors[1] * few) * unit
        return float(difference / np.hypot(np.hypot(errors[0][place], errors[1][place]), floor))

    return {
        "depth": sigmas(abs(first.depth - second.depth), 4, depth, DEPTH_FLOOR),
        "duration": sigmas(abs(first.duration - second.duration), 1, duration, DURATION_FLOOR),
        "spacing": sigmas(apart, 0, duration, MIDDLE_FLOOR),
    }


def _points_inside(one: SeenEclipse) -> int:
    """Points between first and fourth contact in the window."""
    width = one.window[1] - one.window[0]
    return int(one.inside.sum() * min(one.fit.duration / width, 1.0))


def _check_repeats(found: Refined) -> None:
    if max(found.cycles_seen) >= 2:
        return
    numbers = {f"eclipse {n + 1} seen": float(c) for n, c in enumerate(found.cycles_seen)}
    if max(found.cycles_seen) == 0:
        raise NoSolutionError(
            "no eclipse stands out at any period", numbers, help="give the period, or more data"
        )
    raise NoSolutionError(
        "each eclipse was seen only once, so no period can be told", numbers, help="give the period"
    )


def _halved(points: LightPoints, double: Refined) -> Refined | None:
    """Two equal minima as one on half the period."""
    timing = double.eclipses[0].fit.timing
    width = 2 * timing.duration / 1.3
    dip = Dip((2 * timing.middle) % 1, width, timing.depth, double.eclipses[0].signal ** 2)
    return refined(points, double.period / 2, double.origin, (dip,))


def _of_two_minima(
    single: Refined, double: Refined | None, numbers: Mapping[str, float]
) -> Settled:
    name = max(numbers, key=lambda key: numbers[key])
    words = f"two minima a cycle that differ most in {name}, by {numbers[name]:.1f} sigma"
    return Settled(single, words + _alike(double), None, numbers)


def _alike(double: Refined | None) -> str:
    if double is None:
        return "; only even or only odd cycles were observed, so twice the period is not excluded"
    return "; even and odd cycles are alike"


def _of_one_minimum(single: Refined, double: Refined | None) -> Settled:
    """One dip a cycle: a dark companion, or two equal stars on twice the period."""
    timing = single.eclipses[0].fit.timing
    depth, unseen = timing.depth, _unseen_depth(single)
    radii = float(np.sin(np.pi * min(timing.duration, 0.5)))
    numbers = {"depth": depth, "deepest unseen second minimum": unseen, "r1 + r2 at least": radii}
    if double is None:
        words = "one minimum a cycle; twice the period cannot be tested with these cycles"
        return Settled(single, words, 2 * single.period, numbers)
    if radii > WIDEST_PAIR:
        words = (
            f"even and odd minima are alike, but one eclipse a cycle of this length needs r1 + r2 = {radii:.2f}, "
            "no detached pair: two equal stars on twice the period of the dips"
        )
        return Settled(double, words, single.period, numbers)
    if unseen > depth * depth**DARK_POWER:
        words = (
            "one minimum a cycle; two equal stars on twice the period would look the same "
            f"(a second minimum up to {unseen:.2g} would go unseen)"
        )
        return Settled(single, words, 2 * single.period, numbers)
    words = (
        "even and odd minima are alike, and a companion dark enough to show no second minimum could not "
        f"be large enough for a depth of {depth:.2g}: two equal stars on twice the period of the dips"
    )
    return Settled(double, words, single.period, numbers)


def _unseen_depth(single: Refined) -> float:
    """Depth of a second minimum that the folded light may still hide (3 sigma)."""
    timing = single.eclipses[0].fit.timing
    phase = phases(single.cycles, 1.0, timing.middle)
    outside = (phase > 0.6 * timing.duration) & (phase < 1 - 0.6 * timing.duration)
    if outside.sum() < 10:
        return 1.0
    points = single.points
    weight = points.sigma[outside] ** -2.0
    dips = find_dips(phase[outside], points.flux[outside] - 1, weight, bins=100)
    mass = weight.sum() * timing.duration
    floor = 3 / np.sqrt(max(mass, 1e-300))
    return float(max([floor, *(dip.depth + floor for dip in dips[:1])]))
