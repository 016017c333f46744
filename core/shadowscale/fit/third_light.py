"""What is known of third light, and what not knowing it costs."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.build import is_third_light
from shadowscale.fit.least_squares import Normal, covariance
from shadowscale.fit.problem import Fitted
from shadowscale.fit.solution import Decision

Floats = NDArray[np.float64]
SURE = 2.0  # sigmas from zero beyond which a third light is called seen


def third_light_told(best: Fitted, ends: tuple[Floats, Floats] | None) -> list[Decision]:
    """How well third light is known, and how well k would be with it held; nothing where it is held.

    `ends` are the limits along a curved valley of k. Numbers: `sigma_radius_ratio_free` and
    `..._held`, and `sigma_third_light[V]` of each band.
    """
    names = best.system.free
    third = np.array([is_third_light(name) for name in names], dtype=np.bool_)
    if not third.any():
        return []
    matrix, _ = covariance(best.minimum.normal)
    sigma = np.sqrt(np.maximum(np.diag(matrix), 0.0))
    numbers = {f"sigma_{names[at]}": float(sigma[at]) for at in np.flatnonzero(third)}
    seen = bool(np.any(best.minimum.x[third] > SURE * sigma[third]))
    words = "third light is free, as the light alone cannot exclude it"
    if "radius_ratio" in names:
        at = names.index("radius_ratio")
        free = float(sigma[at] if ends is None else (ends[1][at] - ends[0][at]) / 2)
        held = _held_sigma(best.minimum.normal, third, at)
        numbers |= {"sigma_radius_ratio_free": free, "sigma_radius_ratio_held": held}
        ratio = best.system.values["radius_ratio"]
        words += (
            f"; were it known, k would be known to {100 * held / ratio:.2g} per cent "
            f"instead of {100 * free / ratio:.2g}"
        )
    if not seen:
        words += "; hold it at zero where images show no other star"
    return [Decision("third light", "seen" if seen else "not seen", words, numbers)]


def _held_sigma(normal: Normal, held: NDArray[np.bool_], at: int) -> float:
    """Sigma of one coordinate with some others held."""
    rows = np.flatnonzero(~held)
    left = Normal(normal.chi2, normal.downhill[rows], normal.matrix[np.ix_(rows, rows)])
    place = int(np.searchsorted(rows, at))
    return float(np.sqrt(covariance(left)[0][place, place]))
