"""What the period search works on: light of all bands about its level, thinned, without wild points."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.timing.light_points import LightPoints, isolated, robust_scatter
from shadowscale.timing.running import running_median

MOST_POINTS = 6000  # neighbours are averaged where there are more
WIDEST_CELL = 0.014  # [d] and no wider than this
SLOW_WINDOW = 1.2  # [d] longer than most eclipses, shorter than most slow variation
SLOW_CELL = 0.1  # [d]
LEAST_SLOW = 0.3  # scatter of the running median over the noise of a point that is worth taking out
QUIET = 2.5  # [sigma] from the usual level
LONGEST_RUNS = (0.06, 0.15)  # [d] the second where the first leaves too many


@dataclass(frozen=True, eq=False)
class SearchData:
    """Points for the search: time from `origin` [d], light about its mean, 1/sigma^2."""

    origin: float
    time: Floats
    value: Floats
    weight: Floats

    @property
    def chi2(self) -> float:
        """About the mean."""
        return float(self.weight @ self.value**2)

    @property
    def span(self) -> float:
        """[d]"""
        return float(self.time[-1] - self.time[0])


def search_data(points: LightPoints) -> SearchData:
    """All bands on one scale, wild points out, neighbours averaged."""
    level = np.array(
        [
            np.median(points.flux[points.band == n]) if np.any(points.band == n) else 1.0
            for n in range(len(points.bands))
        ]
    )[points.band]
    value, sigma = points.flux / level - 1, points.sigma / level
    kept = ~isolated(points.time, value, sigma)
    # Nothing is brighter than both stars together: what lies above is cut to the noise.
    top = np.median(value) + 4 * max(robust_scatter(value[value > 0]), float(np.median(sigma)))
    return _data(*_averaged(points.time[kept], np.minimum(value, top)[kept], sigma[kept] ** -2.0))


def without_slow_variation(data: SearchData) -> SearchData | None:
    """The same less a running median, where the data are dense enough to have one and it is not flat."""
    cells = np.floor(data.time / SLOW_CELL).astype(np.int64)
    size = int(cells[-1]) + 1
    filled = np.bincount(cells, minlength=size) > 0
    if data.span < 3 * SLOW_WINDOW or data.time.size < 15 * data.span or filled.mean() < 0.5:
        return None
    total = np.bincount(cells, data.weight * data.value, size)
    mass = np.bincount(cells, data.weight, size)
    centres = (np.arange(size) + 0.5) * SLOW_CELL
    mean = np.interp(centres, centres[filled], total[filled] / mass[filled])
    slow = running_median(mean, int(SLOW_WINDOW / SLOW_CELL) + 1)
    if robust_scatter(slow) < LEAST_SLOW * float(np.median(data.weight)) ** -0.5:
        return None
    return _data(
        data.origin + data.time, data.value - np.interp(data.time, centres, slow), data.weight
    )


def quiet_merged(data: SearchData) -> SearchData:
    """The same with runs of points at the usual level averaged, where there are very many.

    Light that does not change needs few points; those that dip, or stray, are kept one by one.
    """
    for longest in LONGEST_RUNS:
        if data.time.size <= MOST_POINTS:
            break
        data = _runs_averaged(data, longest)
    return data


def _runs_averaged(data: SearchData, longest: float) -> SearchData:
    away = np.abs(data.value - np.median(data.value)) * np.sqrt(data.weight)
    quiet = away < QUIET
    step = np.diff(np.floor(data.time / longest), prepend=-1.0) > 0
    begins = step | ~quiet | np.concatenate([[True], ~quiet[:-1]])
    number = np.cumsum(begins) - 1
    mass: Floats = np.bincount(number, data.weight).astype(float)
    time = data.origin + np.bincount(number, data.weight * data.time) / mass
    return _data(time, np.bincount(number, data.weight * data.value) / mass, mass)


def _data(time: Floats, value: Floats, weight: Floats) -> SearchData:
    mean = float(weight @ value / weight.sum())
    return SearchData(float(time[0]), time - time[0], value - mean, np.ascontiguousarray(weight))


def _averaged(time: Floats, value: Floats, weight: Floats) -> tuple[Floats, Floats, Floats]:
    """Means of neighbours in cells of time, as narrow as brings the number of points down."""
    if time.size <= MOST_POINTS:
        return time, value, weight
    cell = WIDEST_CELL
    for width in (WIDEST_CELL / 8, WIDEST_CELL / 4, WIDEST_CELL / 2):
        if np.count_nonzero(np.diff(np.floor(time / width))) < MOST_POINTS:
            cell = width
            break
    number = np.cumsum(np.diff(np.floor(time / cell), prepend=np.floor(time[0] / cell)) > 0)
    mass: Floats = np.bincount(number, weight).astype(float)
    origin = time[0]
    mean_time = origin + np.bincount(number, weight * (time - origin)) / mass
    return mean_time, np.bincount(number, weight * value) / mass, mass
