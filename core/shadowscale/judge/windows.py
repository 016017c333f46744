"""Where in phase the eclipses lie, for checks that only need to know which points are inside.

Winn 2010 (arXiv:1001.2010), eqs. 7, 14-16: contacts from the impact parameter and the speed at
conjunction, within 0.3 % of the exact orbit for the eccentricities that occur; the distance of the
secondary eclipse is exact for conjunctions (Sterne; Kopal 1959, from memory). The sheet's own
durations are exact and come from elsewhere.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import asin, atan, cos, isfinite, nan, pi, sin, sqrt

import numpy as np

from shadowscale.data.photometry import Floats


@dataclass(frozen=True)
class EclipseWindow:
    """One eclipse.

    star : the star that is eclipsed; middle : phase [cycles]; outer, inner : half of the time between
    first and fourth, second and third contact [cycles], 0 where there are none; separation : distance
    of the centres at the middle [a]; radii : (eclipsed, in front) [a].
    """

    star: int
    middle: float
    outer: float
    inner: float
    separation: float
    radii: tuple[float, float]

    @property
    def name(self) -> str:
        """The eclipse's name."""
        return "primary" if self.star == 1 else "secondary"

    @property
    def happens(self) -> bool:
        """Whether the discs meet at all."""
        return self.outer > 0

    @property
    def kind(self) -> str:
        """`total`, `annular`, `partial`, `grazing` (no centre is covered), or `none`."""
        behind, front = self.radii
        if not self.happens:
            return "none"
        if self.separation < abs(behind - front):
            return "total" if front > behind else "annular"
        return "partial" if self.separation < max(self.radii) else "grazing"

    def offset(self, phase: Floats) -> Floats:
        """Phase from the middle, -0.5...0.5."""
        away = phase - self.middle
        return np.asarray(away - np.rint(away))


def eclipse_windows(
    radii: tuple[float, float], inclination: float, *, ecosw: float, esinw: float
) -> tuple[EclipseWindow, EclipseWindow]:
    """Windows of primary and secondary eclipse; `inclination` in radians."""
    ecosw, esinw = (number if isfinite(number) else 0.0 for number in (ecosw, esinw))
    squared = ecosw**2 + esinw**2
    if not (all(map(isfinite, (*radii, inclination))) and squared < 1):
        return _nowhere(1, radii), _nowhere(2, radii)
    return (
        _window(1, radii, inclination=inclination, squared=squared, esinw=esinw, middle=0.0),
        _window(
            2,
            radii[::-1],
            inclination=inclination,
            squared=squared,
            esinw=-esinw,
            middle=secondary_phase(ecosw, esinw),
        ),
    )


def secondary_phase(ecosw: float, esinw: float) -> float:
    """Phase of superior conjunction after the primary's, exact for any eccentricity below 1."""
    root = sqrt(1 - ecosw**2 - esinw**2)
    swing = atan(ecosw / root) + ecosw * root / (1 - esinw**2)
    return 0.5 + swing / pi


def _nowhere(star: int, radii: tuple[float, float]) -> EclipseWindow:
    return EclipseWindow(star, 0.0 if star == 1 else 0.5, 0.0, 0.0, nan, radii)


def _window(
    star: int,
    radii: tuple[float, float],
    *,
    inclination: float,
    squared: float,
    esinw: float,
    middle: float,
) -> EclipseWindow:
    separation = abs(cos(inclination)) * (1 - squared) / (1 + esinw)
    pace = sqrt(1 - squared) / (1 + esinw)

    def half(reach: float) -> float:
        if reach <= separation or sin(inclination) <= 0:
            return 0.0
        chord = sqrt(reach**2 - separation**2) / sin(inclination)
        return min(pace * asin(min(chord, 1.0)) / (2 * pi), 0.25)

    outer, inner = half(sum(radii)), half(abs(radii[0] - radii[1]))
    return EclipseWindow(star, middle, outer, inner, separation, radii)
