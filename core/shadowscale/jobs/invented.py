"""From a description to the system that is simulated."""

from __future__ import annotations

from collections.abc import Mapping
from difflib import get_close_matches
from math import cos, hypot, inf, radians, sin, sqrt
from pathlib import Path

from shadowscale.constants import MASS_FACTOR
from shadowscale.errors import InputError, Problem
from shadowscale.fit.system import System
from shadowscale.jobs.spec import BandSpec, Spec
from shadowscale.light.laws import LAWS
from shadowscale.quantities import QUANTITIES, SYSTEM, key

SHAPE = ("radius_sum", "radius_ratio")
NEEDED = ("period", "epoch", "inclination")
EFFECTS = tuple(
    f"{name}{star}" for name in ("ellipsoidal", "reflection", "beaming") for star in (1, 2)
)
OTHER_FORMS = ("r1", "r2", "eccentricity", "omega", "mass_ratio", "M1", "M2")
TAKEN = (
    *(name for name, item in QUANTITIES.items() if item.basic and item.scope == SYSTEM),
    *OTHER_FORMS,
)


class _Given:
    """The values of a description, taken one by one; complains in its name."""

    def __init__(self, values: Mapping[str, float], path: Path) -> None:
        self._values, self._path = dict(values), path
        for name, value in values.items():
            if name not in TAKEN:
                near = get_close_matches(name, TAKEN, n=1)
                expected = repr(near[0]) if near else "one of " + ", ".join(TAKEN)
                raise self.wrong(f"system.{name}", expected, repr(name))
            quantity = QUANTITIES[name]
            if not quantity.lower <= value <= quantity.upper:
                limits = f"a number from {quantity.lower:g} to {quantity.upper:g}"
                raise self.wrong(f"system.{name}", limits, f"{value:g}")

    def wrong(self, place: str, expected: str, found: str) -> InputError:
        """An error about a place in the description."""
        return InputError(Problem(str(self._path), expected, found, column=place))

    def has(self, *names: str) -> bool:
        """Whether any of the names was given."""
        return any(name in self._values for name in names)

    def take(self, name: str, default: float | None = None) -> float:
        """A value; the default where there is none."""
        if name in self._values:
            return self._values[name]
        if default is None:
            raise self.wrong("system", f"a value for {name!r}", "none")
        return default

    def either(self, one: tuple[str, ...], other: tuple[str, ...]) -> bool:
        """True for the first form; an error where both are mixed."""
        if self.has(*one) and self.has(*other):
            words = f"either {', '.join(one)} or {', '.join(other)}"
            raise self.wrong("system", words, "both")
        return not self.has(*other)


def invented_system(spec: Spec, path: Path) -> System:
    """The system of a description.

    Raises
    ------
    InputError
        A value is missing, given twice, or impossible.
    """
    given = _Given(spec.system, path)
    values = {name: given.take(name) for name in NEEDED}
    values |= _sizes(given) | _orbit(given)
    values |= _amplitudes(given, values)
    if spec.law not in LAWS:
        raise given.wrong("law", "one of " + ", ".join(LAWS), repr(spec.law))
    for band, item in spec.bands.items():
        values |= _band_values(given, band, item, law=spec.law)
    if not spec.bands:
        raise given.wrong("bands", "at least one band", "none")
    return System(
        values=values,
        free=(),
        law=spec.law,
        bands=tuple(spec.bands),
        sources=() if spec.velocities is None else tuple(s.name for s in spec.velocities.sources),
        exposure=spec.exposure,
        light_time=spec.light_time,
    )


def _sizes(given: _Given) -> dict[str, float]:
    if given.either(SHAPE, ("r1", "r2")):
        total, ratio = (given.take(name) for name in SHAPE)
    else:
        r1, r2 = given.take("r1"), given.take("r2")
        if r1 <= 0 or r2 <= 0:
            raise given.wrong("system", "r1 and r2 above 0", f"{r1:g} and {r2:g}")
        total, ratio = r1 + r2, r2 / r1
    return {"radius_sum": total, "radius_ratio": ratio}


def _orbit(given: _Given) -> dict[str, float]:
    if given.either(("ecosw", "esinw"), ("eccentricity", "omega")):
        ecosw, esinw = given.take("ecosw", 0.0), given.take("esinw", 0.0)
    else:
        size, angle = given.take("eccentricity"), radians(given.take("omega"))
        ecosw, esinw = size * cos(angle), size * sin(angle)
    size = hypot(ecosw, esinw)
    total = _sizes(given)["radius_sum"]
    if size >= 1 or total >= 1 - size:
        words = "stars that do not touch: radius_sum below 1 - eccentricity"
        raise given.wrong("system", words, f"{total:g} and {size:g}")
    return {"ecosw": ecosw, "esinw": esinw}


def _amplitudes(given: _Given, values: Mapping[str, float]) -> dict[str, float]:
    """K1, K2 and gammas as far as the description tells them."""
    if given.either(("K1", "K2"), ("M1", "M2")):
        found = {name: given.take(name) for name in ("K1", "K2") if given.has(name)}
        if given.has("mass_ratio") and set(found) == {"K1"}:
            ratio = given.take("mass_ratio")
            found["K2"] = found["K1"] / ratio if ratio > 0 else inf
        elif given.has("mass_ratio"):
            raise given.wrong("system.mass_ratio", "K1 alone beside it", ", ".join(found) or "none")
    else:
        found = _from_masses(given, values)
    if not found:
        return {}
    gamma = given.take("gamma1", 0.0)
    return {**found, "gamma1": gamma, "gamma2": given.take("gamma2", gamma)}


def _from_masses(given: _Given, values: Mapping[str, float]) -> dict[str, float]:
    """Kepler's third law backwards: M sin^3 i of both from K1, K2."""
    mass1, mass2 = given.take("M1"), given.take("M2")
    total = mass1 + mass2
    if min(mass1, mass2) <= 0:
        raise given.wrong("system", "M1 and M2 above 0", f"{mass1:g} and {mass2:g}")
    root = sqrt(1 - values["ecosw"] ** 2 - values["esinw"] ** 2)
    sine = sin(radians(values["inclination"]))
    both = (total / (MASS_FACTOR * values["period"])) ** (1 / 3) * sine / root
    return {"K1": both * mass2 / total, "K2": both * mass1 / total}


def _band_values(given: _Given, band: str, item: BandSpec, *, law: str) -> dict[str, float]:
    names = LAWS[law].coefficients
    found = {
        key(name, band): getattr(item, name)
        for name in ("surface_brightness_ratio", "third_light", *EFFECTS)
    }
    for star, coefficients in ((1, item.limb_darkening1), (2, item.limb_darkening2)):
        place = f"bands.{band}.limb_darkening{star}"
        if len(coefficients) != len(names):
            words = f"{len(names)} coefficients ({', '.join(names)}) of the {law} law"
            raise given.wrong(place, words, str(len(coefficients)))
        for number, value in enumerate(coefficients, 1):
            found[key(f"limb_darkening{star}", band, number)] = value
    return {name: value for name, value in found.items() if value or not name.startswith(EFFECTS)}
