"""What a practitioner writes today: two light curves of batman-package put together, and scipy's fit.

One eclipse each: in the second the roles are changed and omega is turned by 180 degrees (Kreidberg 2015,
PASP 127, 1161). Velocities by Newton's iteration in numpy.
"""

from __future__ import annotations

import warnings
from collections.abc import Mapping
from math import atan2, degrees, hypot, pi

import batman
import numpy as np
from numpy.typing import NDArray
from scipy.optimize import least_squares

Floats = NDArray[np.float64]


class Composite:
    """Light of a pair at fixed times, quadratic limb darkening, no third light."""

    def __init__(self, times: Floats, values: Mapping[str, float]) -> None:
        self.primary, self.secondary = batman.TransitParams(), batman.TransitParams()
        self._set(values)
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            self.first = batman.TransitModel(self.primary, times)
            self.second = batman.TransitModel(self.secondary, times)

    def light(self, values: Mapping[str, float]) -> Floats:
        """(n,) light, one outside eclipse."""
        self._set(values)
        first = self.first.light_curve(self.primary)
        second = self.second.light_curve(self.secondary)
        ratio = values["J"] * values["k"] ** 2 * _mean(values, 2) / _mean(values, 1)
        result: Floats = (first + ratio * second) / (1 + ratio)
        return result

    def _set(self, values: Mapping[str, float]) -> None:
        k, period = values["k"], values["period"]
        eccentricity = hypot(values["ecosw"], values["esinw"])
        omega = atan2(values["esinw"], values["ecosw"])
        r1 = values["radius_sum"] / (1 + k)
        later = _mean_anomaly(-pi / 2 - omega, eccentricity)
        later -= _mean_anomaly(pi / 2 - omega, eccentricity)
        for one, ratio, size, turn, epoch, star in (
            (self.primary, k, r1, 0.0, values["epoch"], 1),
            (self.secondary, 1 / k, r1 * k, 180.0,
             values["epoch"] + (later / (2 * pi)) % 1.0 * period, 2),
        ):  # fmt: skip
            one.t0, one.per, one.rp, one.a = epoch, period, ratio, 1 / size
            one.inc, one.ecc, one.w = values["inclination"], eccentricity, degrees(omega) + turn
            one.u, one.limb_dark = [values[f"u{star}"], values[f"v{star}"]], "quadratic"


def _mean(values: Mapping[str, float], star: int) -> float:
    """Mean intensity of a disc."""
    return 1 - values[f"u{star}"] / 3 - values[f"v{star}"] / 6


def _mean_anomaly(nu: float, eccentricity: float) -> float:
    root = np.sqrt((1 - eccentricity) / (1 + eccentricity))
    e = 2 * np.arctan(root * np.tan(nu / 2))
    return float(e - eccentricity * np.sin(e))


def velocities(values: Mapping[str, float], times: Floats) -> tuple[Floats, Floats]:
    """Both stars' velocities [km/s]."""
    e = hypot(values["ecosw"], values["esinw"])
    omega = atan2(values["esinw"], values["ecosw"])
    start = _mean_anomaly(pi / 2 - omega, e)
    mean = 2 * pi * (times - values["epoch"]) / values["period"] + start
    anomaly = mean.copy()
    for _ in range(20):
        anomaly -= (anomaly - e * np.sin(anomaly) - mean) / (1 - e * np.cos(anomaly))
    nu = 2 * np.arctan2(np.sqrt(1 + e) * np.sin(anomaly / 2), np.sqrt(1 - e) * np.cos(anomaly / 2))
    shape = np.cos(nu + omega) + e * np.cos(omega)
    return values["gamma"] + values["K1"] * shape, values["gamma"] - values["K2"] * shape


def fit(
    model: Composite,
    flux: Floats,
    error: float,
    start: Mapping[str, float],
    free: Mapping[str, float],
) -> tuple[dict[str, float], float]:
    """Least squares by finite differences; `free` maps names (and `level`) to scales. Values, chi-squared."""
    names = list(free)

    def residuals(x: Floats) -> Floats:
        values = {**start, **dict(zip(names, x.tolist(), strict=True))}
        result: Floats = (flux - values["level"] * model.light(values)) / error
        return result

    found = least_squares(
        residuals, [start[name] for name in names], x_scale=list(free.values()), ftol=1e-9,
        xtol=1e-12, gtol=1e-12,
    )  # fmt: skip
    return {**start, **dict(zip(names, found.x.tolist(), strict=True))}, 2 * float(found.cost)
