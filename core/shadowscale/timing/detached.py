"""Whether the folded light has a flat part between eclipses, as that of a detached pair."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.errors import NotDetachedError
from shadowscale.timing.fold import phases
from shadowscale.timing.search_data import SearchData

CELLS = 40
LOW_PART = 0.15  # light below the top by this part of the whole range counts as varying
MOST_VARYING = 0.6  # a sinusoid varies for 0.75 of the cycle, two wide eclipses for 0.45
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
    if varying < MOST_VARYING:
        return
    raise NotDetachedError(
        "the light varies all the time: no flat part between eclipses, as of a close pair or a pulsation",
        {
            "part of the cycle that varies": varying,
            "limit": MOST_VARYING,
            "second harmonic over depth": _second_harmonic(data, period) / depth,
            "period": period,
        },
        help="spheres cannot describe it",
    )


def _folded(data: SearchData, period: float) -> tuple[Floats, float]:
    """Mean light of the filled cells of phase, and the typical noise of such a mean."""
    cell = (phases(data.time, period, 0.0) * CELLS).astype(np.int64) % CELLS
    mass = np.bincount(cell, data.weight, CELLS)
    filled = mass > 0
    total = np.bincount(cell, data.weight * data.value, CELLS)
    return total[filled] / mass[filled], float(np.median(mass[filled]) ** -0.5)


def _second_harmonic(data: SearchData, period: float) -> float:
    """Amplitude of the second harmonic, by least squares beside the first."""
    angle = 2 * np.pi * phases(data.time, period, 0.0)
    waves = [np.ones(angle.size)]
    for order in (1, 2):
        waves += [np.cos(order * angle), np.sin(order * angle)]
    root = np.sqrt(data.weight)
    found = np.linalg.lstsq(np.stack(waves, 1) * root[:, None], data.value * root, rcond=None)[0]
    return float(np.hypot(found[3], found[4]))
