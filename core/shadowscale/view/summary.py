"""The fit in one line."""

from __future__ import annotations

from shadowscale.session.session import Session
from shadowscale.view.follow import FOLLOWED
from shadowscale.view.shown import moved_by_hand


def summary(session: Session) -> str:
    """Points, and how well the model fits them; for a session without a solution what it holds."""
    solution, photometry = session.solution, session.photometry
    if solution is not None:
        worst = max(solution.fit.rms_light.values(), default=0.0)
        followed = ", errors linear until solved" if FOLLOWED in solution.notes else ""
        if moved_by_hand(session):
            return "moved by hand: Solve (F5) fits from here"
        return (
            f"{solution.fit.points} points, {solution.fit.free} free, "
            f"\N{GREEK SMALL LETTER CHI}\N{SUPERSCRIPT TWO}/dof {solution.fit.reduced_chi2:.2f}, rms {1000 * worst:.2f} \N{PER MILLE SIGN}{followed}"
        )
    if photometry is None:
        return ""
    rows = int(photometry.used.sum())
    velocities = session.velocities
    more = (
        ""
        if velocities is None
        else f", {int(velocities.used1.sum() + velocities.used2.sum())} velocities"
    )
    return f"{rows} of {photometry.time.size} points{more}, not solved"
