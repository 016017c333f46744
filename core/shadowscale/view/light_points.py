"""Photometry as a picture shows it: points over phase or time, in flux or magnitudes, band by band."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import USED, Floats, Ints, Photometry
from shadowscale.fit.solution import Solution
from shadowscale.fit.system import System
from shadowscale.session.session import Session
from shadowscale.view.last import Last

MAGNITUDE = 2.5 / np.log(10.0)  # of a small relative change of flux
ENOUGH = 50_000  # points that give the range of an axis
SHIFT = 0.2  # of the range of one band, between two bands drawn in one picture


@dataclass(frozen=True, eq=False)
class LightPoints:
    """The points of one band.

    Attributes
    ----------
    x, y, error : (m,) float64
        Cycles or days less `zero`; flux of 1 outside eclipse, or magnitudes.
    rows : (m,) int64
        Rows of the photometry's table.
    used, outlier : (m,) bool
        Whether the row takes part; whether the fit set it aside by itself.
    """

    band: int
    label: str
    x: Floats
    y: Floats
    error: Floats
    rows: Ints
    used: np.ndarray[tuple[int], np.dtype[np.bool_]]
    outlier: np.ndarray[tuple[int], np.dtype[np.bool_]]
    zero: float = 0.0


def ephemeris(session: Session) -> tuple[float, float] | None:
    """Period and epoch to fold with: of the system, else of the plan; None where neither has one."""
    if session.system is not None:
        return session.system.value("period"), session.system.value("epoch")
    if session.plan.period is not None and session.plan.epoch is not None:
        return session.plan.period, session.plan.epoch
    return None


def fold(time: Floats, period: float, epoch: float, *, start: float = -0.25) -> Floats:
    """Phases of `time` [d] in cycles, from `start` up to `start` + 1."""
    phase = (time - epoch) / period
    return phase - np.floor(phase - start)


def light_over_phase(
    session: Session, *, magnitudes: bool = False, residuals: bool = False
) -> tuple[LightPoints, ...]:
    """All bands folded, phases -0.25...0.75; empty without an ephemeris, or without a model if asked."""
    found = ephemeris(session)
    if session.photometry is None or found is None:
        return ()
    solution = fitting_solution(session)
    if residuals:
        return _RESIDUALS.of(session.photometry, solution, session.system, *found, magnitudes)
    return _LIGHT.of(session.photometry, solution, *found, magnitudes)


def folded_time(photometry: Photometry, period: float, epoch: float) -> Floats:
    """Phases of all rows, -0.25...0.75; the last answer is kept."""
    return _PHASE.of(photometry, period, epoch)


def light_over_time(
    session: Session, *, zero: float, magnitudes: bool = False, residuals: bool = False
) -> tuple[LightPoints, ...]:
    """All bands against time less `zero` [d]."""
    if session.photometry is None:
        return ()
    solution = fitting_solution(session)
    model = _model_for(session.photometry, solution, session.system) if residuals else None
    if residuals and model is None:
        return ()
    x = session.photometry.time - zero
    return _by_band(session.photometry, solution, x, model, magnitudes=magnitudes, zero=zero)


def band_shifts(points: tuple[LightPoints, ...], *, magnitudes: bool = False) -> tuple[float, ...]:
    """How far to move each band downwards on the page so that several can be seen in one picture."""
    if len(points) < 2:
        return tuple(0.0 for _ in points)
    ranges = [float(np.subtract(*np.nanpercentile(p.y, [99.5, 0.5]))) for p in points if p.y.size]
    shift = SHIFT * max(ranges, default=1.0) * (1 if magnitudes else -1)
    return tuple(shift * number for number in range(len(points)))


def night_starts(photometry: Photometry, zero: float) -> Floats:
    """Times less `zero` at which a night or segment begins [d]."""
    changes = np.flatnonzero(np.diff(photometry.time) > 0.25) + 1
    return (
        photometry.time[np.concatenate(([0], changes))] - zero
        if photometry.time.size
        else photometry.time
    )


def to_magnitudes(flux: Floats) -> Floats:
    """-2.5 log10 of flux; NaN where there is none."""
    with np.errstate(invalid="ignore", divide="ignore"):
        return -2.5 * np.log10(np.where(flux > 0, flux, np.nan))


def _light(
    photometry: Photometry, solution: Solution | None, period: float, epoch: float, magnitudes: bool
) -> tuple[LightPoints, ...]:
    x = folded_time(photometry, period, epoch)
    return _by_band(photometry, solution, x, None, magnitudes=magnitudes, zero=0.0)


def _residuals(
    photometry: Photometry,
    solution: Solution | None,
    system: System | None,
    period: float,
    epoch: float,
    magnitudes: bool,
) -> tuple[LightPoints, ...]:
    model = _model_for(photometry, solution, system)
    if model is None:
        return ()
    x = folded_time(photometry, period, epoch)
    return _by_band(photometry, solution, x, model, magnitudes=magnitudes, zero=0.0)


def _by_band(
    photometry: Photometry,
    solution: Solution | None,
    x: Floats,
    model: Floats | None,
    *,
    magnitudes: bool,
    zero: float,
) -> tuple[LightPoints, ...]:
    y, error = _values(photometry, solution, model, magnitudes=magnitudes)
    why = photometry.why
    outlier = np.zeros(why.size, dtype=bool)
    if solution is not None:
        why = np.where(photometry.why == USED, solution.light.why, photometry.why)
        outlier = (photometry.why == USED) & np.isin(why, _outlier_codes(solution))
    found = []
    for number, label in enumerate(photometry.bands):
        rows = np.flatnonzero((photometry.band == number) & np.isfinite(y))
        found.append(
            LightPoints(
                number, label, x[rows], y[rows], error[rows], rows, why[rows] == USED,
                outlier[rows], zero,
            )
        )  # fmt: skip
    return tuple(found)


def _outlier_codes(solution: Solution) -> list[int]:
    """Codes of the rows that the fit set aside by itself; stretches that a person left out have other ones."""
    reasons = enumerate(solution.light.reasons)
    return [code for code, reason in reasons if reason.startswith("outlier")]


def fitting_solution(session: Session) -> Solution | None:
    """The session's solution where it belongs to the session's photometry row by row."""
    solution, photometry = session.solution, session.photometry
    if solution is None or photometry is None or solution.light.model.size != photometry.time.size:
        return None
    return solution


def _model_for(
    photometry: Photometry, solution: Solution | None, system: System | None
) -> Floats | None:
    """(n,) the model with levels at every row: of the solution, or of a system moved by hand since."""
    if solution is None:
        return None
    if system is None or system is solution.system:
        return solution.light.model
    from shadowscale.fit.model import model_light

    model = np.empty_like(photometry.flux)
    for number, band in enumerate(photometry.bands):
        rows = photometry.band == number
        model[rows] = model_light(system, band, photometry.time[rows])
    moved: Floats = model * solution.light.level
    return moved


def _values(
    photometry: Photometry, solution: Solution | None, model: Floats | None, *, magnitudes: bool
) -> tuple[Floats, Floats]:
    """Light, or with a model what it leaves over, and the errors; levels taken off."""
    level = np.ones_like(photometry.flux) if solution is None else solution.light.level
    flux, error = photometry.flux / level, photometry.flux_error / level
    if magnitudes:
        shown = to_magnitudes(flux)
        if model is not None:
            shown = shown - to_magnitudes(model / level)
        with np.errstate(invalid="ignore", divide="ignore"):
            return shown, np.where(flux > 0, MAGNITUDE * error / flux, 0.0)
    return (flux if model is None else flux - model / level), error


def sensible_range(
    points: tuple[LightPoints, ...],
    shifts: tuple[float, ...],
    *,
    within: tuple[float, float] | None = None,
) -> tuple[float, float] | None:
    """Lowest and highest value worth showing: of the points that take part, the wildest 0.2 % left out.

    `within` a stretch of x only; None where no points are there.
    """
    values = [_thinned(each, within) for each in points]
    ends = [
        tuple(float(end) + shift for end in np.percentile(each, (0.1, 99.9)))
        for each, shift in zip(values, shifts, strict=True)
        if each.size
    ]
    if not ends:
        return None
    low, high = min(end[0] for end in ends), max(end[1] for end in ends)
    margin = 0.12 * (high - low) or 1e-3
    return low - margin, high + margin


def _thinned(points: LightPoints, within: tuple[float, float] | None) -> Floats:
    """Values of the points that take part, evenly thinned where there are very many."""
    taken = points.used
    if within is not None:
        taken = taken & (points.x >= within[0]) & (points.x <= within[1])
    values = points.y[taken]
    return values[:: 1 + values.size // ENOUGH]


_PHASE = Last(lambda photometry, period, epoch: fold(photometry.time, period, epoch))
_LIGHT, _RESIDUALS = Last(_light), Last(_residuals)
