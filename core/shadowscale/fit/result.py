"""From the minimum to the `Solution`: covariance, derived quantities, rows, words."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from math import acos, degrees, hypot, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.alternatives import Branch, alternatives
from shadowscale.fit.band_model import BandModel
from shadowscale.fit.derived import absent_words, assumed_inputs, derived_values
from shadowscale.fit.least_squares import covariance as inverse_of
from shadowscale.fit.model import model_velocities
from shadowscale.fit.observed import BandData
from shadowscale.fit.plan import Plan
from shadowscale.fit.priors import prior_of
from shadowscale.fit.problem import Fitted, Problem, Weighting
from shadowscale.fit.propagate import Spread, propagated
from shadowscale.fit.reweigh import reasons_with_outlier
from shadowscale.fit.solution import (
    ASSUMED,
    DERIVED,
    FITTED,
    FIXED,
    Decision,
    Estimate,
    FitSummary,
    LightResult,
    Solution,
    VelocityResult,
)
from shadowscale.fit.start import Ground, wished
from shadowscale.fit.system import System
from shadowscale.quantities import QUANTITIES, key, parse_key

Floats = NDArray[np.float64]
METHOD = (
    "bounded least squares with analytic derivatives, levels eliminated (variable projection); "
    "covariance from the curvature at the minimum, errors scaled to reduced chi-squared one"
)
ANY_DIRECTION = 0.683 * 180.0  # degrees: 68.3 % of directions that are not known at all lie within
MAIN_DERIVED = (
    "r1",
    "r2",
    "eccentricity",
    "mass_ratio",
    "a",
    "M1",
    "M2",
    "R1",
    "R2",
    "logg1",
    "logg2",
)


def assemble(
    best: Fitted,
    *,
    problem: Problem,
    plan: Plan,
    weighting: Weighting,
    ground: Ground | None,
    branches: Sequence[Branch],
    decisions: Sequence[Decision],
    notes: Sequence[str],
    ends: tuple[Floats, Floats] | None = None,
) -> Solution:
    """Everything the sheet needs of a finished fit; `ends` are the limits of a curved valley of k."""
    best_system, shift = _at_wished_epoch(best, plan)
    spread, keys = _spread(best, plan, shift, ends)
    estimates = _estimates(best, plan, spread, ends)
    absent = absent_words(best.system, plan)
    if _any_direction(estimates):
        del estimates["omega"]
        absent["omega"] = "the eccentricity is not above its error: periastron may lie anywhere"
    fit = _summary(best, problem, weighting)
    names, correlations = _correlations(spread, best.system.free)
    light = light_result(best, problem, weighting)
    return Solution(
        system=best_system,
        covariance=keys,
        estimates=estimates,
        correlation_names=names,
        correlations=correlations,
        fit=fit,
        light=light,
        velocity=_velocity_result(best.system, problem.velocities, weighting),
        contact=None if ground is None else ground.contact,
        decisions=tuple(decisions),
        alternatives=alternatives(branches),
        absent=absent,
        notes=tuple(notes),
    )


def _at_wished_epoch(best: Fitted, plan: Plan) -> tuple[System, int]:
    """The system with its epoch moved by whole cycles to the one the user named, and the cycles."""
    values = best.system.values
    near = wished(plan, "epoch")
    if near is None:
        return best.system, 0
    cycles = round((near - values["epoch"]) / values["period"])
    return best.system.with_values({"epoch": values["epoch"] + cycles * values["period"]}), cycles


def _spread(
    best: Fitted, plan: Plan, shift: int, ends: tuple[Floats, Floats] | None
) -> tuple[Spread, Floats]:
    """Joint spread of all quantities, and the covariance (m, m) of the free keys."""
    vector = best.objective.vector
    x = best.minimum.x
    matrix = _across(best, ends)
    extra = assumed_inputs(plan, best.system)
    size = x.size
    whole = np.zeros((size + len(extra), size + len(extra)))
    whole[:size, :size] = matrix
    for number, (_, sigma) in enumerate(extra.values(), start=size):
        whole[number, number] = sigma**2
    lower, upper = vector.bounds
    open_ends = np.full(len(extra), np.inf)
    bounds = (np.concatenate([lower, -open_ends]), np.concatenate([upper, open_ends]))

    def everything(inputs: Floats) -> Mapping[str, float]:
        values = vector.unpack(inputs[:size])
        values["epoch"] += shift * values["period"]
        assumed = dict(zip(extra, inputs[size:].tolist(), strict=True))
        free = {name: values[name] for name in best.system.free}
        return free | derived_values(best.system.with_values(values), assumed)

    centre = np.concatenate([x, [value for value, _ in extra.values()]])
    if ends is not None:
        ends = (np.concatenate([ends[0], centre[size:]]), np.concatenate([ends[1], centre[size:]]))
    spread = propagated(everything, centre, whole, bounds=bounds, ends=ends)
    rows = [spread.names.index(name) for name in best.system.free]
    keys = spread.joint[np.ix_(rows, rows)]
    return spread, keys


def _across(best: Fitted, ends: tuple[Floats, Floats] | None) -> Floats:
    """Covariance of the coordinates; with a curved valley, what is left when k is held."""
    matrix, _ = inverse_of(best.minimum.normal)
    if ends is None:
        return matrix
    at = best.objective.vector.index["radius_ratio"]
    column = matrix[:, at]
    left: Floats = matrix - np.outer(column, column) / column[at]
    return left


def _estimates(
    best: Fitted, plan: Plan, spread: Spread, ends: tuple[Floats, Floats] | None
) -> dict[str, Estimate]:
    """Every quantity with its limits and how it was had, in the register's order."""
    system = best.system
    below, above = spread.limits
    sigma = dict(zip(spread.names, zip(below.tolist(), above.tolist(), strict=True), strict=True))
    centre = dict(zip(spread.names, spread.values.tolist(), strict=True))
    assumed = assumed_inputs(plan, system)
    found: dict[str, Estimate] = {}
    for name, value in system.values.items():
        if name in system.ties:
            continue
        if name in system.free:
            minus, plus = sigma[name]
            if name == "inclination":
                minus, plus = _inclination_limits(best, spread, ends)
            found[name] = Estimate(centre[name], minus, plus, FITTED, prior_of(plan, name))
        else:
            found[name] = Estimate(value, None, None, FIXED)
    for name, value in centre.items():
        if name not in found:
            how = ASSUMED if name in assumed else DERIVED
            minus, plus = sigma[name]
            sure = minus == plus == 0.0
            low, high = (None, None) if sure else (minus, plus)
            found[name] = Estimate(value, low, high, how, prior_of(plan, name))
    for name, leader in system.ties.items():
        found[name] = replace(found[leader], how=DERIVED)
    order = {name: number for number, name in enumerate(QUANTITIES)}
    return dict(sorted(found.items(), key=lambda item: order[parse_key(item[0]).name]))


def _any_direction(estimates: Mapping[str, Estimate]) -> bool:
    """Whether omega is there, but its limits take in the other side of a circular orbit or everything."""
    if "omega" not in estimates:
        return False
    size, angle = estimates["eccentricity"], estimates["omega"]
    return size.value < (size.minus or 0.0) or (angle.plus or 0.0) > ANY_DIRECTION


def _inclination_limits(
    best: Fitted, spread: Spread, ends: tuple[Floats, Floats] | None
) -> tuple[float, float]:
    """68.3 % limits by way of cos^2 i, in which the fit is linear; along a curved valley as found there."""
    at = best.objective.vector.index["inclination"]
    square, error = best.minimum.x[at], sqrt(max(_across(best, ends)[at, at], 0.0))
    centre, low, high = (
        degrees(acos(sqrt(min(max(value, 0.0), 1.0))))
        for value in (square, square + error, square - error)
    )
    number = spread.names.index("inclination")
    shifts = (spread.below[number], spread.above[number])
    minus = hypot(centre - low, max(0.0, *(-shift for shift in shifts)))
    # At 90 degrees the upper side is closed: the limit there is as wide as the room left,
    # and never narrower than a tenth of the other side.
    return minus, max(hypot(high - centre, max(0.0, *shifts)), 0.1 * minus)


def _correlations(spread: Spread, free: Sequence[str]) -> tuple[tuple[str, ...], Floats]:
    wanted = [*free, *(name for name in MAIN_DERIVED if name in spread.names)]
    sigma = dict(zip(spread.names, np.sqrt(np.diag(spread.joint)), strict=True))
    names = tuple(name for name in wanted if sigma[name] > 0.0)
    rows = [spread.names.index(name) for name in names]
    joint = spread.joint[np.ix_(rows, rows)]
    scale = np.sqrt(np.diag(joint))
    return names, np.clip(joint / np.outer(scale, scale), -1.0, 1.0)


def _summary(best: Fitted, problem: Problem, weighting: Weighting) -> FitSummary:
    """The fit in numbers."""
    objective, x = best.objective, best.minimum.x
    parts = objective.light_parts(x)
    scale = objective.light_scale
    rms_light, raw, chi2, points, levels = {}, {}, 0.0, 0, 0
    per_level = 2 if best.system.levels == "trend" else 1
    for data in objective.bands:
        band_chi2, _, expected = parts[data.band]
        rms_light[data.band] = float(np.sqrt(np.mean((data.flux - expected) ** 2)))
        raw[data.band] = band_chi2 / max(data.time.size - per_level * data.segments, 1)
        chi2 += band_chi2 / scale.get(data.band, 1.0) ** 2
        points += data.time.size
        levels += per_level * data.segments
    rms_velocity = {}
    for star in objective.stars:
        residual = objective.velocity_residuals(x, star)
        rms_velocity[f"star {star.star}"] = float(np.sqrt(np.mean(residual**2)))
        raw[f"velocities, star {star.star}"] = float(
            np.sum((residual / star.error) ** 2) / max(residual.size - 2, 1)
        )
        chi2 += float(np.sum((residual / objective.velocity_errors(star)) ** 2))
        points += residual.size
    free = x.size + levels
    sources = best.system.sources
    return FitSummary(
        points=points,
        free=free,
        chi2=chi2,
        reduced_chi2=chi2 / max(points - free, 1),
        rms_light=rms_light,
        rms_velocity=rms_velocity,
        error_scale={data.band: float(scale.get(data.band, 1.0)) for data in objective.bands},
        jitter={
            f"{sources[at]}, star {star}": value for (star, at), value in weighting.jitter.items()
        },
        raw_reduced_chi2=raw,
        method=METHOD,
        converged=best.minimum.converged,
        iterations=best.minimum.iterations,
    )


def light_result(best: Fitted, problem: Problem, weighting: Weighting) -> LightResult:
    """Model, level and phase of every row, used or not."""
    photometry, system = problem.photometry, best.system
    parts = best.objective.light_parts(best.minimum.x)
    model, level = np.ones(photometry.time.size), np.ones(photometry.time.size)
    for data in best.objective.bands:
        rows = np.flatnonzero(photometry.band == photometry.bands.index(data.band))
        levels = _levels_of_rows(photometry, data, rows, parts[data.band][1])
        level[rows] = levels
        model[rows] = levels * BandModel.at(system, system.values, data.band).light(
            photometry.time[rows]
        )
    return LightResult(
        model,
        level,
        phases(photometry.time, system),
        weighting.why,
        reasons_with_outlier(photometry.reasons),
    )


def _levels_of_rows(
    photometry: Photometry, data: BandData, rows: NDArray[np.int64], levels: Floats
) -> Floats:
    """Level of each row of a band: its segment's, or that of the nearest in time."""
    if data.time.size == 0:
        return np.ones(rows.size)
    if data.segments == 1 and levels[0, 1] == 0.0:
        return np.full(rows.size, levels[0, 0])
    owner = np.repeat(np.arange(data.segments), np.diff(data.starts))
    order = np.argsort(data.time, kind="stable")
    times = data.time[order]
    at = np.clip(np.searchsorted(times, photometry.time[rows]), 1, max(times.size - 1, 1))
    left = np.abs(photometry.time[rows] - times[at - 1])
    right = np.abs(times[np.minimum(at, times.size - 1)] - photometry.time[rows])
    nearest = order[np.where(left <= right, at - 1, np.minimum(at, times.size - 1))]
    segment = owner[nearest]
    first, last = data.time[data.starts[segment]], data.time[data.starts[segment + 1] - 1]
    half = np.maximum((last - first) / 2, 1e-9)
    trend = np.clip((photometry.time[rows] - (first + last) / 2) / half, -1.5, 1.5)
    found: Floats = levels[segment, 0] + levels[segment, 1] * trend
    return found


def phases(time: Floats, system: System) -> Floats:
    """Phase of each time, -0.25...0.75."""
    cycles = (time - system.value("epoch")) / system.value("period")
    folded: Floats = cycles - np.floor(cycles + 0.25)
    return folded


def _velocity_result(
    system: System, velocities: Velocities | None, weighting: Weighting
) -> VelocityResult | None:
    if velocities is None:
        return None
    models = []
    for star in (1, 2):
        model = np.full(velocities.time.size, np.nan)
        if f"K{star}" in system.values:
            model = model_velocities(system, star, velocities.time)
            offsets = [
                system.values.get(key(f"offset{star}", name), 0.0) for name in velocities.sources
            ]
            model = model + np.array(offsets)[velocities.source]
        models.append(model)
    reasons = reasons_with_outlier(velocities.reasons)
    return VelocityResult(
        models[0],
        models[1],
        phases(velocities.time, system),
        weighting.why1,
        weighting.why2,
        reasons,
    )
