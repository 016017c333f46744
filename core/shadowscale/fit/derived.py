"""Every quantity that follows from the basic ones, one function each.

A function takes the `Stars` (a system with what is assumed beside it) and gives a number; NaN
where the system cannot give it. `absent_words` says why.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from math import atan2, cos, degrees, hypot, nan, radians

import numpy as np

from shadowscale.fit.band_model import BandModel, Eclipse, Shape
from shadowscale.fit.plan import MEASURED, Plan
from shadowscale.fit.system import System
from shadowscale.geometry import absolute
from shadowscale.light.laws import LAWS
from shadowscale.quantities import BAND, QUANTITIES, key, parse_key

ASSUMABLE = ("M1", "mass_ratio")


@dataclass(frozen=True, eq=False)
class Stars:
    """A system at given values, with assumed and external inputs; each intermediate computed once."""

    system: System
    assumed: Mapping[str, float] = field(default_factory=dict)

    def get(self, name: str, label: str | None = None) -> float:
        """A basic value, or NaN."""
        return self.system.values.get(key(name, label), nan)

    def given(self, name: str) -> float:
        """An assumed or external input, or NaN."""
        return self.assumed.get(name, nan)

    @cached_property
    def eccentricity(self) -> float:
        """e."""
        return hypot(self.get("ecosw"), self.get("esinw"))

    @cached_property
    def tilt(self) -> dict[str, float]:
        """Eccentricity and inclination [deg], as the absolute dimensions want them."""
        return {"eccentricity": self.eccentricity, "inclination": self.get("inclination")}

    @cached_property
    def radii(self) -> tuple[float, float]:
        """r1, r2."""
        total, ratio = self.get("radius_sum"), self.get("radius_ratio")
        return total / (1 + ratio), total * ratio / (1 + ratio)

    @cached_property
    def masses(self) -> tuple[float, float]:
        """M1, M2 [nominal solar]: from both amplitudes, or from one and an assumed M1."""
        period, k1, k2 = self.get("period"), self.get("K1"), self.get("K2")
        if np.isfinite(k1) and np.isfinite(k2):
            one, two = absolute.masses(period, k1, k2, **self.tilt)
            return float(one), float(two)
        ratio = self.given("mass_ratio")
        if np.isfinite(ratio) and np.isfinite(k1):
            one, two = absolute.masses(period, k1, k1 / ratio, **self.tilt)
            return float(one), float(two)
        mass1 = self.given("M1")
        if np.isfinite(mass1) and np.isfinite(k1):
            companion = absolute.companion_mass(period, k1, mass=mass1, **self.tilt)
            return mass1, float(companion)
        return nan, nan

    @cached_property
    def mass_ratio(self) -> float:
        """M2/M1."""
        if np.isfinite(self.given("mass_ratio")):
            return self.given("mass_ratio")
        one, two = self.masses
        return two / one if one > 0.0 else nan

    @cached_property
    def axis(self) -> float:
        """a [nominal solar radii]."""
        total = sum(self.masses)
        return (
            float(absolute.semi_major_axis(self.get("period"), total))
            if np.isfinite(total)
            else nan
        )

    @cached_property
    def eclipses(self) -> tuple[Eclipse, Eclipse]:
        """Both eclipses in the first band."""
        return _eclipses(Shape.at(self.system, self.system.values, self.system.bands[0]))


@lru_cache(maxsize=256)
def _eclipses(shape: Shape) -> tuple[Eclipse, Eclipse]:
    """Eclipses, kept: many quantities of a system do not touch them."""
    model = BandModel.of(shape, 1.0, 0.0)
    return model.eclipse(0), model.eclipse(1)


def _impact(stars: Stars, sign: float) -> float:
    rho = (1 - stars.eccentricity**2) / (1 + sign * stars.get("esinw"))
    return cos(radians(stars.get("inclination"))) * rho / stars.radii[0]


def _omega(stars: Stars) -> float:
    if stars.eccentricity == 0.0:
        return nan
    return degrees(atan2(stars.get("esinw"), stars.get("ecosw"))) % 360.0


def _radius(star: int) -> Callable[[Stars], float]:
    return lambda stars: stars.radii[star - 1] * stars.axis


def _logg(star: int) -> Callable[[Stars], float]:
    """Needs no mass: only the light curve and how the other star moves."""

    def logg(stars: Stars) -> float:
        amplitude, period = stars.get(f"K{3 - star}"), stars.get("period")
        if not np.isfinite(amplitude):
            return float(absolute.logg(stars.masses[star - 1], _radius(star)(stars)))
        radius = stars.radii[star - 1]
        return float(absolute.logg_companion(period, amplitude, radius=radius, **stars.tilt))

    return logg


def _density(star: int) -> Callable[[Stars], float]:
    def density(stars: Stars) -> float:
        both = absolute.mean_densities(stars.get("period"), *stars.radii, stars.mass_ratio)
        return float(both[star - 1])

    return density


def _vsync(star: int) -> Callable[[Stars], float]:
    return lambda stars: float(
        absolute.synchronous_velocity(
            _radius(star)(stars), stars.get("period"), stars.get("inclination")
        )
    )


def _luminosity(star: int) -> Callable[[Stars], float]:
    return lambda stars: float(
        absolute.luminosity(_radius(star)(stars), stars.given(f"teff{star}"))
    )


def _mbol(star: int) -> Callable[[Stars], float]:
    return lambda stars: float(absolute.bolometric_magnitude(_luminosity(star)(stars)))


def _distance(stars: Stars) -> float:
    return float(
        absolute.distance(
            stars.given("apparent_magnitude"),
            (_mbol(1)(stars), _mbol(2)(stars)),
            (stars.given("bolometric_correction1"), stars.given("bolometric_correction2")),
            stars.given("extinction"),
        )
    )


def _mean_intensity(stars: Stars, star: int, band: str) -> float:
    coefficients = np.array(stars.system.limb_darkening(star, band))
    return float(LAWS[stars.system.law].mean_intensity(coefficients))


def _mean_brightness(stars: Stars, band: str) -> float:
    ratio = _mean_intensity(stars, 2, band) / _mean_intensity(stars, 1, band)
    return stars.get("surface_brightness_ratio", band) * ratio


def _light_ratio(stars: Stars, band: str) -> float:
    return _mean_brightness(stars, band) * stars.get("radius_ratio") ** 2


FUNCTIONS: Mapping[str, Callable[[Stars], float]] = {
    "r1": lambda stars: stars.radii[0],
    "r2": lambda stars: stars.radii[1],
    "impact1": lambda stars: _impact(stars, 1.0),
    "impact2": lambda stars: _impact(stars, -1.0),
    "eccentricity": lambda stars: stars.eccentricity,
    "omega": _omega,
    "mass_ratio": lambda stars: stars.mass_ratio,
    "a": lambda stars: stars.axis,
    "M1": lambda stars: stars.masses[0],
    "M2": lambda stars: stars.masses[1],
    "R1": _radius(1),
    "R2": _radius(2),
    "logg1": _logg(1),
    "logg2": _logg(2),
    "density1": _density(1),
    "density2": _density(2),
    "vsync1": _vsync(1),
    "vsync2": _vsync(2),
    "teff1": lambda stars: stars.given("teff1"),
    "teff2": lambda stars: stars.given("teff2"),
    "L1": _luminosity(1),
    "L2": _luminosity(2),
    "Mbol1": _mbol(1),
    "Mbol2": _mbol(2),
    "distance": _distance,
    "T14_1": lambda stars: stars.eclipses[0].duration * stars.get("period"),
    "T23_1": lambda stars: stars.eclipses[0].inner_duration * stars.get("period"),
    "T14_2": lambda stars: stars.eclipses[1].duration * stars.get("period"),
    "T23_2": lambda stars: stars.eclipses[1].inner_duration * stars.get("period"),
    "depth1": lambda stars: stars.eclipses[0].depth,
    "depth2": lambda stars: stars.eclipses[1].depth,
}
BAND_FUNCTIONS: Mapping[str, Callable[[Stars, str], float]] = {
    "light_ratio": _light_ratio,
    "mean_surface_brightness_ratio": _mean_brightness,
}


def derived_values(system: System, assumed: Mapping[str, float] | None = None) -> dict[str, float]:
    """Every derived quantity by key; NaN where the system cannot give it, or is no orbit at all."""
    stars = Stars(system, assumed or {})
    if stars.eccentricity >= 1.0:  # a step of an error beyond what an orbit can be
        bands = (key(name, band) for name in BAND_FUNCTIONS for band in system.bands)
        return dict.fromkeys((*FUNCTIONS, *bands), nan)
    found = {name: function(stars) for name, function in FUNCTIONS.items()}
    for name, by_band in BAND_FUNCTIONS.items():
        found |= {key(name, band): by_band(stars, band) for band in system.bands}
    return found


def derived_value(system: System, name: str, assumed: Mapping[str, float] | None = None) -> float:
    """One derived quantity by key (`M1`, `light_ratio[V]`); KeyError if there is no such."""
    parsed, stars = parse_key(name), Stars(system, assumed or {})
    if QUANTITIES[parsed.name].scope == BAND:
        return BAND_FUNCTIONS[parsed.name](stars, parsed.label or system.bands[0])
    return FUNCTIONS[parsed.name](stars)


def assumed_inputs(plan: Plan, system: System) -> dict[str, tuple[float, float]]:
    """Inputs from outside the data (value, sigma): temperatures, magnitudes, an assumed M1 or mass ratio."""
    found = {name: getattr(plan, name) for name in MEASURED if getattr(plan, name) is not None}
    if "K1" in system.values and "K2" in system.values:
        return found
    for prior in plan.priors:
        if prior.name in ASSUMABLE:
            found[prior.name] = (prior.values[0], prior.sigmas[0])
    return found


def absent_words(system: System, plan: Plan) -> dict[str, str]:
    """For each quantity of the system that is not there: why."""
    assumed = {name: value for name, (value, _) in assumed_inputs(plan, system).items()}
    values = derived_values(system, assumed)
    unmeasured = {
        name: f"the velocities of star {name[-1]} were not measured"
        for name in ("K1", "K2", "gamma1", "gamma2")
        if name not in system.values
    }
    return unmeasured | {
        name: _why_absent(name, system) for name, value in values.items() if not np.isfinite(value)
    }


def _why_absent(name: str, system: System) -> str:
    """Plain words for a quantity that the data cannot give."""
    both = "K1" in system.values and "K2" in system.values
    if name in ("T23_1", "T23_2"):
        return "the eclipse is partial: there is no inner contact"
    if name in ("T14_2", "depth2", "T14_1", "depth1"):
        return "the stars do not overlap at that conjunction"
    if name == "omega":
        return "the orbit is circular: it has no periastron"
    if name in ("teff1", "teff2", "L1", "L2", "Mbol1", "Mbol2"):
        return (
            "no effective temperature was given"
            if both
            else "needs an absolute radius and a temperature"
        )
    if name == "distance":
        return "needs both luminosities, an apparent magnitude, bolometric corrections and the extinction"
    if name in ("density1", "density2"):
        return "needs a mass ratio: none was measured or assumed"
    if not both and "K1" in system.values:
        return "only star 1 was measured: needs an assumed M1 or mass ratio"
    if "K2" in system.values:
        return "only star 2 was measured: needs the velocities of star 1"
    return "no velocities: no scale"
