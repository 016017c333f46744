"""The solution sought from many starts, for pairs whose ratio of radii hides behind several minima."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from math import log

import numpy as np

from shadowscale.errors import NoSolutionError
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Solution
from shadowscale.jobs.solve import Share, solve_session
from shadowscale.progress import SILENT, Progress
from shadowscale.session.session import Session
from shadowscale.session.tables import with_tables

RATIOS = (0.35, 0.55, 0.8, 1.0, 1.25, 1.8, 2.9)
BETTER = 1.0  # fall of the misfit below which the plain start keeps its place


def solve_from_many_starts(session: Session, *, progress: Progress = SILENT) -> Session:
    """The best solution of the ordinary start and of one at each of `RATIOS`.

    Where another start wins, the plan of the session says so (`Plan.start`), and `solve` with that
    plan repeats it.

    Raises
    ------
    InputError
        A file cannot be used.
    NoSolutionError
        No start leads to a solution that may be reported.
    """
    ready = session if session.photometry is not None else with_tables(session)
    best, trouble = None, None
    plans = list(_plans(ready.plan))
    for number, plan in enumerate(plans):
        share = Share(progress, number / len(plans), (number + 1) / len(plans))
        try:
            found = solve_session(replace(ready, plan=plan), progress=share)
        except NoSolutionError as error:
            trouble = trouble or error
            continue
        if best is None or _misfit(found) < _misfit(best) - BETTER:
            best = found
    if best is None:
        assert trouble is not None
        raise trouble
    return best


def _plans(plan: Plan) -> Iterator[Plan]:
    """The plan as it is, then with each start."""
    yield plan
    for ratio in RATIOS:
        yield replace(plan, start={**plan.start, "radius_ratio": ratio})


def _misfit(session: Session) -> float:
    """Twice the fall of the log-likelihood, with each set's error scale free: n ln(reduced chi2)."""
    solution = session.solution
    assert solution is not None
    raw = solution.fit.raw_reduced_chi2
    return sum(_points(session, solution, name) * log(max(raw[name], 1e-12)) for name in raw)


def _points(session: Session, solution: Solution, name: str) -> int:
    """How many used points a band has; for velocities an equal share of theirs."""
    photometry, velocity = session.photometry, solution.velocity
    assert photometry is not None
    if name in photometry.bands:
        mine = photometry.band == photometry.bands.index(name)
        return int(np.count_nonzero(mine & (solution.light.why == 0)))
    if velocity is None:
        return 0
    used = np.count_nonzero(velocity.why1 == 0) + np.count_nonzero(velocity.why2 == 0)
    sets = sum(other not in photometry.bands for other in solution.fit.raw_reduced_chi2)
    return int(used) // max(sets, 1)
