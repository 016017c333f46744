"""Whether dips stand out of slow noise: a few nights below the others are no eclipses."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import Floats, Ints
from shadowscale.errors import NoSolutionError
from shadowscale.timing.light_points import robust_scatter
from shadowscale.timing.refine import Refined
from shadowscale.timing.search_data import SearchData
from shadowscale.timing.weigh import depth_and_residuals

LEAST_SIGNAL = 4.0
FEWEST_CELLS = 6
RUN_GAP = 0.3  # [d] a longer one begins another night
POINTS_OF_RUN = 8
LEAST_WITHIN = 0.35
LEAST_GAIN = 40.0


def check_red_noise(data: SearchData, found: Refined) -> None:
    """NoSolutionError if the deeper eclipse is within the slow noise.

    The noise of a mean depth over N eclipses of n points is sqrt(white^2/n + red^2/N), red the scatter of
    means over the length of an eclipse beyond what white noise gives (Pont, Zucker & Queloz 2006, MNRAS
    373, 231).
    """
    deepest = found.eclipses[0]
    timing = deepest.fit.timing
    depth, residual = depth_and_residuals(data, found)
    red = _red_scatter(data, found, residual, timing.duration * found.period)
    cycles = max(found.cycles_seen[0], 1)
    error = float(np.hypot(timing.depth / max(deepest.signal, 1e-9), red / np.sqrt(cycles)))
    if depth > LEAST_SIGNAL * error:
        return
    numbers = {
        "depth": depth,
        "slow noise": red,
        "eclipses seen": float(cycles),
        "depth over its noise": depth / error,
        "needed": LEAST_SIGNAL,
    }
    raise NoSolutionError("the dips do not stand out of the slow variation", numbers)


def check_within_nights(data: SearchData, found: Refined) -> None:
    """NoSolutionError if only the levels of nights differ, and no night shows light going or coming.

    Where points come in runs, the fitted eclipses are compared with the light after each run's mean is
    taken from both; they must still be there. Single points, as of a survey, cannot be asked.
    """
    number = np.cumsum(np.diff(data.time, prepend=data.time[0]) > RUN_GAP).astype(np.int64)
    count = np.bincount(number)[number]
    rows = count >= POINTS_OF_RUN
    if rows.mean() < 0.5:
        return
    model = data.value - depth_and_residuals(data, found)[1]
    shape, light = (_without_means(v, data.weight, number)[rows] for v in (model, data.value))
    weight = data.weight[rows]
    power = float(weight @ shape**2)
    share = float(weight @ (shape * light)) / power if power > 0 else 0.0
    gain = share**2 * power
    if share > LEAST_WITHIN and gain > LEAST_GAIN:
        return
    numbers = {
        "part of the eclipses that is seen within nights": share,
        "needed": LEAST_WITHIN,
        "gain in chi2 within nights": gain,
    }
    raise NoSolutionError(
        "nights differ in level, but none shows the light of an eclipse change", numbers
    )


def _without_means(value: Floats, weight: Floats, number: Ints) -> Floats:
    """Values less the weighted mean of their run."""
    mass = np.bincount(number, weight)
    return np.asarray(value - (np.bincount(number, weight * value) / mass)[number])


def _red_scatter(data: SearchData, found: Refined, residual: Floats, length: float) -> float:
    """Scatter of means over a time [d] beyond that of white noise, outside the eclipses."""
    rows = np.ones(residual.size, bool)
    cycles = (data.origin - found.origin + data.time) / found.period
    for one in found.eclipses:
        away = cycles - one.fit.middle
        rows &= np.abs(away - np.round(away)) > 0.6 * one.fit.duration
    mean, noise = _cell_means(data.time[rows], residual[rows], data.weight[rows], length)
    if mean.size < FEWEST_CELLS:
        return 0.0
    return float(np.sqrt(max(robust_scatter(mean) ** 2 - float(np.median(noise)) ** 2, 0.0)))


def _cell_means(
    time: Floats, value: Floats, weight: Floats, length: float
) -> tuple[Floats, Floats]:
    """Means in cells of time, and their white noise."""
    if time.size == 0:
        return np.empty(0), np.empty(0)
    _, number = np.unique(np.floor(time / length), return_inverse=True)
    mass: Floats = np.bincount(number, weight).astype(float)
    return np.bincount(number, weight * value) / mass, 1 / np.sqrt(mass)
