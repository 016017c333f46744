"""An ephemeris through times of minimum."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats
from shadowscale.errors import NoSolutionError
from shadowscale.timing.results import Ephemeris, Minimum

HELP = "time more minima"


def fit_ephemeris(minima: Sequence[Minimum], *, quadratic: bool = False) -> Ephemeris:
    """Weighted least squares: time = epoch + period (cycle + phase2) [+ change cycle^2].

    Parameters
    ----------
    minima : sequence of Minimum
        Those with `why_not` are left out. Secondary minima share the period and have a phase of their own.
    quadratic : bool
        Fit a change of the period too.

    Returns
    -------
    Ephemeris
        Errors scaled by the scatter where that is larger than the minima's errors say.

    Raises
    ------
    NoSolutionError
        If the minima cannot give what is fitted.
    """
    used = tuple(minimum for minimum in minima if not minimum.why_not and minimum.error > 0)
    cycle = np.array([minimum.cycle for minimum in used], float)
    second = np.array([minimum.eclipse == 2 for minimum in used], bool)
    _check(cycle, second, 3 if quadratic else 2)
    time = np.array([minimum.time for minimum in used])
    origin = float(np.median(time))
    columns = [np.ones(cycle.size), cycle]
    if quadratic:
        columns.append(cycle**2)
    if second.any():
        columns.append(second.astype(float))
    error = np.array([minimum.error for minimum in used])
    values, covariance, residuals = _solved(np.stack(columns, axis=1), time - origin, error)
    freedom = cycle.size - values.size
    reduced = float(np.sum((residuals / error) ** 2) / freedom) if freedom > 0 else 1.0
    return _ephemeris(
        values,
        covariance * max(1.0, reduced),
        quadratic=quadratic,
        second=bool(second.any()),
        origin=origin,
        minima=used,
        residuals=residuals,
        reduced=reduced,
    )


def _check(cycle: Floats, second: NDArray[np.bool_], fewest: int) -> None:
    primary = np.unique(cycle[~second]).size
    secondary = np.unique(cycle[second]).size
    enough = max(primary, secondary) >= fewest and (primary > 0 or secondary == 0)
    if not enough:
        numbers = {"primary minima": float(primary), "secondary minima": float(secondary)}
        raise NoSolutionError(
            "too few cycles with a timed minimum for an ephemeris", numbers, help=HELP
        )


def _solved(columns: Floats, time: Floats, error: Floats) -> tuple[Floats, Floats, Floats]:
    """Values, covariance and residuals; columns are scaled first, cycle numbers may be large."""
    rows = columns / error[:, None]
    scale = np.linalg.norm(rows, axis=0)
    inverse = np.linalg.pinv(rows / scale)
    values = inverse @ (time / error) / scale
    covariance = inverse @ inverse.T / np.outer(scale, scale)
    return values, covariance, time - columns @ values


def _ephemeris(
    values: Floats,
    covariance: Floats,
    *,
    quadratic: bool,
    second: bool,
    origin: float,
    minima: tuple[Minimum, ...],
    residuals: Floats,
    reduced: float,
) -> Ephemeris:
    period = float(values[1])
    names = ["epoch", "period"] + ["change"] * quadratic + ["secondary_phase"] * second
    if second:
        # The fit has the secondary's distance in days; its phase depends on the period as well.
        turn = np.eye(values.size)
        turn[-1, -1] = 1 / period
        turn[-1, 1] = -values[-1] / period**2
        covariance = turn @ covariance @ turn.T
    errors = dict(zip(names, np.sqrt(np.diag(covariance)).tolist(), strict=True))
    return Ephemeris(
        epoch=float(origin + values[0]),
        period=period,
        change=float(values[2]) if quadratic else None,
        secondary_phase=float(values[-1] / period) if second else None,
        errors=errors,
        covariance=covariance,
        minima=minima,
        residuals=residuals,
        reduced_chi2=reduced,
    )
