"""What a solution comes to in a few lines for a person."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

from shadowscale.fit.solution import DERIVED, Solution
from shadowscale.judge.finding import PASS
from shadowscale.quantities import QUANTITIES, written
from shadowscale.session.session import Session
from shadowscale.sheet.sheet import all_notes, rows_set_aside

SHOWN = (
    "period",
    "M1",
    "M2",
    "R1",
    "R2",
    "r1",
    "r2",
    "inclination",
    "eccentricity",
    "logg2",
)


def summary(session: Session, folder: Path) -> str:
    """Main quantities, doubts, rows set aside, and where the files are."""
    if session.solution is None:
        raise ValueError("the session is not solved")
    lines = [
        *_quantities(session.solution),
        *_doubts(session),
        *_rows(session),
        f"results are in {folder}",
    ]
    return "\n".join(lines) + "\n"


def _quantities(solution: Solution) -> Iterator[str]:
    given = solution.estimates
    for name in SHOWN:
        needed = name != "logg2" or "M2" not in given
        if name in given and needed:
            quantity, estimate = QUANTITIES[name], given[name]
            text = written(estimate.value, estimate.minus, estimate.plus)
            how = "held" if estimate.how == DERIVED else estimate.how
            held = "" if estimate.plus is not None else f"  ({how})"
            yield f"{quantity.name:<13}{text} {quantity.unit}".rstrip() + held


def _doubts(session: Session) -> Iterator[str]:
    solution = session.solution
    assert solution is not None
    for finding in session.audit:
        if finding.verdict != PASS:
            yield f"{finding.verdict}: {finding.words}"
    for alternative in solution.alternatives:
        yield f"also possible: {alternative.words}"


def _rows(session: Session) -> Iterator[str]:
    """What was guessed of the files, and how many rows were of no use and why."""
    solution, photometry, velocities = session.solution, session.photometry, session.velocities
    assert solution is not None
    assert photometry is not None
    for note in all_notes(solution, photometry, velocities):
        yield f"note: {note}"
    if reasons := rows_set_aside(solution, photometry, velocities):
        told = "; ".join(f"{count} {why}" for why, count in reasons.items())
        yield f"rows set aside: {told} (each with its line in light_curve.csv or velocity_curve.csv)"
