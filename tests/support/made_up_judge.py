"""The invented pair as a case to be judged, and ways to spoil it one at a time."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from made_up import (
    made_up_photometry,
    made_up_solution,
    made_up_velocities,
)
from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import DERIVED, FITTED, Estimate, Solution
from shadowscale.judge.audit import CHECKS, audit
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import Finding

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Case:
    """A solution with its tables."""

    solution: Solution
    photometry: Photometry
    velocities: Velocities | None = None

    @property
    def evidence(self) -> Evidence:
        """What the checks look at."""
        return Evidence(self.solution, self.photometry, self.velocities)

    def findings(self) -> tuple[Finding, ...]:
        """The whole audit."""
        return audit(self.solution, self.photometry, self.velocities)

    def finding(self, name: str) -> Finding:
        """The (first) finding of one check."""
        check = CHECKS[name]
        return check.function(self.evidence, check)[0]


def good_case(
    bands: tuple[str, ...] = ("V",), *, velocities: bool = True, nights: int = 40
) -> Case:
    """A case that no check should complain about."""
    photometry = made_up_photometry(bands, nights=nights)
    table = made_up_velocities() if velocities else None
    solution = made_up_solution(photometry, table)
    system = replace(solution.system, effects={"ellipsoidal": "predicted"})
    return Case(replace(solution, system=system), photometry, table)


def with_values(case: Case, **changes: float) -> Case:
    """Other values of quantities, errors kept; keys with brackets as `third_light__V`, `.1` as `__V__1`."""
    return with_estimates(case, {key: (value, None) for key, value in _keys(changes).items()})


def with_sigmas(case: Case, **changes: float) -> Case:
    """Other errors of quantities, values kept."""
    found = case.evidence
    return with_estimates(
        case, {key: (found.value(*_apart(key)), sigma) for key, sigma in _keys(changes).items()}
    )


def with_estimates(case: Case, changes: Mapping[str, tuple[float, float | None]]) -> Case:
    """Other values and errors (None: as before), in the system, the estimates and the covariance."""
    solution = case.solution
    values, estimates = dict(solution.system.values), dict(solution.estimates)
    covariance = solution.covariance.copy()
    for key, (value, sigma) in changes.items():
        old = estimates.get(key, Estimate(value, None, None, DERIVED))
        low, high = (old.minus, old.plus) if sigma is None else (sigma, sigma)
        estimates[key] = Estimate(value, low, high, old.how)
        if key in values:
            values[key] = value
        if sigma is not None and key in solution.system.free:
            row = solution.system.free.index(key)
            covariance[row, :] = covariance[:, row] = 0.0
            covariance[row, row] = sigma**2
    system = replace(solution.system, values=values)
    return replace(
        case,
        solution=replace(solution, system=system, estimates=estimates, covariance=covariance),
    )


def with_free(case: Case, changes: Mapping[str, tuple[float, float]]) -> Case:
    """Further quantities set free, with value and error."""
    solution = case.solution
    new = [key for key in changes if key not in solution.system.free]
    size = len(solution.system.free)
    covariance = np.zeros((size + len(new), size + len(new)))
    covariance[:size, :size] = solution.covariance
    values = dict(solution.system.values) | {key: value for key, (value, _) in changes.items()}
    system = replace(solution.system, free=(*solution.system.free, *new), values=values)
    estimates = dict(solution.estimates) | {
        key: Estimate(value, sigma, sigma, FITTED) for key, (value, sigma) in changes.items()
    }
    solution = replace(solution, system=system, estimates=estimates, covariance=covariance)
    return with_estimates(replace(case, solution=solution), changes)


def with_correlation(case: Case, pairs: Mapping[tuple[str, str], float]) -> Case:
    """Correlations between free quantities, in the covariance."""
    free = case.solution.system.free
    covariance = case.solution.covariance.copy()
    for (first, second), size in pairs.items():
        a, b = free.index(first), free.index(second)
        covariance[a, b] = covariance[b, a] = size * np.sqrt(covariance[a, a] * covariance[b, b])
    return with_solution(case, covariance=covariance)


def with_solution(case: Case, **changes: object) -> Case:
    """Other fields of the solution."""
    return replace(case, solution=replace(case.solution, **changes))  # type: ignore[arg-type]


def with_fit(case: Case, **changes: object) -> Case:
    """Other fields of the fit's summary."""
    return with_solution(case, fit=replace(case.solution.fit, **changes))  # type: ignore[arg-type]


def with_system(case: Case, **changes: object) -> Case:
    """Other fields of the system."""
    return with_solution(case, system=replace(case.solution.system, **changes))  # type: ignore[arg-type]


def with_residuals(case: Case, residuals: Floats) -> Case:
    """Other photometry: the model plus these residuals."""
    flux = case.solution.light.model + residuals
    return replace(case, photometry=replace(case.photometry, flux=flux))


def with_light(case: Case, light: Floats) -> Case:
    """Another light curve, in the data (their residuals kept) and in the model."""
    residuals = case.photometry.flux - case.solution.light.model
    moved = with_solution(case, light=replace(case.solution.light, model=light))
    return with_residuals(moved, residuals)


def set_aside(case: Case, rows: Bools) -> Case:
    """Rows of the photometry taken out by the user."""
    photometry = case.photometry.excluded(rows, "taken out")
    why = np.where(rows, 1, case.solution.light.why)
    return with_solution(
        replace(case, photometry=photometry), light=replace(case.solution.light, why=why)
    )


def dropped_by_fit(case: Case, rows: Bools) -> Case:
    """Rows of the photometry taken for outliers by the fit."""
    why = np.where(rows, 2, case.solution.light.why)
    return with_solution(case, light=replace(case.solution.light, why=why))


def phase_of(case: Case) -> Floats:
    """Phases of the photometry, -0.5...0.5."""
    return np.asarray(np.mod(case.solution.light.phase + 0.5, 1.0) - 0.5)


def _keys(changes: Mapping[str, float]) -> dict[str, float]:
    return {_spelled(name): value for name, value in changes.items()}


def _spelled(name: str) -> str:
    parts = name.split("__")
    return parts[0] + (f"[{parts[1]}]" if len(parts) > 1 else "")


def _apart(key: str) -> tuple[str, str | None]:
    name, _, label = key.partition("[")
    return name, label.rstrip("]") or None
