"""Kepler's equation and the anomalies of an ellipse, for arrays."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale._compiled import compiled
from shadowscale.orbit import _kernels

Floats = NDArray[np.float64]


def eccentric_anomaly(mean_anomaly: ArrayLike, eccentricity: float) -> Floats:
    """E of Kepler's equation E - e sin E = M.

    Parameters
    ----------
    mean_anomaly : array of float64 [rad]
        Any real numbers; E is in the same turn.
    eccentricity : float
        0 <= e < 1.

    Returns
    -------
    array of float64 [rad]
        Of the shape given; the equation holds to rounding.

    Raises
    ------
    ValueError
        If `eccentricity` is out of range.
    """
    mean = np.asarray(mean_anomaly, dtype=np.float64)
    out = np.empty(mean.size)
    _fill_anomalies(mean.ravel(), _checked(eccentricity), out)
    return out.reshape(mean.shape)


def true_anomaly(mean_anomaly: ArrayLike, eccentricity: float) -> Floats:
    """True anomaly [rad] of mean anomalies [rad], in the same turn."""
    half = eccentric_anomaly(mean_anomaly, eccentricity) / 2
    e = eccentricity
    ahead = np.arctan2(np.sqrt(1 + e) * np.sin(half), np.sqrt(1 - e) * np.cos(half))
    # The half angles differ by less than a quarter turn: that fixes the turn.
    return np.asarray(
        2 * (ahead + 2 * np.pi * np.rint((half - ahead) / (2 * np.pi))), dtype=np.float64
    )


def mean_anomaly(true_anomaly: ArrayLike, eccentricity: float) -> Floats:
    """Mean anomaly [rad] of true anomalies [rad], in the same turn."""
    e = _checked(eccentricity)
    half = np.asarray(true_anomaly, dtype=np.float64) / 2
    ahead = np.arctan2(np.sqrt(1 - e) * np.sin(half), np.sqrt(1 + e) * np.cos(half))
    anomaly = 2 * (ahead + 2 * np.pi * np.rint((half - ahead) / (2 * np.pi)))
    return np.asarray(anomaly - e * np.sin(anomaly), dtype=np.float64)


def _checked(eccentricity: float) -> float:
    if not 0 <= eccentricity < 1:
        raise ValueError(f"eccentricity: expected 0 <= e < 1, found {eccentricity}")
    return float(eccentricity)


@compiled
def _fill_anomalies(mean: Floats, e: float, out: Floats) -> None:
    for i in range(mean.size):
        out[i] = _kernels.eccentric_anomaly(mean[i], e)
