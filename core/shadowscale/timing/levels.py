"""The light outside eclipse: levels of nights, and slow variation beside each eclipse, taken out."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints
from shadowscale.timing.fold import Dip, nearest
from shadowscale.timing.light_points import LightPoints, robust_scatter, thinned

HALF = 1.0  # half the eclipse's duration in widths of its box, with room to spare
BESIDE = 1.6  # how far light beside an eclipse is used, in widths of its box
FEWEST_OF_NIGHT = 5
FEWEST_BESIDE = 3
NIGHTS_DIFFER = 4.0  # reduced chi2 of the levels of nights about one level
SLOW_VARIATION = 1.3  # scatter outside eclipse over the noise of neighbours


def outside_eclipse(phase: Floats, dips: tuple[Dip, ...]) -> NDArray[np.bool_]:
    """(n,) True well away from every dip."""
    rows = np.ones(phase.size, bool)
    for dip in dips:
        rows &= np.abs(nearest(phase, dip.middle) - dip.middle) > HALF * dip.width
    return rows


def flattened(
    points: LightPoints, cycles: Floats, dips: tuple[Dip, ...]
) -> tuple[LightPoints, list[str]]:
    """Light divided by its level outside eclipse, so that 1 is the light of both stars in every band.

    Parameters
    ----------
    points : LightPoints
    cycles : (n,) float64
        Time in cycles from the origin of the dips' phases.
    dips : tuple of Dip

    Returns
    -------
    LightPoints, list of str
        With notes on what was taken out.
    """
    phase = cycles - np.floor(cycles)
    outside = outside_eclipse(phase, dips)
    level = band_levels(points, outside)[points.band]
    points = _divided(points, level)
    notes: list[str] = []
    group = _numbered(points.band, points.night)
    if (levels := _night_levels(points, outside, group)) is not None:
        points = _divided(points, levels)
        notes.append("nights were brought to one level outside eclipse")
    if _varies(points, outside):
        for dip in dips:
            points = _divided(points, _line_beside(points, cycles, outside, dip))
        notes.append("slow variation was taken out by a line beside each eclipse")
    return points, notes


def band_levels(points: LightPoints, outside: NDArray[np.bool_]) -> Floats:
    """(bands,) median light outside eclipse, of all light where none is outside."""
    levels = np.ones(len(points.bands))
    for number in range(levels.size):
        rows = points.band == number
        if rows.any():
            best = rows & outside if (rows & outside).any() else rows
            levels[number] = np.median(thinned(points.flux[best]))
    return levels


def _divided(points: LightPoints, level: Floats) -> LightPoints:
    return replace(points, flux=points.flux / level, sigma=points.sigma / level)


def _numbered(*columns: Ints) -> Ints:
    """(n,) numbers 0, 1, ... of the distinct rows of some integer columns."""
    code = np.zeros(columns[0].size, np.int64)
    for column in columns:
        low = column.min()
        code = code * (int(column.max() - low) + 1) + (column - low)
    return np.unique(code, return_inverse=True)[1].astype(np.int64)


def _night_levels(points: LightPoints, outside: NDArray[np.bool_], group: Ints) -> Floats | None:
    """(n,) level of each point's night, 1 where it has too few points outside; None if all are alike."""
    count = np.bincount(group, outside)
    weight = np.where(outside, points.sigma**-2, 0.0)
    mass = np.bincount(group, weight)
    known = count >= FEWEST_OF_NIGHT
    if known.sum() < 2:
        return None
    level = np.bincount(group, weight * points.flux) / np.where(mass > 0, mass, 1.0)
    centre = np.average(level[known], weights=mass[known])
    chi2 = np.sum((level[known] - centre) ** 2 * mass[known]) / (known.sum() - 1)
    if chi2 < NIGHTS_DIFFER:
        return None
    return np.asarray(np.where(known, level / centre, 1.0)[group])


def _varies(points: LightPoints, outside: NDArray[np.bool_]) -> bool:
    if outside.sum() < 30:
        return False
    scaled = (points.flux[outside] - 1) / points.sigma[outside]
    return robust_scatter(scaled) > SLOW_VARIATION


def _line_beside(
    points: LightPoints, cycles: Floats, outside: NDArray[np.bool_], dip: Dip
) -> Floats:
    """(n,) a line through the light beside each single eclipse; 1 far from it or without such light."""
    number = np.round(cycles - dip.middle)
    x = cycles - dip.middle - number
    near = np.abs(x) < BESIDE * dip.width
    level = np.ones(points.flux.size)
    if not near.any():
        return level
    rows = np.flatnonzero(near)
    group = _numbered(points.band[rows], number[rows].astype(np.int64))
    weight = np.where(outside[rows], points.sigma[rows] ** -2, 0.0)
    constant, slope = _lines(x[rows], points.flux[rows], weight, group)
    level[rows] = constant[group] + slope[group] * x[rows]
    return level


def _lines(x: Floats, y: Floats, weight: Floats, group: Ints) -> tuple[Floats, Floats]:
    """Weighted line of each group, a constant where one side has too few points, else 1."""
    used = weight > 0
    left = np.bincount(group, used & (x < 0)) >= FEWEST_BESIDE
    right = np.bincount(group, used & (x > 0)) >= FEWEST_BESIDE
    sums = [np.bincount(group, weight * x**power) for power in range(3)]
    moments = [np.bincount(group, weight * y * x**power) for power in range(2)]
    mass = np.where(sums[0] > 0, sums[0], 1.0)
    spread = sums[2] - sums[1] ** 2 / mass
    tilted = left & right & (spread > 0)
    slope = np.where(
        tilted, (moments[1] - moments[0] * sums[1] / mass) / np.where(tilted, spread, 1.0), 0.0
    )
    constant = (moments[0] - slope * sums[1]) / mass
    known = left | right
    return np.where(known, constant, 1.0), np.where(known, slope, 0.0)
