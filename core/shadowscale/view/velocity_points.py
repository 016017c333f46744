"""Velocities as a picture shows them: star by star, folded, offsets between sources taken off."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import USED, Floats, Ints
from shadowscale.fit.solution import VelocityResult
from shadowscale.session.session import Session
from shadowscale.view.light_points import ephemeris, fold


@dataclass(frozen=True, eq=False)
class VelocityPoints:
    """The measured velocities of one star; x in cycles, the rest in km/s.

    residual : (m,) float64, NaN without a solution; rows index the table.
    """

    star: int
    x: Floats
    y: Floats
    error: Floats
    residual: Floats
    rows: Ints
    used: NDArray[np.bool_]


def velocities_over_phase(session: Session) -> tuple[VelocityPoints, ...]:
    """Both stars' velocities over phases -0.25...0.75; empty without velocities or ephemeris."""
    table, found = session.velocities, ephemeris(session)
    if table is None or found is None:
        return ()
    phase = fold(table.time, *found)
    result = _result(session)
    points = []
    for star in (1, 2):
        rv, error = getattr(table, f"rv{star}"), getattr(table, f"rv{star}_error")
        why = getattr(table, f"why{star}") if result is None else getattr(result, f"why{star}")
        rows = np.flatnonzero(np.isfinite(rv))
        shift = _offsets(session, star)[table.source]
        model = _model(session, result, star, shift)
        points.append(
            VelocityPoints(
                star,
                phase[rows],
                (rv - shift)[rows],
                error[rows],
                (rv - model)[rows],
                rows,
                why[rows] == USED,
            )
        )
    return tuple(point for point in points if point.x.size)


def _result(session: Session) -> VelocityResult | None:
    table, solution = session.velocities, session.solution
    if table is None or solution is None or solution.velocity is None:
        return None
    return solution.velocity if solution.velocity.model1.size == table.time.size else None


def _model(session: Session, result: VelocityResult | None, star: int, shift: Floats) -> Floats:
    """The model at every row: of the solution, or of a system moved by hand since; NaN without one."""
    table, system, solution = session.velocities, session.system, session.solution
    assert table is not None
    if result is None or system is None or solution is None:
        return np.full(table.time.size, np.nan)
    if system is solution.system or not system.has(f"K{star}"):
        found: Floats = getattr(result, f"model{star}")
        return found
    from shadowscale.fit.model import model_velocities

    return model_velocities(system, star, table.time) + shift


def _offsets(session: Session, star: int) -> Floats:
    table = session.velocities
    assert table is not None
    values = {} if session.system is None else session.system.values
    return np.array([values.get(f"offset{star}[{source}]", 0.0) for source in table.sources])
