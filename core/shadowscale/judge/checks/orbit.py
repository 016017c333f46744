"""Eccentricity, and the place of the eclipses."""

from __future__ import annotations

from math import isfinite, nan, sqrt

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.windows import EclipseWindow
from shadowscale.judge.words import number, sentence
from shadowscale.quantities import written

SURE = 3.0  # sigmas
NODES = 41


def eccentricity(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """How the shape of the orbit was decided, and whether an eccentricity is more than noise."""
    decided = " ".join(
        sentence(decision.words)
        for decision in evidence.solution.decisions
        if "orbit" in decision.what.lower() or "eccentric" in decision.what.lower()
    )
    if not (evidence.is_free("ecosw") or evidence.is_free("esinw")):
        held = (
            "circular" if evidence.eccentricity == 0 else f"at e = {number(evidence.eccentricity)}"
        )
        return check.passed(f"The orbit was held {held}. {decided}".strip())
    value = evidence.eccentricity
    error = _eccentricity_error(evidence)
    if not error > 0:
        return check.warned(f"e = {number(value)} has no error. {decided}".strip())
    away = value / error
    words = f"e = {number(value)} is {number(away)} sigma from a circular orbit. {decided}".strip()
    if away < (check.limit or 0.0):
        return check.warned(
            f"{words} An eccentricity that small is often noise, which can only make e larger; "
            "a circular orbit says as much with fewer quantities.",
            away,
        )
    if _rests_on_durations(evidence):
        return check.warned(
            f"{words} The secondary eclipse lies at its circular place, so this rests on the durations "
            "alone, which spots and slow noise also change. Velocities or more eclipses would decide.",
            away,
        )
    return check.passed(words, away)


def _eccentricity_error(evidence: Evidence) -> float:
    """Error of e along its own direction, from the covariance of its two components."""
    parts = np.nan_to_num([evidence.value("ecosw"), evidence.value("esinw")])
    size = float(np.hypot(*parts))
    direction = parts / size if size > 0 else np.array([1.0, 0.0])
    names = ("ecosw", "esinw")
    matrix = np.nan_to_num([[evidence.covariance_of(a, b) for a in names] for b in names])
    variance = float(direction @ matrix @ direction)
    return sqrt(variance) if variance > 0 else nan


def _rests_on_durations(evidence: Evidence) -> bool:
    if evidence.velocities is not None:
        return False
    spacing, sigma = abs(evidence.value("ecosw")), evidence.sigma("ecosw")
    width, width_sigma = abs(evidence.value("esinw")), evidence.sigma("esinw")
    return spacing < 2 * sigma and width > 3 * width_sigma


def place_of_eclipses(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Shift of each eclipse in the data against the model, in sigmas."""
    period, found = evidence.value("period"), {}
    for window in evidence.windows:
        shift, error = eclipse_shift(evidence, window)
        if error > 0 and isfinite(shift):
            found[window.name] = (abs(shift) / error, 1440 * period * shift, 1440 * period * error)
    if not found:
        return check.silent("no eclipse holds enough points.")
    worst = max(found, key=lambda name: found[name][0])
    away, shift, error = found[worst]
    words = (
        f"The {worst} eclipse lies {written(abs(shift), error, error)} minutes "
        f"{'later' if shift > 0 else 'earlier'} than the model has it"
    )
    if away > (check.limit or SURE):
        return check.warned(
            f"{words} ({number(away)} sigma). An orbit held circular that is not, a wrong clock of some nights, a changing period or "
            "spots can do that; try an eccentric orbit and look at O-C.",
            away,
        )
    return check.passed(
        "Both eclipses lie where the model has them." if len(found) == 2 else f"{words}.", away
    )


def eclipse_shift(evidence: Evidence, window: EclipseWindow) -> tuple[float, float]:
    """Shift in phase of the points of an eclipse against the model, and its error.

    First order: residual = -shift dF/dphase, weighted least squares; the slope is taken from the
    model's own mean curve on a grid, band by band. Points that the fit set aside count, since a shift
    makes them. The error carries the scatter where it is larger.
    """
    light = evidence.offered
    offset = window.offset(light.phase)
    within = np.abs(offset) < window.outer
    slope = np.zeros(light.size)
    for place in range(len(evidence.bands)):
        chosen = np.flatnonzero(within & (light.band == place))
        slope[chosen] = _slope(offset[chosen] / max(window.outer, 1e-6), light.model[chosen])
    slope = slope[within] / max(window.outer, 1e-6)
    weight = light.error[within] ** -2
    power = float(np.sum(weight * slope**2))
    if within.sum() < 10 or not power > 0:
        return nan, nan
    shift = -float(np.sum(weight * slope * light.residual[within])) / power
    spread = float(np.mean(weight * (light.residual[within] + shift * slope) ** 2))
    return shift, sqrt(max(spread, 1.0) / power)


def _slope(place: Floats, model: Floats) -> Floats:
    """Slope of a model curve at `place` (-1...1), from its mean on a grid of cells."""
    if place.size < 5:
        return np.zeros(place.size)
    cell = np.clip(((place + 1) / 2 * NODES).astype(int), 0, NODES - 1)
    count = np.bincount(cell, minlength=NODES)
    full = np.flatnonzero(count)
    if full.size < 5:
        return np.zeros(place.size)
    centre = np.bincount(cell, place, minlength=NODES)[full] / count[full]
    curve = np.bincount(cell, model, minlength=NODES)[full] / count[full]
    return np.interp(place, centre, np.gradient(curve, centre))


CHECKS = (
    Check(
        "eccentricity",
        "How was the orbit's shape decided, and is the eccentricity more than noise?",
        eccentricity,
        2.45,
        "5 % chance of a circular orbit, exp(-x^2/2) (Lucy & Sweeney 1971, AJ 76, 544, from memory)",
    ),
    Check(
        "place of eclipses",
        "Do both eclipses lie where the model has them?",
        place_of_eclipses,
        SURE,
        "three sigma (common practice)",
    ),
)
