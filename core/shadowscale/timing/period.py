"""The period of an eclipsing binary from its light, settled against its double and its half."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.errors import NoSolutionError
from shadowscale.progress import SILENT, Progress
from shadowscale.timing import _box_kernels as boxes
from shadowscale.timing.box_search import SHORTEST, Spectrum, frequencies, spectrum
from shadowscale.timing.candidates import Candidate, candidates
from shadowscale.timing.detached import check_detached, check_radii
from shadowscale.timing.light_points import LightPoints, averaged, light_points
from shadowscale.timing.red_noise import check_red_noise, check_within_nights
from shadowscale.timing.refine import polished
from shadowscale.timing.results import PeriodCandidate, PeriodSearch, Span
from shadowscale.timing.search_data import (
    SearchData,
    quiet_merged,
    search_data,
    without_slow_variation,
)
from shadowscale.timing.settle import Settled, settled
from shadowscale.timing.weigh import AS_GOOD, Weighed, as_good, weighed

LONGEST = 0.95  # of the span: an eclipse must come twice
LEAST_GAIN = 60.0  # chi2 of the best dips; white noise gives 45 at most in 1e7 trials
MOST_POINTS = 12_000  # more are averaged ...
CELLS = (0.0015, 0.0035)  # [d] ... in cells of this width, the second where the first is not enough
SAME = 3e-3  # relative difference of two periods that are one
SHOWN = 6
HELP = "give the period, or more data"


def search_period(
    photometry: Photometry,
    *,
    progress: Progress = SILENT,
    period_range: tuple[float, float] | None = None,
    keep: bool = False,
) -> PeriodSearch:
    """Find the period and the epoch of primary minimum.

    Parameters
    ----------
    photometry : Photometry
        All bands are used together.
    progress : Progress
    period_range : (shortest, longest), optional [d]
        0.2 d to 0.95 of the span where missing.
    keep : bool
        Where `progress` raises `Stopped` while periods are searched, go on with those searched so
        far, and say which were not (`PeriodSearch.left`). `progress` is still told of what follows,
        and may stop it.

    Returns
    -------
    PeriodSearch

    Raises
    ------
    ValueError
        If `period_range` is not two rising positive numbers.
    NoSolutionError
        If no dip repeats.
    NotDetachedError
        If the light varies all the time, as of a close pair.
    Stopped
        By `progress`, unless `keep` has something to go on with.

    Notes
    -----
    A box search with two boxes (after Kovacs, Zucker & Mazeh 2002, A&A 391, 369) and the dispersion of
    phase bins name candidates; the least cost of any shape in the eclipses and one level outside
    ranks them; the eclipses themselves, measured on twice the period, settle it.
    """
    points = _few_enough(light_points(photometry))
    limits = _limits(period_range, points.span)
    data, seen = _searched(points, limits, progress, keep=keep)
    found = candidates(data, seen, limits)
    _check_dips(found, seen, data)
    check_detached(data, found[0].period)
    progress.report(0.9, "measuring the eclipses")
    results = _weighed(points, data, found, limits)
    best = settled(points, results)
    best = replace(best, refined=polished(points, best.refined))
    durations = tuple(one.fit.duration for one in best.refined.eclipses)
    check_radii(best.refined.period, durations)
    check_red_noise(data, best.refined)
    check_within_nights(data, best.refined)
    progress.report(1.0, "period found")
    return _result(best, results, seen.left)


def _few_enough(points: LightPoints) -> LightPoints:
    """Neighbours averaged where there are more points than the shapes of eclipses need."""
    for width in CELLS:
        if points.time.size <= MOST_POINTS:
            break
        points = averaged(points, width)
    return points


def _limits(given: Span | None, span: float) -> Span:
    if given is None:
        low, high = SHORTEST, LONGEST * span
    else:
        low, high = given
        if not 0 < low < high:
            raise ValueError(f"period_range must be two rising positive numbers, found {given!r}")
        high = min(high, LONGEST * span)
    if high <= 1.05 * low:
        numbers = {"span": span, "shortest period": low}
        raise NoSolutionError("the data are too short for a period", numbers, help=HELP)
    return low, high


def _searched(
    points: LightPoints, limits: Span, progress: Progress, *, keep: bool
) -> tuple[SearchData, Spectrum]:
    """Search the light as it is and, where that can be had, without slow variation; keep the clearer."""
    dense = search_data(points)
    calm = without_slow_variation(dense)
    raw = quiet_merged(dense)
    trial = frequencies(*limits, raw.span)
    share = 0.85 if calm is None else 0.42
    seen = spectrum(raw, trial, _Part(progress, 0.0, share), keep=keep)
    if calm is None or seen.left:
        return raw, seen
    calm = quiet_merged(calm)
    other = spectrum(calm, trial, _Part(progress, share, 2 * share), keep=keep)
    best = max(((raw, seen), (calm, other)), key=_clearness)
    return best[0], replace(best[1], left=other.left)


def _clearness(pair: tuple[SearchData, Spectrum]) -> float:
    """Explained over unexplained chi2."""
    data, seen = pair
    gain = float(seen.table[:, boxes.GAIN_TWO].max())
    return gain / max(data.chi2 - gain, 1e-9)


class _Part:
    """A share of somebody's progress."""

    def __init__(self, whole: Progress, low: float, high: float) -> None:
        self.whole, self.low, self.high = whole, low, high

    def report(self, fraction: float, words: str) -> None:
        """Pass it on."""
        self.whole.report(self.low + fraction * (self.high - self.low), words)


def _check_dips(found: list[Candidate], seen: Spectrum, data: SearchData) -> None:
    gain = seen.table[:, boxes.GAIN_TWO]
    if found and gain.max() > LEAST_GAIN:
        return
    numbers = {
        "best gain in chi2": float(gain.max()),
        "needed": LEAST_GAIN,
        "noise of a point": float(np.median(data.weight) ** -0.5),
    }
    raise NoSolutionError("no repeating eclipse is seen", numbers, help=HELP)


def _weighed(
    points: LightPoints, data: SearchData, found: list[Candidate], limits: Span
) -> list[Weighed]:
    results = weighed(points, data, found, limits)
    if not results:
        numbers = {"deepest dip": found[0].dips[0].depth, "period": found[0].period}
        raise NoSolutionError("no eclipse stands out at the best period", numbers, help=HELP)
    return results


def _result(best: Settled, results: list[Weighed], left: Span | None) -> PeriodSearch:
    lowest = results[0].cost
    alike = len(as_good(results))
    others = []
    for each in results:
        seen = each.refined
        if abs(seen.period / best.refined.period - 1) < SAME:
            continue
        remark = "fits as well" if each.cost - lowest < AS_GOOD else "fits worse"
        depths = ", ".join(f"{one.fit.depth:.3g}" for one in seen.eclipses)
        remark = f"{remark}; minima of depth {depths}"
        others.append(PeriodCandidate(seen.period, seen.epoch, lowest / each.cost, remark))
    words = best.words
    if left is not None:
        words += f"; stopped: no period from {left[0]:.4g} to {left[1]:.4g} d was searched"
    chosen = PeriodCandidate(best.refined.period, best.refined.epoch, 1.0, words)
    return PeriodSearch(
        period=best.refined.period,
        epoch=best.refined.epoch,
        period_error=best.refined.period_error,
        candidates=(chosen, *others[: max(SHOWN, alike)]),
        words=words,
        ambiguous=best.other is not None,
        other=best.other,
        numbers=best.numbers,
        left=left,
    )
