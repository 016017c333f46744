"""Period, eccentricity, the place of the secondary eclipse, and the clock."""

from __future__ import annotations

from dataclasses import dataclass
from math import hypot, isfinite, nan, sqrt

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Bools, Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.windows import EclipseWindow
from shadowscale.judge.words import number, sentence

CORE = 0.5  # part of an eclipse, about its middle, from which a depth is measured
SURE = 3.0  # sigmas
NODES = 41


@dataclass(frozen=True)
class Depth:
    """Light lost at the middle of an eclipse as the points themselves show it, with its error."""

    value: float
    error: float
    points: int


def measured_depth(evidence: Evidence, window: EclipseWindow, chosen: Bools) -> Depth:
    """Depth from the points near an eclipse's middle: the model's, plus their mean residual.

    The error is at least what the scatter of those points gives.
    """
    light = evidence.light
    core = chosen & (np.abs(window.offset(light.phase)) < CORE * max(window.outer, 0.005))
    count = int(core.sum())
    if count == 0:
        return Depth(nan, nan, 0)
    weight = light.error[core] ** -2
    mean = float(np.sum(weight * light.residual[core]) / np.sum(weight))
    spread = float(np.mean((light.residual[core] - mean) ** 2 * weight))
    error = sqrt(max(spread, 1.0) / float(np.sum(weight)))
    return Depth(1 - float(np.min(light.model[core])) - mean, error, count)


def true_period(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Whether half or twice the period fits as well, from the two eclipses' depths and widths."""
    if _two_velocity_curves(evidence):
        return check.passed(
            "The velocities of both stars swing once a period, which confirms it against its half and its double."
        )
    primary, secondary = evidence.windows
    if not (primary.happens and secondary.happens):
        return check.warned(
            f"In this solution only one eclipse happens a period. {_odd_and_even(evidence)}"
        )
    differences, seen = _band_by_band(evidence)
    if not seen:
        return check.warned(
            f"No points lie near the middle of secondary eclipse (phase {secondary.middle:.3f}). "
            f"{_odd_and_even(evidence)} Observe that phase.",
        )
    if max(seen) < SURE:
        return check.warned(
            f"No secondary eclipse is seen at phase {secondary.middle:.3f} ({number(max(seen))} sigma). "
            f"{_odd_and_even(evidence)}",
            max(seen),
        )
    away = max(differences)
    lopsided = _unequal(evidence)
    if away < (check.limit or SURE) and lopsided < (check.limit or SURE):
        return check.warned(
            f"Both eclipses are equal within their errors (depths {number(away)} sigma apart, half a period "
            "between them, same width): the true period could be half of this one, with one eclipse only. "
            "Velocities, or colours in eclipse, decide.",
            away,
        )
    reason = (
        f"depths differ by {number(away)} sigma"
        if away >= lopsided
        else f"spacing or width differ by {number(lopsided)} sigma"
    )
    return check.passed(
        f"Primary and secondary eclipse are two different ones: {reason}.", max(away, lopsided)
    )


def _two_velocity_curves(evidence: Evidence) -> bool:
    if evidence.velocities is None:
        return False
    return all(evidence.value(f"K{star}") > 5 * evidence.sigma(f"K{star}") > 0 for star in (1, 2))


def _band_by_band(evidence: Evidence) -> tuple[list[float], list[float]]:
    """Per band: sigmas between the two depths, and sigmas of the secondary's own depth."""
    differences, seen = [], []
    for place in range(len(evidence.bands)):
        first, second = (
            measured_depth(evidence, window, evidence.light.band == place)
            for window in evidence.windows
        )
        if second.points and second.error > 0:
            seen.append(second.value / second.error)
            if first.points:
                differences.append(
                    abs(first.value - second.value) / hypot(first.error, second.error)
                )
    return differences or [0.0], seen


def _unequal(evidence: Evidence) -> float:
    """Sigmas by which the eclipses differ in spacing or width: e cos w and e sin w from zero."""
    found = [0.0]
    for name in ("ecosw", "esinw"):
        value, sigma = evidence.value(name), evidence.sigma(name)
        if sigma > 0 and isfinite(value):
            found.append(abs(value) / sigma)
        elif isfinite(value) and value != 0:
            found.append(np.inf)
    return max(found)


def _odd_and_even(evidence: Evidence) -> str:
    """Compares odd with even primary eclipses: they differ if the true period is twice as long."""
    light, period = evidence.light, evidence.value("period")
    if not period > 0:
        return ""
    cycle = np.round((light.time - evidence.value("epoch")) / period)
    sigmas = []
    for place in range(len(evidence.bands)):
        odd, even = (
            measured_depth(
                evidence, evidence.windows[0], (light.band == place) & (np.mod(cycle, 2) == parity)
            )
            for parity in (1, 0)
        )
        if odd.points and even.points and odd.error > 0 and even.error > 0:
            sigmas.append(abs(odd.value - even.value) / hypot(odd.error, even.error))
    if not sigmas:
        return "The true period may be twice as long; only every second eclipse was observed, so this is open."
    if max(sigmas) > SURE:
        return (
            f"Odd and even eclipses differ by {number(max(sigmas))} sigma in depth: "
            "the true period is probably twice as long."
        )
    return (
        f"Odd and even eclipses are equal ({number(max(sigmas))} sigma), so the secondary is too shallow to see, "
        "or the true period is twice as long with two equal eclipses."
    )


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
        f"The {worst} eclipse lies {number(abs(shift))} +- {number(error)} minutes "
        f"{'later' if shift > 0 else 'earlier'} than the model has it"
    )
    if away > (check.limit or SURE):
        return check.warned(
            f"{words} ({number(away)} sigma). A circular orbit, a wrong clock of some nights, a changing period or "
            "spots can do that; try an eccentric orbit and look at O-C.",
            away,
        )
    return check.passed(
        "Both eclipses lie where the model has them." if len(found) == 2 else f"{words}.", away
    )


def eclipse_shift(evidence: Evidence, window: EclipseWindow) -> tuple[float, float]:
    """Shift in phase of the points of an eclipse against the model, and its error.

    First order: residual = -shift dF/dphase, weighted least squares; the slope is taken from the
    model's own mean curve on a grid, band by band. The error carries the scatter where it is larger.
    """
    light = evidence.light
    offset, within = evidence.inside(window)
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


def clock(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Seconds by which the times may be off for want of a known, common time scale."""
    scales = {"photometry": evidence.photometry.time_scale}
    if evidence.velocities is not None:
        scales["velocities"] = evidence.velocities.time_scale
    unknown = [name for name, scale in scales.items() if not _known(scale)]
    if unknown:
        return check.warned(
            f"The time scale of the {' and of the '.join(unknown)} is not known. Times may be off by up to 8.3 minutes "
            "(if not reduced to the Sun) and 69 seconds (UTC against TDB); state it, "
            "above all before comparing times of minimum.",
            500.0,
        )
    if any(_geocentric(scale) for scale in scales.values()):
        return check.warned(
            "The times are not reduced to the Sun or the barycentre: eclipses come up to 8.3 minutes early or late "
            "through the year. Convert them to BJD_TDB.",
            500.0,
        )
    clocks = {_system(scale) for scale in scales.values()} - {""}
    if len(clocks) > 1:
        return check.warned(
            f"The photometry is in {scales['photometry']}, the velocities in {scales['velocities']}: up to 69 seconds apart. "
            "Convert both to BJD_TDB.",
            69.0,
        )
    shown = " and ".join(dict.fromkeys(scales.values()))
    if clocks == {"UTC"}:
        return check.passed(
            f"Times are in {shown}. UTC runs about a minute behind TDB; mind it when you compare times of minimum.",
            0.0,
        )
    return check.passed(f"Times are in {shown}.", 0.0)


def _known(scale: str) -> bool:
    return scale.strip() != "" and "unknown" not in scale.lower()


def _geocentric(scale: str) -> bool:
    return scale.upper().split("_")[0] in ("JD", "MJD")


def _system(scale: str) -> str:
    """`UTC`, `TDB` (or a scale that runs evenly beside it), or empty where not stated."""
    clock = scale.upper().partition("_")[2]
    if not clock:
        return ""
    return "UTC" if clock in ("UTC", "UT1") else "TDB"


CHECKS = (
    Check(
        "period",
        "Could the true period be half or twice this one?",
        true_period,
        SURE,
        "three sigma between the two eclipses (common practice)",
    ),
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
    Check(
        "time scale",
        "Are the times on one known scale?",
        clock,
        1.0,
        "light crosses the Earth's orbit's radius in 499 s; TDB - UTC is 69.184 s since 2017 (IERS); "
        "one second is our choice",
    ),
)
