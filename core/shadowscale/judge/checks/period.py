"""Whether the true period could be half or twice the one that was found."""

from __future__ import annotations

from dataclasses import dataclass
from math import hypot, inf, isfinite, nan, sqrt

import numpy as np

from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Bools, Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.windows import EclipseWindow
from shadowscale.judge.words import counted, number

CORE = 0.5  # part of an eclipse, about its middle, from which a depth is measured
SURE = 3.0  # sigmas
FEWEST_VELOCITIES = 6
COPIED = 0.3  # share of an eclipse's depth, in that share of the points, where there should be none
FEWEST_COPIED = 5
FAINTER = 4.0  # sigmas of a point, levels of nights among them


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
    if _velocity_curve(evidence):
        return check.passed(
            "The velocities swing once a period, which confirms it against its half and its double."
        )
    primary, secondary = evidence.windows
    copy = _copy(evidence)
    if copy is not None:
        window, count = copy
        return check.failed(
            f"{counted(count, 'point')} half a period after {window.name} eclipse {'is' if count == 1 else 'are'} as faint as in it, "
            "where this solution has no eclipse: the true period is half of this one."
        )
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


def _copy(evidence: Evidence) -> tuple[EclipseWindow, int] | None:
    """The eclipse that comes back half a period later, and how many points show it there.

    Seen in the light itself, since levels of nights may have taken such an eclipse up.
    """
    light, windows = evidence.light, evidence.windows
    flux = evidence.photometry.flux[light.row]
    free = ~np.any([np.abs(w.offset(light.phase)) < 1.1 * w.outer for w in windows], axis=0)
    for window in windows:
        for place in range(len(evidence.bands)):
            band = light.band == place
            within = np.abs(window.offset(light.phase)) < window.outer
            if not (window.happens and (band & free).any() and (band & within).any()):
                continue
            usual = float(np.median(flux[band & free]))
            if not usual > 0:
                continue
            scatter = 1.48 * float(np.median(np.abs(flux[band & free] - usual))) / usual
            depth = 1 - float(np.min(light.model[band & within]))
            if COPIED * depth < FAINTER * scatter:
                continue
            later = band & free & (np.abs(window.offset(light.phase - 0.5)) < window.outer)
            count = int((later & (1 - flux / usual > COPIED * depth)).sum())
            if count >= FEWEST_COPIED and count > COPIED * later.sum():
                return window, count
    return None


def _velocity_curve(evidence: Evidence) -> bool:
    """Whether a star's amplitude is measured: at half the period it would vanish, at twice not fit."""
    result = evidence.solution.velocity
    if evidence.velocities is None or result is None:
        return False
    return any(
        int((why == 0).sum()) >= FEWEST_VELOCITIES
        and evidence.value(f"K{star}") > 5 * evidence.sigma(f"K{star}") > 0
        for star, why in ((1, result.why1), (2, result.why2))
    )


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
            found.append(inf)
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


CHECKS = (
    Check(
        "period",
        "Could the true period be half or twice this one?",
        true_period,
        SURE,
        "three sigma between the two eclipses (common practice)",
    ),
)
