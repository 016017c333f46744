"""The orbit as an object: what times need to become places and velocities."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite, pi, radians, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import C_KM_S
from shadowscale.orbit.longitude import eccentricity_and_omega

Floats = NDArray[np.float64]


def cos_squared(inclination: float) -> float:
    """cos^2 of an inclination [deg], exactly 0 at 90: there it is at its bound, not near it."""
    return sin(radians(90.0 - inclination)) ** 2


@dataclass(frozen=True)
class Orbit:
    """A relative orbit as it is seen; checked when made.

    Attributes
    ----------
    period : float [d]
    epoch : float [d]
        Observed time of primary conjunction, star 1 behind.
    inclination : float [deg]
    ecosw, esinw : float
        w of star 1's barycentric orbit.
    light_time : float [cycles]
        (a2 - a1)/(c P); see `light_time_cycles`.

    Raises
    ------
    ValueError
        If a value is out of range.
    """

    period: float = 1.0
    epoch: float = 0.0
    inclination: float = 90.0
    ecosw: float = 0.0
    esinw: float = 0.0
    light_time: float = 0.0

    def __post_init__(self) -> None:
        if not (isfinite(self.period) and self.period > 0):
            raise ValueError(f"period: expected a positive number, found {self.period}")
        if not isfinite(self.epoch):
            raise ValueError(f"epoch: expected a finite number, found {self.epoch}")
        if not 0 <= self.inclination <= 90:
            raise ValueError(f"inclination: expected 0...90 deg, found {self.inclination}")
        if not abs(self.light_time) < 0.05:
            raise ValueError(
                f"light_time: expected a small part of a cycle, found {self.light_time}"
            )
        eccentricity_and_omega(self.ecosw, self.esinw)

    @property
    def eccentricity(self) -> float:
        """Eccentricity."""
        return eccentricity_and_omega(self.ecosw, self.esinw)[0]

    @property
    def cos2i(self) -> float:
        """cos^2 of the inclination, exactly 0 at 90 deg."""
        return cos_squared(self.inclination)

    def cycles(self, times: object) -> Floats:
        """Cycles from the epoch, not folded."""
        return np.asarray(
            (np.asarray(times, dtype=np.float64) - self.epoch) / self.period, dtype=np.float64
        )


def light_time_cycles(K1: float, K2: float, *, eccentricity: float, inclination: float) -> float:
    """(a2 - a1)/(c P), the light time that `Orbit` wants.

    Parameters
    ----------
    K1, K2 : float [km/s]
    eccentricity : float
    inclination : float [deg]

    Notes
    -----
    a sin i = P K sqrt(1 - e^2)/(2 pi) for either star. The general form of the delay of the
    secondary follows: see `secondary_delay`.
    """
    if not 0 <= eccentricity < 1:
        raise ValueError(f"eccentricity: expected 0 <= e < 1, found {eccentricity}")
    if not 0 < inclination <= 90:
        raise ValueError(f"inclination: expected above 0, up to 90 deg, found {inclination}")
    factor = sqrt(1 - eccentricity**2) / (2 * pi * C_KM_S * sin(radians(inclination)))
    return (K2 - K1) * factor


def secondary_delay(K1: float, K2: float, *, ecosw: float = 0.0, esinw: float = 0.0) -> float:
    """How much later the secondary is seen against the primary, by light time [cycles].

    (K2 - K1)/(pi c) (1 - e^2)^(3/2)/(1 - e^2 sin^2 w), from the distances of both conjunctions.

    References
    ----------
    Kaplan 2010, ApJL 717, L108 (circular orbit).
    """
    e, _ = eccentricity_and_omega(ecosw, esinw)
    eta = sqrt(1 - e * e)
    return (K2 - K1) / (pi * C_KM_S) * eta**3 / (1 - esinw**2)
