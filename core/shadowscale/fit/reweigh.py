"""New weights from the residuals of a fit: outliers, scale of errors, jitter."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Ints, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.objective import Objective
from shadowscale.fit.observed import StarVelocities
from shadowscale.fit.problem import Fitted, Problem, Weighting
from shadowscale.fit.weights import (
    error_scale,
    light_outliers,
    needed_jitter,
    scatter_scale,
    velocity_outliers,
    wild_rows,
)

SETTLED = 0.003  # relative change of a scale that is not worth another fit
LIGHT_CODE = "outlier: set aside by the fit"
ORBIT_TAKES = 2.0  # quantities that a star's velocities alone pay for: K and gamma


def reasons_with_outlier(reasons: tuple[str, ...]) -> tuple[str, ...]:
    """The table's reasons, with the fit's own at the end."""
    return reasons if LIGHT_CODE in reasons else (*reasons, LIGHT_CODE)


def without_wild_rows(problem: Problem, weighting: Weighting) -> Weighting:
    """The weights with rows set aside that no star explains."""
    why = _wild(problem.photometry)
    return weighting if why is problem.photometry.why else replace(weighting, why=why)


def _wild(photometry: Photometry) -> Ints:
    """`why` of the table with wild rows set aside; the table's own array where there are none."""
    why = photometry.why
    code = reasons_with_outlier(photometry.reasons).index(LIGHT_CODE)
    for band in range(len(photometry.bands)):
        rows = np.flatnonzero((photometry.band == band) & (photometry.why == 0))
        wild = wild_rows(photometry.flux[rows]) if rows.size else np.zeros(0, dtype=np.bool_)
        if wild.any():
            why = why.copy()
            why[rows[wild]] = code
    return why


def reweighed(problem: Problem, fitted: Fitted, weighting: Weighting) -> tuple[Weighting, bool]:
    """Weights after a fit, and whether they differ enough to fit again.

    Outliers are judged afresh among all rows of the table, so that a row set aside by an early,
    poor model comes back.
    """
    x = fitted.minimum.x
    why = _light_why(problem, fitted, weighting)
    moved = not np.array_equal(why, weighting.why)
    why = why if moved else weighting.why
    new = replace(weighting, why=why)
    objective = problem.objective(fitted.system, new, fitted.constraints)
    scales = _scales(objective, x)
    new = replace(new, light_scale=scales)
    new, stars_moved = _velocities(problem, fitted, new)
    before = weighting.light_scale
    rescaled = any(abs(scales[band] / before.get(band, 1.0) - 1.0) > SETTLED for band in scales)
    return new, moved or rescaled or stars_moved


def _light_why(problem: Problem, fitted: Fitted, weighting: Weighting) -> Ints:
    photometry = problem.photometry
    code = reasons_with_outlier(photometry.reasons).index(LIGHT_CODE)
    tame = _wild(photometry)
    everything = problem.objective(fitted.system, replace(weighting, why=tame), fitted.constraints)
    why = tame.copy()
    parts = everything.light_parts(fitted.minimum.x)
    for data in everything.bands:
        far = light_outliers(data, parts[data.band][2])
        why[data.rows[far]] = code
    return why


def _scales(objective: Objective, x: NDArray[np.float64]) -> dict[str, float]:
    parts = objective.light_parts(x)
    total = sum(data.time.size for data in objective.bands)
    per_level = 2 if objective.vector.system.levels == "trend" else 1
    scales = {}
    for data in objective.bands:
        share = x.size * data.time.size / max(total, 1)
        taken = share + per_level * data.segments
        scales[data.band] = float(error_scale(parts[data.band][0], data.time.size, taken))
    return scales


def _velocities(problem: Problem, fitted: Fitted, weighting: Weighting) -> tuple[Weighting, bool]:
    velocities = problem.velocities
    if velocities is None:
        return weighting, False
    objective = problem.objective(fitted.system, weighting, fitted.constraints)
    jitter: dict[tuple[int, int], float] = {}
    errors: dict[int, float] = {}
    why = {1: weighting.why1, 2: weighting.why2}
    for data in objective.stars:
        residual = objective.velocity_residuals(fitted.minimum.x, data)
        if velocities.errors_from_scatter:
            errors[data.star] = scatter_scale(data, residual, ORBIT_TAKES)
        else:
            jitter |= _jitter(data, residual)
        far = velocity_outliers(residual, objective.velocity_errors(data))
        if far.any():
            why[data.star] = why[data.star].copy()
            why[data.star][data.rows[far]] = _velocity_code(velocities)
    moved = _differs(jitter, weighting.jitter) or _differs(errors, weighting.star_error)
    moved = moved or why[1] is not weighting.why1 or why[2] is not weighting.why2
    new = replace(weighting, why1=why[1], why2=why[2], jitter=jitter, star_error=errors)
    return new, moved


def _jitter(data: StarVelocities, residual: NDArray[np.float64]) -> dict[tuple[int, int], float]:
    found = {}
    for source in np.unique(data.source):
        rows = data.source == source
        extra = needed_jitter(residual[rows], data.error[rows], ORBIT_TAKES)
        if extra > 0.0:
            found[data.star, int(source)] = extra
    return found


def _velocity_code(velocities: Velocities) -> int:
    return reasons_with_outlier(velocities.reasons).index(LIGHT_CODE)


def _differs(new: Mapping[Any, float], old: Mapping[Any, float]) -> bool:
    if set(new) != set(old):
        return True
    return any(abs(new[at] - old[at]) > 0.01 * max(abs(old[at]), 1e-9) for at in new)
