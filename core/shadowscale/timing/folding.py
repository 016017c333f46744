"""Time of a minimum by folding its two branches on each other (Kwee & van Woerden 1956, BAN 12, 327).

S(T) is the sum of squared differences of the branches about an axis T; near its least value it is a parabola
a T^2 + b T + c. More than the original three axes are used and the error is sqrt(2 mu^2/a), mu the error of
a point (Deeg 2021, Galaxies 9, 1): the original formula fails for precise data.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats, Ints

FEWEST = 7
FEWEST_PAIRS = 3
REACH = (
    0.01  # axes on either side of the best (two half steps at least), in the length of the minimum
)
UNLIKE = (
    1.2  # squared differences of the branches over twice their variance: noise has 1, a slope 2
)
UNEVEN = 0.02  # relative scatter of the spacing above which the light is interpolated


@dataclass(frozen=True)
class FoldedMinimum:
    """Time of minimum and error [d], and how many axes the parabola went through."""

    time: float
    error: float
    axes: int


def folded_minimum(time: Floats, flux: Floats, noise: float) -> FoldedMinimum | None:
    """The axis of symmetry of a minimum.

    Parameters
    ----------
    time, flux : (n,) float64 [d]
        One minimum, both branches, in time order.
    noise : float
        Standard deviation of one flux.

    Returns
    -------
    FoldedMinimum or None
        None where there are fewer than 7 points, or no parabola with a minimum.
    """
    if time.size < FEWEST:
        return None
    start, step, light = _even(time, flux)
    last = light.size - 1
    # Axes in half steps: the sum of the two indices of a pair.
    axes = np.arange(2 * FEWEST_PAIRS, 2 * (last - FEWEST_PAIRS) + 1)
    if axes.size < 3:
        return None
    unlike = _mean_squares(light, axes)
    best = int(axes[np.argmin(unlike)])
    if unlike.min() > UNLIKE:
        return None
    reach = max(2, round(REACH * 2 * last))
    used = np.arange(max(axes[0], best - reach), min(axes[-1], best + reach) + 1)
    if used.size < 3:
        return None
    pairs = min(_pairs(light, int(axis)) for axis in used)
    sums = np.array([_sum_of_squares(light, int(axis), pairs) for axis in used])
    place = (used - best) * step / 2
    a, b, _ = np.polyfit(place, sums, 2)
    if a <= 0 or abs(b / (2 * a)) > (used.size + 1) * step / 2:
        return None
    error = float(np.sqrt(2 * noise**2 / a))
    return FoldedMinimum(float(start + best * step / 2 - b / (2 * a)), error, used.size)


def _even(time: Floats, flux: Floats) -> tuple[float, float, Floats]:
    """First time, spacing, and light on even times; interpolated only where the spacing is uneven."""
    step = float((time[-1] - time[0]) / (time.size - 1))
    if np.abs(np.diff(time) / step - 1).max() < UNEVEN:
        return float(time[0]), step, flux
    even = time[0] + step * np.arange(time.size)
    return float(time[0]), step, np.interp(even, time, flux)


def _pairs(light: Floats, axis: int) -> int:
    """How many pairs an axis has."""
    return int(min(axis + 1, 2 * light.size - 1 - axis) // 2)


def _sum_of_squares(light: Floats, axis: int, pairs: int) -> float:
    """Of the differences of the `pairs` pairs nearest the axis."""
    left = (axis - 1) // 2 - np.arange(pairs)
    difference = light[left] - light[axis - left]
    return float(difference @ difference)


def _mean_squares(light: Floats, axes: Ints) -> Floats:
    """Of the differences about each axis, relative to the light's own variation in the pairs.

    So a flat part is no symmetry. The sum of (l - r)^2 is that of l^2 + r^2 less 2 l r, and the latter
    for all axes is the light convolved with itself.
    """
    light = light - light.mean()
    low, high = np.maximum(axes - light.size + 1, 0), np.minimum(axes, light.size - 1)
    middle = np.where(axes % 2 == 0, light[axes // 2], 0.0)  # of an axis on a point, in no pair
    total = _between(light, low, high) - middle
    squares = _between(light**2, low, high) - middle**2
    unlike = squares - (np.convolve(light, light)[axes] - middle**2)
    count = 2 * ((high - low + 1) // 2)
    return np.asarray(unlike / np.maximum(squares - total**2 / count, 1e-300))


def _between(values: Floats, low: Ints, high: Ints) -> Floats:
    """Sums from `low` to `high`, both included."""
    sums = np.concatenate([[0.0], np.cumsum(values)])
    return np.asarray(sums[high + 1] - sums[low])
