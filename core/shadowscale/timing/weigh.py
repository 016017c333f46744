"""Candidates weighed by their eclipses: how well two trapezoids on each period describe all the light."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.timing.candidates import Candidate, close_look
from shadowscale.timing.fold import nearest
from shadowscale.timing.light_points import LightPoints
from shadowscale.timing.profile import TRAPEZOID
from shadowscale.timing.refine import Refined, refined
from shadowscale.timing.search_data import SearchData
from shadowscale.timing.shape_fit import ShapeData, ShapeFit, predicted

WEIGHED = 5
MOST_WEIGHED, NEAR = 12, 60.0  # beyond `WEIGHED`, those whose cost is so near the best one's
LEAST_SIGNAL = 6.0  # [sigma]
LEAST_DEPTH = 0.02  # of the deeper eclipse: less is no second eclipse but the light between
UNLIKE = 4.0  # ratio of the durations of two eclipses; e = 0.6 gives 4
FARTHEST = 5.0  # [sigma] a point counts no more than this
PARAMETERS = 6  # of one eclipse
HALF_APART = 0.01  # [cycles]
AS_GOOD = 12.0  # in cost: what one eclipse more or less may change by chance


@dataclass(frozen=True, eq=False)
class Weighed:
    """A period with its measured eclipses, and its cost: chi2 on a common scale and log(n) a parameter."""

    refined: Refined
    chi2: float
    cost: float = np.inf


def weighed(
    points: LightPoints, data: SearchData, found: list[Candidate], limits: tuple[float, float]
) -> list[Weighed]:
    """The best candidates, and the half and the double of the best, in order of cost."""
    near = [each for each in found[WEIGHED:MOST_WEIGHED] if each.cost - found[0].cost < NEAR]
    chosen = [*found[:WEIGHED], *near]
    for factor in (0.5, 2.0):
        period = found[0].period * factor
        known = any(abs(period / each.period - 1) < 3e-3 for each in chosen)
        if limits[0] <= period <= limits[1] and not known:
            chosen.append(close_look(data, period))
    origin = float(np.median(points.time))
    results = []
    for each in chosen:
        found_here = _refined(points, data, each, origin)
        seen = None if found_here is None else _seen_clearly(found_here)
        if seen is not None:
            results.append(Weighed(seen, _chi2(data, seen)))
    if not results:
        return []
    count = data.time.size
    scale = max(min(each.chi2 for each in results) / count, 1e-12)
    costed = [
        replace(
            each,
            cost=each.chi2 / scale + PARAMETERS * len(each.refined.eclipses) * np.log(count),
        )
        for each in results
    ]
    return sorted(costed, key=lambda each: each.cost)


def as_good(results: list[Weighed]) -> list[Weighed]:
    """Those that the data do not tell from the best; the likelier first.

    Orbits with minima half a cycle apart, or one minimum, are commoner than eccentric ones; then the shorter.
    """
    near = [each for each in results if each.cost - results[0].cost < AS_GOOD]
    return sorted(near, key=lambda each: (not _plain(each.refined), each.refined.period))


def _plain(found: Refined) -> bool:
    if len(found.eclipses) == 1:
        return True
    first, second = (one.fit.middle for one in found.eclipses[:2])
    return abs((first - second) % 1 - 0.5) < HALF_APART


def _refined(
    points: LightPoints, data: SearchData, each: Candidate, origin: float
) -> Refined | None:
    shift = (origin - data.origin) / each.period
    dips = tuple(replace(dip, middle=(dip.middle - shift) % 1) for dip in each.dips)
    return refined(points, each.period, origin, dips)


def _seen_clearly(found: Refined) -> Refined | None:
    """Without dips that do not stand out, or are far longer or shorter than the deepest; None if none is left."""
    deepest = found.eclipses[0].fit.timing
    rows = [
        n
        for n, one in enumerate(found.eclipses)
        if one.signal > LEAST_SIGNAL
        and one.fit.depth > LEAST_DEPTH * deepest.depth
        and 1 / UNLIKE < one.fit.duration / deepest.duration < UNLIKE
    ]
    if not rows:
        return None
    return replace(
        found,
        eclipses=tuple(found.eclipses[n] for n in rows),
        cycles_seen=tuple(found.cycles_seen[n] for n in rows),
    )


def depth_and_residuals(data: SearchData, found: Refined) -> tuple[float, Floats]:
    """Depth of the deepest eclipse in the searched light, and (n,) that light about the eclipses' shapes."""
    cycles = (data.origin - found.origin + data.time) / found.period
    columns = [np.ones(cycles.size)]
    columns += [_shape(one.fit.best, cycles) for one in found.eclipses]
    rows = np.stack(columns, axis=1)
    root = np.sqrt(data.weight)
    solution = np.linalg.lstsq(rows * root[:, None], data.value * root, rcond=None)[0]
    return float(solution[1]), data.value - rows @ solution


def _chi2(data: SearchData, found: Refined) -> float:
    """Of the residuals; far points count little."""
    residual = depth_and_residuals(data, found)[1] * np.sqrt(data.weight)
    limit = FARTHEST * max(1.0, float(np.median(np.abs(residual))) * 1.4826)
    return float(np.sum(np.minimum(residual**2, limit**2)))


def _shape(fit: ShapeFit, cycles: Floats) -> Floats:
    """Light left where the depth is 1: 0 at the middle, 1 outside."""
    near = nearest(cycles, fit.centre)
    plain = fit.values.copy()
    plain[4 : 4 + fit.bands], plain[4 + fit.bands : 4 + 2 * fit.bands], plain[-1] = 1.0, 1.0, 0.0
    data = ShapeData(
        phase=near,
        flux=near,
        sigma=near,
        band=np.zeros(near.size, np.int64),
        bands=fit.bands,
        centre=fit.centre,
    )
    return predicted(data, replace(fit, profile=TRAPEZOID, values=plain))
