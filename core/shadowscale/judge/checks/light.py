"""Third light and limb darkening: possible values, and what they do to the radii."""

from __future__ import annotations

from collections.abc import Mapping
from math import isfinite, nan, sqrt

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import TINY, Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.words import listed, number, percent
from shadowscale.light.laws import LAWS
from shadowscale.quantities import key, parse_key, written

SURE = 3.0  # sigmas
HEIGHTS = np.linspace(0.0, 1.0, 101)  # mu, limb to centre
SMALL_RISE = 0.02  # of the central intensity: a limb brighter by less is rounding of the law
AT_EDGE = 1e-6
STEP = 1e-5
SMALL_SHIFT = 0.005  # of a radius: below it limb darkening may rule the error without harm
REMEDY = "Hold the coefficients at published values, or give them priors."


def third_light(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Most negative third light, in sigmas (or its value where held fixed)."""
    found = {
        band: (evidence.value("third_light", band), evidence.sigma("third_light", band))
        for band in evidence.bands
    }
    found = {band: pair for band, pair in found.items() if isfinite(pair[0])}
    if not found:
        return check.silent("the model has no third light.")
    depths = {band: value / error if error > 0 else value for band, (value, error) in found.items()}
    worst = min(depths, key=lambda band: depths[band])
    value, error = found[worst]
    if value < 0 and not error > 0 and not evidence.is_free("third_light", worst):
        return check.warned(
            f"Third light in band {worst} was held at {number(value)}, and no light is negative.",
            value,
        )
    if error > 0 and value / error < -(check.limit or SURE):
        return check.failed(
            f"Third light in band {worst} is {_third_words(value, error)}: negative by {number(-value / error)} sigma. "
            "The eclipses are deeper than two stars allow: too much sky or neighbour's light was taken off, or the model is wrong.",
            value / error,
        )
    shown = listed([f"{_third_words(*pair)} in {band}" for band, pair in found.items()])
    return check.passed(f"Third light: {shown}.", depths[worst])


def _told(evidence: Evidence) -> Mapping[str, float]:
    """The numbers that the fit told of third light."""
    return next((d.numbers for d in evidence.solution.decisions if d.what == "third light"), {})


def _third_words(value: float, error: float) -> str:
    if not error > 0:
        return f"{percent(value)} (held)"
    return f"{written(100 * value, 100 * error, 100 * error)} %"


def third_light_and_inclination(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Correlation of a free third light with the inclination (or k), the largest of all bands."""
    found = {}
    for band in evidence.bands:
        if not evidence.is_free("third_light", band):
            continue
        for partner in ("inclination", "radius_ratio"):
            size = abs(evidence.correlation(key("third_light", band), partner))
            if isfinite(size):
                found[band, partner] = size
    if not found:
        return check.silent("third light was held fixed.")
    (band, partner), size = max(found.items(), key=lambda item: item[1])
    words = f"Third light in band {band} and the {_plain(partner)} go together with a correlation of {size:.2f}"
    if size > (check.limit or 1.0):
        return check.warned(
            f"{words}: the curve hardly tells them apart{_price(evidence)}. Look at images or a star catalogue: hold third_light "
            "at zero if no other star is in the aperture, or give what you find as a prior.",
            size,
        )
    return check.passed(f"{words}, which is harmless.", size)


def _price(evidence: Evidence) -> str:
    """What it costs not to know third light, where the fit told."""
    numbers, ratio = _told(evidence), evidence.value("radius_ratio")
    held = numbers.get("sigma_radius_ratio_held", nan) / ratio
    free = numbers.get("sigma_radius_ratio_free", nan) / ratio
    if not (held > 0 and free > 0):
        return ""
    return f", and the ratio of radii is known to {percent(free)} where it could be {percent(held)}"


def _plain(name: str) -> str:
    return {"radius_ratio": "ratio of radii"}.get(name, name)


def limb_darkening(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Lowest intensity of any disc, and whether a disc is brighter towards its limb."""
    law = LAWS.get(evidence.solution.system.law)
    discs = _discs(evidence)
    if law is None or not discs:
        return check.silent("the solution names no limb-darkening law or coefficients.")
    lowest, rise = {}, {}
    for name, coefficients in discs.items():
        if len(coefficients) != len(law.coefficients) or not np.all(np.isfinite(coefficients)):
            return check.failed(f"Limb darkening of {name} has missing or unusable coefficients.")
        curve = np.asarray(law.intensity(HEIGHTS, np.asarray(coefficients)), dtype=float)
        if not np.all(np.isfinite(curve)):
            return check.failed(f"Limb darkening of {name} gives no finite brightness.")
        lowest[name] = float(curve.min())
        rise[name] = float(np.max(np.maximum.accumulate(curve) - curve))
    dark, bright = min(lowest, key=lambda n: lowest[n]), max(rise, key=lambda n: rise[n])
    if lowest[dark] < -SMALL_RISE:
        return _dark_limb(evidence, check, name=dark, lowest=lowest[dark])
    if rise[bright] > SMALL_RISE:
        return check.warned(
            f"Limb darkening of {bright} makes the disc brighter towards the limb by {percent(rise[bright])}, as no normal star is. "
            f"{REMEDY}",
            lowest[dark],
        )
    stuck = [name for name in discs if _at_edge(evidence, name, discs[name])]
    if stuck:
        return check.warned(
            f"Limb darkening of {listed(stuck)} was pushed to the edge of what is possible: the curve does not fix it. "
            f"{REMEDY}",
            lowest[dark],
        )
    return check.passed("Every disc darkens from centre to limb as a star does.", lowest[dark])


def _dark_limb(
    evidence: Evidence, check: Check, *, name: str, lowest: float
) -> tuple[Finding, ...]:
    """A limb darker than black: a failure where it is so by more than its error."""
    error = limb_error(evidence, name)
    words = f"Limb darkening of {name} makes its limb darker than black ({percent(lowest)} of the centre"
    if error > 0 and -lowest < SURE * error:
        return check.warned(
            f"{words}, within its error of {percent(error)}): the curve does not fix it. {REMEDY}",
            lowest,
        )
    return check.failed(f"{words}). {REMEDY}", lowest)


def limb_error(evidence: Evidence, name: str) -> float:
    """Error of the lowest intensity of a disc from the covariance of its coefficients; 0 where held."""
    star, band = _star_and_band(name)
    coefficients = np.array(_discs(evidence)[name])
    law = LAWS[evidence.solution.system.law]
    keys = [key(f"limb_darkening{star}", band, n + 1) for n in range(coefficients.size)]
    place = int(np.argmin(law.intensity(HEIGHTS, coefficients)))
    height, gradient = HEIGHTS[place : place + 1], np.zeros(coefficients.size)
    for n in range(coefficients.size):
        step = np.zeros(coefficients.size)
        step[n] = STEP
        high, low = (law.intensity(height, coefficients + move)[0] for move in (step, -step))
        gradient[n] = (high - low) / (2 * STEP)
    matrix = np.nan_to_num([[evidence.covariance_of(a, b) for a in keys] for b in keys])
    return sqrt(max(float(gradient @ matrix @ gradient), 0.0))


def _star_and_band(name: str) -> tuple[str, str]:
    """The parts of a disc's name."""
    return name.split()[1], name.split("band ", 1)[1]


def _discs(evidence: Evidence) -> dict[str, tuple[float, ...]]:
    system = evidence.solution.system
    found = {
        f"star {star} in band {band}": system.limb_darkening(star, band)
        for star in (1, 2)
        for band in evidence.bands
    }
    return {name: coefficients for name, coefficients in found.items() if coefficients}


def _at_edge(evidence: Evidence, name: str, coefficients: tuple[float, ...]) -> bool:
    """Whether free coefficients stand at the edge of the law's own range."""
    law = LAWS[evidence.solution.system.law]
    star, band = _star_and_band(name)
    if not any(k.startswith(f"limb_darkening{star}[{band}]") for k in evidence.place):
        return False
    pair = np.asarray(law.to_sampling(np.asarray(coefficients)), dtype=float)
    return any(
        isfinite(bound) and abs(value - bound) < AT_EDGE
        for value, bounds in zip(pair, law.sampling_bounds)
        for bound in bounds
    )


def limb_darkening_and_radii(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Share of the radii's variance that is due to the limb darkening."""
    names = [name for name in evidence.place if _is_limb(name) and _positive(evidence, name)]
    if not names:
        return check.silent(
            "limb darkening was held fixed, so the errors of the radii hold no part of it; coefficients off by 0.1 often "
            "move radii by some tenths of a per cent."
        )
    shares = {star: limb_share(evidence, star, names) for star in (1, 2)}
    shares = {star: share for star, share in shares.items() if isfinite(share)}
    if not shares:
        return check.silent("the radii have no errors.")
    star = max(shares, key=lambda s: shares[s])
    share = shares[star]
    shift = sqrt(share) * evidence.sigma(f"r{star}") / max(evidence.radii[star - 1], TINY)
    words = f"Limb darkening makes {percent(share)} of the variance of r{star}"
    if share <= (check.limit or 1.0):
        return check.passed(f"{words}, less than the rest.", share)
    if shift < SMALL_SHIFT:
        return check.passed(f"{words}, but that is only {percent(shift)} of the radius.", share)
    return check.warned(
        f"{words}, more than all else together, and {percent(shift)} of the radius. Published coefficients "
        f"as priors could shrink its error to {percent(sqrt(1 - share))} of what it is.",
        share,
    )


def _is_limb(name: str) -> bool:
    return name.startswith("limb_darkening")


def _positive(evidence: Evidence, name: str) -> bool:
    variance = evidence.covariance_of(name, name)
    return isfinite(variance) and variance > 0 and parse_key(name).number is not None


def limb_share(evidence: Evidence, star: int, names: list[str]) -> float:
    """Squared multiple correlation of a fractional radius with the limb-darkening coefficients.

    With C the covariance and g the radius's gradient: c = C_LL^-1 C_Lr, share = C_rL c / C_rr.
    """
    gradient = radius_gradient(evidence, star)
    rows = [evidence.place[name] for name in names]
    matrix = np.nan_to_num(evidence.covariance)
    variance = float(gradient @ matrix @ gradient)
    if not variance > 0:
        return float("nan")
    block, cross = matrix[np.ix_(rows, rows)], (matrix @ gradient)[rows]
    scale = np.sqrt(np.diag(block))
    solved = np.linalg.pinv(block / np.outer(scale, scale), hermitian=True) @ (cross / scale)
    return float(np.clip((cross / scale) @ solved / variance, 0.0, 1.0))


def radius_gradient(evidence: Evidence, star: int) -> Floats:
    """Derivatives of a fractional radius with respect to the free keys."""
    total, ratio = evidence.value("radius_sum"), evidence.value("radius_ratio")
    gradient = np.zeros(evidence.covariance.shape[0])
    slopes = {
        "radius_sum": (1 if star == 1 else ratio) / (1 + ratio),
        "radius_ratio": (-1 if star == 1 else 1) * total / (1 + ratio) ** 2,
    }
    for name, slope in slopes.items():
        if name in evidence.place and isfinite(slope):
            gradient[evidence.place[name]] = slope
    return gradient


CHECKS = (
    Check(
        "third light",
        "Is the third light a possible one?",
        third_light,
        SURE,
        "light is not negative; three sigma (common practice)",
    ),
    Check(
        "third light and inclination",
        "Can third light and inclination be told apart?",
        third_light_and_inclination,
        0.95,
        "correlation of 0.95: each alone would have a third of its error (sqrt(1 - 0.95^2) = 0.31)",
    ),
    Check(
        "limb darkening",
        "Do the discs darken towards their limbs as stars do?",
        limb_darkening,
        0.0,
        "brightness is not negative and falls towards the limb (Kipping 2013, MNRAS 435, 2152, for the quadratic law)",
    ),
    Check(
        "limb darkening and radii",
        "Does the limb darkening move the radii more than their error?",
        limb_darkening_and_radii,
        0.5,
        "half the variance: then limb darkening moves the radius more than everything else together (by definition); "
        "below half a per cent of the radius it does no harm (our choice)",
    ),
)
