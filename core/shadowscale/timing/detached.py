"""Whether the folded light has a flat part between eclipses, as that of a detached pair."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import Floats, Photometry
from shadowscale.errors import NotDetachedError
from shadowscale.timing.fold import phases
from shadowscale.timing.light_points import light_points
from shadowscale.timing.search_data import SearchData, search_data

CELLS = 40
MOST_RADII = 0.75  # r1 + r2 where the lobes of equal stars touch (Eggleton 1983, ApJ 268, 368)
LOW_PART = 0.15  # light below the top by this part of the whole range counts as varying
MOST_VARYING = (
    0.5  # a sinusoid varies for 0.75 of the cycle, two eclipses with r1 + r2 = 0.6 for 0.35
)
LEAST_WAVES = 0.6  # part of the variation that four harmonics explain; narrow eclipses leave more
STEADY = 8.0  # range of the folded light over its noise, below which nothing is said


def check_detached(data: SearchData, period: float) -> None:
    """NotDetachedError if the light varies through most of the cycle.

    Two numbers decide and are told: the part of the cycle in which the light is more than 15 % of its
    range below the top, and the amplitude of the second harmonic over the range (0.5 for a pure
    wave of two minima, near 0.3 at most for narrow eclipses).
    """
    light, noise = _folded(data, period)
    if light.size < CELLS / 2:
        return
    top = float(np.mean(np.sort(light)[-max(3, light.size // 12) :]))
    depth = top - float(light.min())
    if depth < STEADY * noise:
        return
    varying = float(np.mean(light < top - LOW_PART * depth))
    second, waves = _waves(data, period)
    if varying < MOST_VARYING or waves < LEAST_WAVES:
        return
    raise NotDetachedError(
        "the light varies all the time: no flat part between eclipses, as of a close pair or a pulsation",
        {
            "part of the cycle that varies": varying,
            "limit": MOST_VARYING,
            "second harmonic over depth": second / depth,
            "part explained by four waves": waves,
            "period": period,
        },
        help="spheres cannot describe it",
    )


def check_folded(photometry: Photometry, period: float) -> None:
    """`check_detached` of a light curve on a given period [d]."""
    check_detached(search_data(light_points(photometry)), period)


def check_radii(period: float, durations: tuple[float, ...]) -> None:
    """NotDetachedError if the eclipses are too long [cycles] for two stars inside their lobes."""
    radii = float(np.sin(np.pi * min(*durations, 0.5)))
    if radii > MOST_RADII:
        raise NotDetachedError(
            "the eclipses are too long for a detached pair",
            {"r1 + r2 at least": radii, "limit": MOST_RADII, "period": period},
            help="spheres cannot describe it",
        )


def _folded(data: SearchData, period: float) -> tuple[Floats, float]:
    """Mean light of the filled cells of phase, and the typical noise of such a mean."""
    cell = (phases(data.time, period, 0.0) * CELLS).astype(np.int64) % CELLS
    mass = np.bincount(cell, data.weight, CELLS)
    filled = mass > 0
    total = np.bincount(cell, data.weight * data.value, CELLS)
    return total[filled] / mass[filled], float(np.median(mass[filled]) ** -0.5)


def _waves(data: SearchData, period: float) -> tuple[float, float]:
    """Amplitude of the second harmonic, and the part of all variation that four harmonics explain."""
    angle = 2 * np.pi * phases(data.time, period, 0.0)
    waves = [np.ones(angle.size)]
    for order in (1, 2, 3, 4):
        waves += [np.cos(order * angle), np.sin(order * angle)]
    root = np.sqrt(data.weight)
    rows, light = np.stack(waves, 1) * root[:, None], data.value * root
    found = np.linalg.lstsq(rows, light, rcond=None)[0]
    left = float(np.sum((light - rows @ found) ** 2))
    return float(np.hypot(found[3], found[4])), 1 - left / data.chi2
