"""Third light: free unless the user holds it, never negative, and what not knowing it costs.

Eclipses thinned by a third star look like those of other radii, limb darkening and inclination, so
chi-squared alone can hardly tell that there is none: to take it as zero because the data do not
demand it would make the errors of the radii far too small. Where it lies at zero, its bound, errors
are those along the profile of k, which go to its side only.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.build import is_third_light
from shadowscale.fit.least_squares import Normal, covariance
from shadowscale.fit.problem import Fitted
from shadowscale.fit.solution import Decision

Floats = NDArray[np.float64]
SURE = 2.0  # sigmas from zero beyond which a third light is called seen


def at_zero(best: Fitted) -> NDArray[np.bool_]:
    """(m,) which coordinates are third lights pressed against zero."""
    lower, _ = best.objective.vector.bounds
    third = np.array([is_third_light(name) for name in best.system.free], dtype=np.bool_)
    return np.asarray(third & (best.minimum.x <= lower))


def held_covariance(normal: Normal, held: NDArray[np.bool_]) -> Floats:
    """Covariance (m, m) with some coordinates held: zero in their rows and columns."""
    matrix = np.zeros_like(normal.matrix)
    if not held.all():
        rows = np.ix_(~held, ~held)
        matrix[rows], _ = covariance(
            Normal(normal.chi2, normal.downhill[~held], normal.matrix[rows])
        )
    return matrix


def third_light_told(best: Fitted, ends: tuple[Floats, Floats] | None) -> list[Decision]:
    """What is known of third light, and how well k would be known with it held; nothing where it is held.

    `ends` are the limits along a curved valley of k. Numbers: `sigma_radius_ratio_free` and `..._held`; for each band `sigma_third_light[V]`, and
    `unbounded_third_light[V]`, where it would lie could it be negative.
    """
    names = best.system.free
    third = np.array([is_third_light(name) for name in names], dtype=np.bool_)
    if not third.any():
        return []
    matrix, _ = covariance(best.minimum.normal)
    sigma = np.sqrt(np.maximum(np.diag(matrix), 0.0))
    unbounded = best.minimum.x + np.where(at_zero(best), matrix @ best.minimum.normal.downhill, 0.0)
    numbers: dict[str, float] = {}
    seen = False
    for at in np.flatnonzero(third):
        numbers[f"sigma_{names[at]}"] = float(sigma[at])
        numbers[f"unbounded_{names[at]}"] = float(unbounded[at])
        seen |= bool(unbounded[at] > SURE * sigma[at])
    words = "third light is free, as the light alone cannot exclude it"
    if "radius_ratio" in names:
        at = names.index("radius_ratio")
        held = float(np.sqrt(held_covariance(best.minimum.normal, third)[at, at]))
        free = float(sigma[at] if ends is None else (ends[1][at] - ends[0][at]) / 2)
        numbers |= {"sigma_radius_ratio_free": free, "sigma_radius_ratio_held": held}
        ratio = best.system.values["radius_ratio"]
        words += (
            f"; were it known, k would be known to {100 * held / ratio:.2g} per cent "
            f"instead of {100 * free / ratio:.2g}"
        )
    if not seen:
        words += "; hold it at zero where images show no other star"
    return [Decision("third light", "seen" if seen else "not seen", words, numbers)]
