"""How far the measurements are to be believed: outliers, scale of errors, jitter."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.chances import chi2_limit, gaussian_limit
from shadowscale.fit.observed import BandData, StarVelocities

Floats = NDArray[np.float64]


MOST_OUTLIERS = 0.05  # more than this share is a wrong model, not wrong data
EXPECTED_FALSE = 0.05  # good rows that may be lost in a whole table
JITTER_SIGNIFICANCE = 0.01


def outlier_limit(count: int) -> float:
    """Sigmas beyond which, among `count` Gaussian values, 0.05 are expected; 3.5 at the least."""
    return max(3.5, gaussian_limit(EXPECTED_FALSE / max(count, 1)))


def light_outliers(data: BandData, expected: Floats) -> NDArray[np.bool_]:
    """(n,) rows too far from the model, against the robust scatter of the band.

    The scatter is taken from the residuals in units of their errors (median absolute deviation);
    nothing is set aside when more than 5 % of the band would be.
    """
    scaled = (data.flux - expected) * np.sqrt(data.weight)
    middle = float(np.median(scaled))
    spread = 1.4826 * float(np.median(np.abs(scaled - middle)))
    far = np.abs(scaled - middle) > outlier_limit(scaled.size) * max(spread, 1e-12)
    return far if far.mean() <= MOST_OUTLIERS else np.zeros_like(far)


def wild_rows(flux: Floats) -> NDArray[np.bool_]:
    """(n,) rows that no star explains, to be set aside before the first fit.

    Above the middle of the band by ten times what its brighter half usually reaches (the 95 % point),
    or below zero by half the middle: an eclipse is neither.
    """
    middle, high = np.quantile(flux, [0.5, 0.95])
    reach = 10.0 * max(float(high - middle), 1e-6 * abs(float(middle)))
    wild: NDArray[np.bool_] = (flux > middle + reach) | (flux < -0.5 * middle)
    return wild if wild.mean() <= MOST_OUTLIERS else np.zeros_like(wild)


def velocity_outliers(residual: Floats, error: Floats) -> NDArray[np.bool_]:
    """(n,) velocities too far from the model; none where fewer than eight tell the scatter."""
    none = np.zeros(residual.size, dtype=np.bool_)
    if residual.size < 8:
        return none
    scaled = residual / error
    spread = max(1.0, 1.4826 * float(np.median(np.abs(scaled))))
    far = np.abs(scaled) > max(5.0, outlier_limit(residual.size)) * spread
    return far if far.mean() <= 0.15 else none


def error_scale(chi2: float, points: int, taken: float) -> float:
    """Factor on the errors of a band that makes its reduced chi-squared one."""
    freedom = max(points - taken, 1.0)
    return max(float(np.sqrt(chi2 / freedom)), 1e-6)


def needed_jitter(residual: Floats, error: Floats, taken: float) -> float:
    """Jitter [km/s] that makes reduced chi-squared one; zero where the scatter is not significant.

    Significant: chi-squared above its 99 % point for the degrees of freedom.
    """
    freedom = residual.size - taken
    if freedom < 1:
        return 0.0
    if float(np.sum((residual / error) ** 2)) <= chi2_limit(freedom, JITTER_SIGNIFICANCE):
        return 0.0
    low, high = 0.0, float(np.sqrt(np.mean(residual**2)) * 10)
    for _ in range(60):
        middle = (low + high) / 2
        if float(np.sum(residual**2 / (error**2 + middle**2))) > freedom:
            low = middle
        else:
            high = middle
    return (low + high) / 2


def scatter_scale(data: StarVelocities, residual: Floats, taken: float) -> float:
    """Error [km/s] of velocities that came without: their scatter about the model."""
    return float(np.sqrt(np.sum(residual**2) / max(data.time.size - taken, 1.0)))
