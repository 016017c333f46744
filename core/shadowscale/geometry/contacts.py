"""Contact times of an orbit, and the classical solution that goes the other way.

Outer contacts lie where the discs touch from outside, delta = r1 + r2, inner ones where they touch from
inside, delta = |r1 - r2|. All are found on the exact orbit, in the true longitude, and turned into time
in closed form.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from math import cos, isfinite, nan, pi, radians, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.orbit.longitude import cycles_at, distance_at, eccentricity_and_omega

Floats = NDArray[np.float64]

_STEP = 0.02  # [rad] first step of the search for a contact
_EDGE = pi / 2  # the nodes: half of the orbit belongs to each eclipse


@dataclass(frozen=True, eq=False)
class EclipseTiming:
    """One eclipse as measured, or as the markers lie; phases in cycles from the epoch.

    Attributes
    ----------
    middle, duration : float [cycles]
        Middle, and first to fourth contact.
    ingress, egress : float [cycles]
        First to second and third to fourth contact; in a partial eclipse half the duration each.
    depth : float
        Light lost at the middle, fraction of the light outside eclipse.
    flat : bool
        Inner contacts were seen (total or annular).
    covariance : (5, 5) float64
        Of middle, duration, ingress, egress, depth.
    """

    middle: float
    duration: float
    ingress: float
    egress: float
    depth: float
    flat: bool
    covariance: Floats

    @property
    def contacts(self) -> tuple[float, float, float, float]:
        """Phases of first to fourth contact."""
        first = self.middle - self.duration / 2
        fourth = self.middle + self.duration / 2
        return first, first + self.ingress, fourth - self.egress, fourth


@dataclass(frozen=True, eq=False)
class ContactSolution:
    """What contact times and depths alone say: a result of its own, and the start of the full fit.

    values, errors : mapping of quantity name to float
        `r1 r2 inclination radius_sum radius_ratio ecosw esinw T14_1 T23_1 T14_2 T23_2 depth1 depth2`
        and, with depths, `light_ratio`; days for durations, degrees; a quantity that the contacts
        cannot give is missing from both.
    names, covariance : names and (m, m) float64
        Of the quantities in `values` that have errors.
    others : tuple of mappings
        Further solutions of the same times and depths (k and 1/k above all).
    notes : tuple of str
        What is undetermined, in plain words.
    """

    primary: EclipseTiming
    secondary: EclipseTiming | None
    values: Mapping[str, float]
    errors: Mapping[str, float]
    names: tuple[str, ...]
    covariance: Floats
    others: tuple[Mapping[str, float], ...] = ()
    notes: tuple[str, ...] = field(default=())


@dataclass(frozen=True)
class EclipseContacts:
    """One eclipse of a known orbit; phases in cycles from primary conjunction, NaN where there is none.

    Attributes
    ----------
    middle : float [cycles]
        Where the centres are closest; not quite conjunction if e > 0 and i < 90 deg.
    separation : float [a]
        Of the centres then, eclipse or not.
    first, second, third, fourth : float [cycles]
        Outer, inner, inner and outer contact.
    """

    middle: float
    separation: float
    first: float = nan
    second: float = nan
    third: float = nan
    fourth: float = nan

    @property
    def duration(self) -> float:
        """First to fourth contact, T14 [cycles]."""
        return self.fourth - self.first

    @property
    def inner_duration(self) -> float:
        """Second to third contact, T23 [cycles]."""
        return self.third - self.second


@dataclass(frozen=True)
class ContactPhases:
    """Both eclipses of an orbit."""

    primary: EclipseContacts
    secondary: EclipseContacts


def contact_phases(
    radius_sum: float,
    radius_ratio: float,
    inclination_deg: float,
    ecosw: float = 0.0,
    esinw: float = 0.0,
    *,
    light_time: float = 0.0,
) -> ContactPhases:
    """Contacts of both eclipses on the exact orbit.

    Parameters
    ----------
    radius_sum : float [a]
    radius_ratio : float
        Star 2 over star 1.
    inclination_deg : float [deg]
    ecosw, esinw : float
    light_time : float [cycles]
        (a2 - a1)/(c P), see `shadowscale.orbit.elements.light_time_cycles`.

    Returns
    -------
    ContactPhases
        Phases of the primary lie around 0, those of the secondary around its middle in 0...1. All are
        NaN where there is no eclipse, the inner ones where it is partial, the outer ones also where the
        stars would touch.

    Raises
    ------
    ValueError
        If a value is out of range.
    """
    if not (isfinite(radius_sum) and radius_sum > 0):
        raise ValueError(f"radius_sum: expected a positive number, found {radius_sum}")
    if not (isfinite(radius_ratio) and radius_ratio > 0):
        raise ValueError(f"radius_ratio: expected a positive number, found {radius_ratio}")
    if not 0 <= inclination_deg <= 90:
        raise ValueError(f"inclination_deg: expected 0...90, found {inclination_deg}")
    eccentricity_and_omega(ecosw, esinw)
    cos2i = 0.0 if inclination_deg == 90 else cos(radians(inclination_deg)) ** 2
    inner = radius_sum * abs(1 - radius_ratio) / (1 + radius_ratio)
    half_orbits = (_HalfOrbit(sign, cos2i, ecosw, esinw, light_time) for sign in (1, -1))
    primary, secondary = (half.contacts(radius_sum, inner) for half in half_orbits)
    return ContactPhases(primary, secondary)


def contact_solution(
    primary: EclipseTiming,
    secondary: EclipseTiming | None,
    *,
    period: float,
    light_below1: float | None = None,
    light_below2: float | None = None,
) -> ContactSolution:
    """The classical solution: geometry from contact times and depths alone.

    Parameters
    ----------
    primary, secondary : EclipseTiming
        As measured, or as the markers lie; None if no secondary was seen.
    period : float [d]
    light_below1, light_below2 : float, optional
        Light left at the middle of each eclipse, fraction of the light outside; instead of the depths.

    Returns
    -------
    ContactSolution
        Its notes say what is undetermined; `others` holds what fits as well. Noise that makes the
        numbers impossible gives the nearest pair of stars and a note, never an error.

    Raises
    ------
    ValueError
        If a number is not finite, a duration not between 0 and half a cycle, or both eclipses the same.

    Notes
    -----
    All contacts and depths are solved together on the exact orbit by least squares; with two eclipses
    seen e cos w and e sin w are found too, with one a circular orbit is taken. No third light is
    assumed unless total and annular depths cannot be had without.
    """
    from shadowscale.geometry.classical import classical_solution

    return classical_solution(
        primary,
        secondary,
        period=period,
        light_below1=light_below1,
        light_below2=light_below2,
    )


def starting_points(
    primary: EclipseTiming, secondary: EclipseTiming | None, *, period: float
) -> tuple[dict[str, float], ...]:
    """Several places from which the full fit may start, the most likely first.

    Parameters
    ----------
    primary, secondary : EclipseTiming
    period : float [d]

    Returns
    -------
    tuple of dict
        Each with `radius_sum radius_ratio inclination ecosw esinw surface_brightness_ratio`, all of them
        two stars that make eclipses of about these durations: both sides of k = 1, and where the
        eclipses are partial several inclinations.

    Raises
    ------
    ValueError
        As `contact_solution`.
    """
    from shadowscale.geometry.starts import starts

    return starts(primary, secondary, period=period)


@dataclass(frozen=True)
class _HalfOrbit:
    """The half of the orbit around one conjunction; x is the true longitude from there.

    sign : +1 around primary (L = pi/2), -1 around secondary (L = -pi/2).
    """

    sign: int
    cos2i: float
    ecosw: float
    esinw: float
    light_time: float

    def separation(self, x: float) -> float:
        """Of the centres on the sky [a]; sin^2 x keeps its digits near conjunction."""
        return self.distance(x) * sqrt(self.cos2i + (1 - self.cos2i) * sin(x) ** 2)

    def distance(self, x: float) -> float:
        """Of the stars in space [a]."""
        return distance_at(self.sign * _EDGE + x, ecosw=self.ecosw, esinw=self.esinw)

    def slope(self, x: float) -> float:
        """Has the sign of d separation/dx, and is smooth."""
        h, k = self.sign * self.esinw, self.sign * self.ecosw
        ahead = (1 - self.cos2i) * sin(x) * cos(x) * (1 + h * cos(x) - k * sin(x))
        return ahead + (h * sin(x) + k * cos(x)) * (self.cos2i + (1 - self.cos2i) * sin(x) ** 2)

    def contacts(self, outer: float, inner: float) -> EclipseContacts:
        """The eclipse, with what it has of contacts."""
        x = self.closest()
        least = self.separation(x)
        if not least < outer:
            return EclipseContacts(nan, least)
        middle = self.phase(x)
        first, fourth = self.crossings(x, outer)
        second, third = self.crossings(x, inner) if least < inner else (nan, nan)
        near = [middle + _wrapped(self.phase(at) - middle) for at in (first, second, third, fourth)]
        return EclipseContacts(middle, least, *near)

    def closest(self) -> float:
        """Where the separation is smallest: secants from conjunction, a search where they fail."""
        last, here = 1e-3, 0.0
        f_last, f_here = self.slope(last), self.slope(here)
        for _ in range(12):
            if f_here == 0 or abs(here - last) < 1e-15:
                return here
            if not f_here * f_last < 0 and not (f_here - f_last) * (here - last) > 0:
                break  # not a smallest one ahead
            step = -f_here * (here - last) / (f_here - f_last)
            last, f_last, here = here, f_here, here + step
            if not abs(here) < 0.8 * _EDGE:
                break
            f_here = self.slope(here)
        width = _EDGE / 48
        low = min((width * step for step in range(-47, 48)), key=self.separation)
        return _root(self.slope, low - width, low + width)

    def crossings(self, closest: float, limit: float) -> tuple[float, float]:
        """Where the separation passes a limit, before and after its smallest."""
        before, after = (self._crossing(closest, limit, step) for step in (-_STEP, _STEP))
        return before, after

    def _crossing(self, closest: float, limit: float, step: float) -> float:
        inside = closest
        while abs(inside) < _EDGE:
            outside = min(max(inside + step, -_EDGE), _EDGE)
            if self.separation(outside) > limit:
                return _root(lambda x: self.separation(x) - limit, inside, outside)
            inside, step = outside, 1.5 * step
        return nan

    def phase(self, x: float) -> float:
        """Observed cycles from primary conjunction."""
        if not isfinite(x):
            return nan
        emitted = cycles_at(self.sign * _EDGE + x, ecosw=self.ecosw, esinw=self.esinw)
        if self.sign < 0:
            emitted %= 1.0
        return emitted + self.late(x)

    def late(self, x: float) -> float:
        """Light time against primary conjunction, t - tau = light_time (z(t) - z_primary), z linear."""
        if self.light_time == 0.0:
            return 0.0
        sin_i = sqrt(1 - self.cos2i)
        eta2 = 1 - self.ecosw**2 - self.esinw**2
        z = -self.sign * self.distance(x) * cos(x) * sin_i
        z_primary = -eta2 / (1 + self.esinw) * sin_i
        speed = -2 * pi * sin_i * (-self.sign * sin(x) + self.ecosw) / sqrt(eta2)
        return self.light_time * (z - z_primary) / (1 - self.light_time * speed)


def _wrapped(cycles: float) -> float:
    return cycles - round(cycles) if isfinite(cycles) else nan


def _root(function: Callable[[float], float], low: float, high: float) -> float:
    """Zero between two places of different sign: false position with halved ends, then bisection."""
    f_low, f_high = function(low), function(high)
    if f_low == 0 or f_low * f_high > 0:
        return low
    for count in range(100):
        middle = (low * f_high - high * f_low) / (f_high - f_low)
        if count % 4 == 3 or not min(low, high) < middle < max(low, high):
            middle = (low + high) / 2
        value = function(middle)
        if value * f_high < 0:
            low, f_low = high, f_high
        else:
            f_low /= 2
        high, f_high = middle, value
        if value == 0 or abs(high - low) < 1e-16:
            break
    return high
