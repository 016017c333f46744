"""Whether the stars are round enough for two spheres."""

from __future__ import annotations

from math import inf, isfinite, nan, sqrt

import numpy as np

from shadowscale.data.photometry import Floats, Ints
from shadowscale.geometry import roche
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import TINY, Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.words import listed, number, percent
from shadowscale.light.proximity import ellipsoidal_amplitude, gravity_darkening
from shadowscale.quantities import written

FULL = 0.95  # fill-out from which a lobe may as well be full
USUAL_RATIOS = (0.2, 5.0)  # mass ratios that are tried where none was measured
SKY_SHARE = (
    0.25  # mean radius seen in eclipse is smaller than the true one by this share of the oblateness
)
GRAVITY_DARKENING = 0.32  # Lucy 1967, Z. Astrophys. 65, 89, convective envelopes (from memory)
FEWEST_OUTSIDE = 20


def fill_out(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Radius over the Roche lobe's at periastron, of the fuller star."""
    q, how = evidence.mass_ratio
    fills = lobe_shares(evidence, q)
    if not all(map(isfinite, fills)):
        return check.failed(
            "The radii are not known, so neither is their share of the Roche lobes."
        )
    worst = max(fills)
    star = 1 + fills.index(worst)
    when = " at periastron" if evidence.eccentricity > 0.01 else ""
    words = (
        f"Star 1 reaches to {percent(fills[0])} and star 2 to {percent(fills[1])} of the radius of its Roche lobe{when}, "
        f"{_ratio_words(q, how)}"
    )
    if worst >= FULL and _loose(evidence):
        return check.failed(
            f"{words}: the fit has ended where star {star} fills its lobe, but with a ratio of radii that it hardly knows. "
            "Hold the ratio of radii at a likely value, or give a light ratio from spectra, and solve again.",
            worst,
            limit=FULL,
            fatal=True,
        )
    if worst >= FULL:
        return check.failed(
            f"{words}: star {star} fills its lobe. This pair is semi-detached or in contact; its stars are not "
            "spheres, and no radii can be quoted as measured from this model.",
            worst,
            limit=FULL,
            fatal=True,
        )
    if worst > (check.limit or FULL):
        return check.warned(
            f"{words}: star {star} is drawn out towards the other, and a sphere gives its radius only to several per cent.",
            worst,
        )
    hidden = _lobe_filling_ratio(evidence) if how == "unknown" else ""
    if hidden:
        return check.warned(f"{words}. {hidden}", worst)
    return check.passed(f"{words}: both stars are well inside.", worst)


def lobe_shares(evidence: Evidence, q: float) -> tuple[float, float]:
    """Radius over lobe radius at periastron of both stars, for the mass ratio q = M2/M1."""
    if not _usable(evidence):
        return nan, nan
    first, second = (
        float(roche.fill_out(radius, ratio, eccentricity=evidence.eccentricity))
        for radius, ratio in zip(evidence.radii, (1 / q, q))
    )
    return first, second


def flattenings(evidence: Evidence, q: float) -> tuple[float, float]:
    """Oblateness of both stars at periastron, for the mass ratio q = M2/M1."""
    if not _usable(evidence):
        return nan, nan
    first, second = (
        float(roche.oblateness(radius, ratio, eccentricity=evidence.eccentricity))
        for radius, ratio in zip(evidence.radii, (1 / q, q))
    )
    return first, second


def _usable(evidence: Evidence) -> bool:
    return evidence.eccentricity < 1 and all(0 < radius < inf for radius in evidence.radii)


def _loose(evidence: Evidence) -> bool:
    """Whether the ratio of radii is known no better than to a third."""
    return evidence.sigma("radius_ratio") > abs(evidence.value("radius_ratio")) / 3


def _ratio_words(q: float, how: str) -> str:
    if how == "unknown":
        return "for equal masses (no mass ratio was measured)"
    return f"for a mass ratio of {number(q)}" + (" (assumed)" if how == "assumed" else "")


def _lobe_filling_ratio(evidence: Evidence) -> str:
    """Says at which usual mass ratio a star would fill its lobe; empty where at none."""
    low, high = USUAL_RATIOS
    for star, q, words in ((2, low, "smaller"), (1, high, "larger")):
        if lobe_shares(evidence, q)[star - 1] >= FULL:
            edge = _edge(evidence, star, low, high)
            return (
                f"If M2/M1 were {number(edge)} or {words}, star {star} would fill its lobe and this model would not hold: "
                "velocities of both stars are needed to exclude it."
            )
    return ""


def _edge(evidence: Evidence, star: int, low: float, high: float) -> float:
    """Mass ratio at which a star just fills its lobe."""
    ratios = np.geomspace(low, high, 61)
    full = np.array([lobe_shares(evidence, q)[star - 1] >= FULL for q in ratios])
    return float(ratios[full].max() if star == 2 else ratios[full].min())


def roundness(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Oblateness by tide and rotation at periastron, of the flatter star."""
    q, how = evidence.mass_ratio
    flat = flattenings(evidence, q)
    if not all(map(isfinite, flat)):
        return check.failed("The radii are not known, so neither is the shape of the stars.")
    worst = max(flat)
    words = (
        f"Tide and rotation make star 1 longer than high by {percent(flat[0])} and star 2 by {percent(flat[1])} "
        f"of the radius, {_ratio_words(q, how)}"
    )
    if worst > (check.limit or 0.0):
        return check.failed(
            f"{words}: too much for two spheres. Take the radii as estimates and use a model of deformed stars for final values.",
            worst,
        )
    claimed = _claimed(evidence, flat)
    if claimed:
        return check.warned(f"{words}. {claimed}", worst)
    return check.passed(f"{words}: spheres will do.", worst)


def _claimed(evidence: Evidence, flat: tuple[float, float]) -> str:
    """Says where the shape moves a radius more than its quoted error."""
    radii = listed(
        [
            f"r{star} ({percent(SKY_SHARE * flat[star - 1])} against {percent(quoted)})"
            for star in (1, 2)
            if 0
            < (quoted := evidence.sigma(f"r{star}") / max(evidence.radii[star - 1], 1e-9))
            < SKY_SHARE * flat[star - 1]
        ]
    )
    return f"That shifts the radii by more than their quoted errors: {radii}." if radii else ""


def ellipsoidal(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Predicted ellipsoidal amplitude against what the points outside eclipse can show."""
    state = evidence.solution.system.effects.get("ellipsoidal", "off")
    if state != "off":
        return check.passed(f"The ellipsoidal variation is part of the model ({state}).")
    found = {}
    for place, band in enumerate(evidence.bands):
        predicted, (seen, error) = (
            predicted_amplitude(evidence, band),
            wave_in_residuals(evidence, place),
        )
        if isfinite(predicted) and error > 0:
            found[band] = (predicted / error, predicted, seen, error)
    if not found:
        return check.silent("too few points lie outside eclipse to show an ellipsoidal variation.")
    worst = max(found, key=lambda band: found[band][0])
    away, predicted, seen, error = found[worst]
    words = f"The ellipsoidal variation, off in this model, is expected at {percent(predicted)} in band {worst}"
    if away <= (check.limit or 0.0):
        return check.passed(
            f"{words}, too little for the points outside eclipse to show; leaving it out does no harm.",
            away,
        )
    shift, room = _shift_of_radii(evidence, predicted), _closest_radius(evidence)
    if shift < room / 2:
        return check.passed(
            f"{words}. The data could show it, but it would move the radii by no more than about {percent(shift)}, "
            f"within their errors.",
            away,
        )
    return check.warned(
        f"{words}, {number(away)} times what the points outside eclipse can show (their residuals hold "
        f"{written(100 * seen, 100 * error, 100 * error)} %). Switch the effect on (predicted or fitted) and compare.",
        away,
    )


def _shift_of_radii(evidence: Evidence, amplitude: float) -> float:
    """Relative change of the radii where a depth is wrong by the amplitude: half that of the depth."""
    model = evidence.light.model[evidence.inside(evidence.windows[0])[1]]
    depth = 1 - float(model.min()) if model.size else 0.0
    return amplitude / (2 * depth) if depth > 0 else inf


def _closest_radius(evidence: Evidence) -> float:
    """The smaller relative error of the two radii; 0 where there is none."""
    found = [
        evidence.sigma(f"r{star}") / radius
        for star, radius in zip((1, 2), evidence.radii)
        if radius > 0 and evidence.sigma(f"r{star}") > 0
    ]
    return min(found, default=0.0)


def predicted_amplitude(evidence: Evidence, band: str) -> float:
    """Semi-amplitude of cos 2 phi, fraction of all light; NaN where a radius or share is unknown."""
    q, _ = evidence.mass_ratio
    found = 0.0
    for star, companion in ((1, q), (2, 1 / q)):
        share, radius = evidence.light_share[band][star - 1], evidence.radii[star - 1]
        if not (radius > 0 and isfinite(radius * share)):
            return nan
        found += share * ellipsoidal_amplitude(
            radius,
            companion,
            inclination=evidence.value("inclination"),
            gravity_darkening=_darkening(evidence, star, band),
        )
    return found


def _darkening(evidence: Evidence, star: int, band: str) -> float:
    """Gravity darkening of a star, that of a cool one where its temperature is not known."""
    teff = evidence.value(f"teff{star}")
    wavelength = evidence.solution.system.wavelengths.get(band, nan)
    known = isfinite(teff * wavelength) and teff > 0 and wavelength > 0
    return gravity_darkening(teff, wavelength) if known else GRAVITY_DARKENING


def wave_in_residuals(evidence: Evidence, band: int) -> tuple[float, float]:
    """Amplitude of -cos 2 phi in the residuals outside eclipse beside the levels of the fit, and its error."""
    light = evidence.light
    chosen = np.flatnonzero(evidence.outside & (light.band == band))
    if chosen.size < FEWEST_OUTSIDE:
        return nan, 0.0
    block = light.block[chosen] if evidence.solution.system.levels != "one" else 0 * chosen
    weight, wave = light.error[chosen] ** -2, -np.cos(4 * np.pi * light.phase[chosen])
    rest = _without_mean(wave, weight, block)
    if evidence.solution.system.levels == "trend":
        time = _without_mean(light.time[chosen], weight, block)
        slope = np.bincount(block, weight * time * rest) / np.maximum(
            np.bincount(block, weight * time**2), TINY
        )
        rest = rest - slope[block] * time
    power = float(np.sum(weight * rest**2))
    if not power > 0:
        return nan, 0.0
    return float(np.sum(weight * rest * light.residual[chosen])) / power, 1 / sqrt(power)


def _without_mean(values: Floats, weight: Floats, block: Ints) -> Floats:
    """Values less the weighted mean of their block."""
    mean = np.bincount(block, weight * values) / np.maximum(np.bincount(block, weight), TINY)
    return np.asarray(values - mean[block])


CHECKS = (
    Check(
        "fill-out",
        "Does a star fill its Roche lobe?",
        fill_out,
        0.75,
        "lobe radius by Eggleton 1983, ApJ 268, 368 (good to 1 %); above 0.75 of it a star of the Roche model is "
        "longer than high by 7 % or more (integrated for equal masses); 0.95 is the lobe less its error and the sphere's (our choice)",
    ),
    Check(
        "oblateness",
        "Are the stars round enough for spheres?",
        roundness,
        0.04,
        "Popper & Etzel 1981, AJ 86, 102 (from memory); the radius seen in eclipse is less than that of equal "
        "volume by a quarter of the oblateness (integrated Roche shapes, equal masses)",
    ),
    Check(
        "ellipsoidal variation",
        "Would the data show the ellipsoidal variation that the model leaves out?",
        ellipsoidal,
        3.0,
        "amplitude by Morris & Naftilan 1993, ApJ 419, 344; three sigma of a wave through the points outside eclipse (common practice), "
        "unless it moves the radii by less than half their error (half the amplitude over the depth)",
    ),
)
