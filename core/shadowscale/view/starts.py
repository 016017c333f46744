"""Solving from many starts: whether the data exclude everything but one pair of stars."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import sqrt

import numpy as np

from shadowscale.errors import NoSolutionError, Stopped
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Alternative, Solution
from shadowscale.progress import SILENT, Progress
from shadowscale.session.session import Session
from shadowscale.view.wishes import for_refit

STARTS = 12
SPREAD = {
    "radius_sum": 0.08,
    "radius_ratio": 0.45,
    "inclination": 0.02,
}  # relative, of the log or value
SAME = 3.0  # solutions closer than this many errors in every quantity are one
NOT_EXCLUDED = 25.0  # of chi-squared
COMPARED = ("radius_sum", "radius_ratio", "inclination", "ecosw", "esinw")


def solve_from_many_starts(session: Session, *, progress: Progress = SILENT) -> Session:
    """The session with the best solution of many starts and the plan that leads there.

    The others are among its alternatives. A stop keeps what was found until then.

    Parameters
    ----------
    session : Session
        Solved; its plan's seed makes the starts repeat.
    progress : Progress
        Told of each start; may raise `Stopped`, which ends the search.

    Raises
    ------
    NoSolutionError
        If there is no solution to start from.
    Stopped
        Where nothing was found before it.
    """
    from shadowscale.fit.solve import solve
    from shadowscale.jobs.solve import Share, tables_to_solve

    if session.photometry is None or session.solution is None:
        raise NoSolutionError("there is no solution to start from", help="solve first")
    found: list[Solution] = [session.solution]
    plans = [session.plan]
    starts = _starts(session, np.random.default_rng(session.plan.seed))
    tried = 0
    for tried, plan in enumerate(starts):
        part = Share(progress, tried / len(starts), (tried + 1) / len(starts))
        words = f"start {tried + 1} of {len(starts)}"
        try:
            progress.report(part.start, words)
            found.append(
                solve(
                    tables_to_solve(session),
                    session.velocities,
                    plan,
                    progress=Worded(part, words),
                )
            )
        except NoSolutionError:
            continue
        except Stopped:
            if not tried:
                raise
            break
        plans.append(plan)
    else:
        tried = len(starts)
    note = f"the best of {tried} further starts of {len(starts)} that were to be tried"
    number = min(range(len(found)), key=lambda index: found[index].fit.chi2)
    best = found[number]
    others = [
        each for each in _distinct(found, best) if each.fit.chi2 - best.fit.chi2 < NOT_EXCLUDED
    ]
    alternatives = (*best.alternatives, *(_alternative(each, best) for each in others))
    solution = replace(best, alternatives=alternatives, notes=(*best.notes, note))
    return replace(
        session,
        plan=plans[number],
        solution=solution,
        system=solution.system,
        contact=solution.contact,
        versions={},
    )


@dataclass(frozen=True)
class Worded:
    """A progress that always says the same."""

    whole: Progress
    words: str

    def report(self, fraction: float, words: str) -> None:
        """Pass the fraction on."""
        self.whole.report(fraction, self.words)


def _starts(session: Session, random: np.random.Generator) -> list[Plan]:
    system = session.system
    assert system is not None
    plan = for_refit(session).plan  # the ephemeris stands; only the geometry is started anew
    plans = []
    for number in range(STARTS):
        start = dict(plan.start)
        turned = -1.0 if number % 2 else 1.0  # every other one begins with the radii exchanged
        ratio = system.value("radius_ratio") ** turned
        start["radius_ratio"] = ratio * float(
            np.exp(SPREAD["radius_ratio"] * random.standard_normal())
        )
        total = system.value("radius_sum")
        start["radius_sum"] = total * float(np.exp(SPREAD["radius_sum"] * random.standard_normal()))
        tilt = abs(float(random.standard_normal())) * SPREAD["inclination"] * 90.0
        start["inclination"] = min(90.0, max(60.0, system.value("inclination") + 1.0 - tilt))
        plans.append(replace(plan, start=start))
    return plans


def _distinct(found: list[Solution], best: Solution) -> list[Solution]:
    kept: list[Solution] = []
    for solution in sorted(found, key=lambda each: each.fit.chi2):
        if not any(_same(solution, other) for other in (best, *kept)):
            kept.append(solution)
    return kept


def _same(first: Solution, second: Solution) -> bool:
    for name in COMPARED:
        pair = [each.estimates.get(name) for each in (first, second)]
        if pair[0] is None or pair[1] is None:
            continue
        error = sqrt((pair[0].plus or 0.0) ** 2 + (pair[1].plus or 0.0) ** 2)
        if abs(pair[0].value - pair[1].value) > SAME * max(error, 1e-6):
            return False
    return True


def _alternative(solution: Solution, best: Solution) -> Alternative:
    values = {
        name: solution.system.values[name] for name in COMPARED if name in solution.system.values
    }
    return Alternative("found from another start", values, solution.fit.chi2 - best.fit.chi2)
