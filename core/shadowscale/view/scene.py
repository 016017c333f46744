"""The system drawn to scale on the sky: discs, orbit, line of sight, the Sun for size."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from math import cos, pi, radians, sin, sqrt
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats
from shadowscale.fit.solution import Estimate
from shadowscale.fit.system import System

ORBIT_SAMPLES = 181
PLAIN_LIMB = (0.6,)


@dataclass(frozen=True, eq=False)
class Disc:
    """A star on the sky [units of a]; `depth` grows away from the observer.

    intensity : (rings,) float64, of the disc from centre to limb at equal steps of the radius, 0 to 1
    """

    x: float
    y: float
    depth: float
    radius: float
    intensity: Floats


@dataclass(frozen=True, eq=False)
class Scene:
    """What the observer would see, and the same from above the orbit.

    sky1, sky2, above1, above2 : (n, 2) float64 [a]; orbits of both stars about the barycentre,
    on the sky and seen from above with the observer below
    sun_radius : float or None [a]; None where the size of the orbit is unknown
    """

    discs: tuple[Disc, Disc]
    sky1: Floats
    sky2: Floats
    above1: Floats
    above2: Floats
    sun_radius: float | None
    words: str


def scene(
    system: System, phase: float, *, estimates: Mapping[str, Estimate] = MappingProxyType({})
) -> Scene:
    """The scene at `phase` [cycles]; two equal masses where the mass ratio is unknown."""
    share1 = _share(system)
    orbit = _relative_orbit(_shape(system), np.linspace(0.0, 1.0, ORBIT_SAMPLES))
    now = _relative_orbit(_shape(system), np.array([phase]))[0]
    tilt = cos(radians(system.value("inclination")))
    radius_sum, ratio = system.value("radius_sum"), system.value("radius_ratio")
    radii = radius_sum / (1 + ratio), radius_sum * ratio / (1 + ratio)
    shares = -share1, 1 - share1
    discs = tuple(
        Disc(
            share * now[0], share * now[1] * tilt, share * now[1], radius, _intensity(system, star)
        )
        for star, share, radius in zip((1, 2), shares, radii, strict=True)
    )
    sky = [np.column_stack((share * orbit[:, 0], share * orbit[:, 1] * tilt)) for share in shares]
    above = [share * orbit for share in shares]
    a = estimates.get("a")
    sun = 1.0 / a.value if a is not None and a.value > 0 else None
    return Scene(
        (discs[0], discs[1]), sky[0], sky[1], above[0], above[1], sun, _words(discs, phase)
    )


def depth_picture(intensity: Floats, pixels: int) -> NDArray[np.float64]:
    """(pixels, pixels) brightness 0...1 of a disc that fills the square; NaN outside."""
    axis = (np.arange(pixels) + 0.5) / pixels * 2 - 1
    radius = np.sqrt(axis[:, None] ** 2 + axis[None, :] ** 2)
    picture = np.interp(radius, np.linspace(0, 1, intensity.size), intensity)
    return np.where(radius <= 1.0, picture, np.nan)


def _words(discs: tuple[Disc, ...], phase: float) -> str:
    apart = sqrt((discs[0].x - discs[1].x) ** 2 + (discs[0].y - discs[1].y) ** 2)
    front, behind = (1, 2) if discs[0].depth < discs[1].depth else (2, 1)
    small, big = sorted(disc.radius for disc in discs)
    if apart >= small + big:
        return "outside eclipse"
    if apart > big - small:
        return f"star {front} hides part of star {behind}"
    whole = discs[front - 1].radius >= discs[behind - 1].radius
    return f"star {behind} is hidden" if whole else f"star {front} stands before star {behind}"


def _share(system: System) -> float:
    """The part of the orbit that star 1 takes: K1/(K1+K2)."""
    if system.has("K1") and system.has("K2"):
        total = system.value("K1") + system.value("K2")
        return system.value("K1") / total if total > 0 else 0.5
    return 0.5


def _shape(system: System) -> tuple[float, float]:
    return system.value("ecosw"), system.value("esinw")


def _relative_orbit(shape: tuple[float, float], cycles: Floats) -> Floats:
    """(n, 2) position of star 2 from star 1 in the orbit's plane [a], at phases from primary mid-eclipse.

    The first axis lies in the sky, the second points away from the observer: at primary eclipse
    star 2 is in front, so its second coordinate is negative.
    """
    ecosw, esinw = shape
    e = sqrt(ecosw**2 + esinw**2)
    omega = float(np.arctan2(esinw, ecosw))
    nu = _true_anomaly(e, _mean_anomaly(e, pi / 2 - omega) + 2 * pi * cycles)
    rho = (1 - e**2) / (1 + e * np.cos(nu))
    return np.column_stack((-rho * np.cos(nu + omega), -rho * np.sin(nu + omega)))


def _mean_anomaly(e: float, nu: float) -> float:
    eccentric = 2 * float(np.arctan2(sqrt(1 - e) * sin(nu / 2), sqrt(1 + e) * cos(nu / 2)))
    return eccentric - e * sin(eccentric)


def _true_anomaly(e: float, mean: Floats) -> Floats:
    eccentric = mean + e * np.sin(mean)
    for _ in range(50):
        step = (eccentric - e * np.sin(eccentric) - mean) / (1 - e * np.cos(eccentric))
        eccentric = eccentric - step
        if np.all(np.abs(step) < 1e-12):
            break
    return 2 * np.arctan2(sqrt(1 + e) * np.sin(eccentric / 2), sqrt(1 - e) * np.cos(eccentric / 2))


def _intensity(system: System, star: int) -> Floats:
    """Limb darkening of the first band from centre to limb, for drawing."""
    coefficients = system.limb_darkening(star, system.bands[0]) if system.bands else ()
    return _profile(system.law if coefficients else "linear", coefficients or PLAIN_LIMB)


@lru_cache(maxsize=64)
def _profile(law: str, coefficients: tuple[float, ...]) -> Floats:
    from shadowscale.light.laws import LAWS

    mu = np.sqrt(np.clip(1 - np.linspace(0, 1, 64) ** 2, 0, 1))
    return np.clip(np.asarray(LAWS[law].intensity(mu, coefficients)), 0.0, 1.0)
