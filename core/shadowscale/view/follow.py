"""A solution followed while a marker is pulled or a value typed, and when that is not enough."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from shadowscale.data.photometry import USED, Photometry
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Solution
from shadowscale.fit.system import System
from shadowscale.quantities import parse_key
from shadowscale.session.session import Markers, Session
from shadowscale.view.light_points import fitting_solution
from shadowscale.view.wishes import asks_for_solution, for_refit

FOLLOWED = (
    "followed from an earlier solution with linear errors; solve again to look for other minima"
)


@dataclass(frozen=True, eq=False)
class Origin:
    """What the present solution was found with."""

    solution: Solution | None
    plan: Plan
    markers: Markers | None


def origin_of(session: Session) -> Origin:
    """The session's solution with the plan and the markers that stand beside it."""
    return Origin(session.solution, session.plan, session.markers)


def can_follow(session: Session, origin: Origin) -> bool:
    """Whether the solution can be followed: it belongs to the tables, and the same model is wanted."""
    system = session.system
    if origin.solution is not session.solution or not _belongs(session) or system is None:
        return False
    before, after = origin.plan, session.plan
    return _modelled(before) == _modelled(after) and _obeyed(before, after, system)


def is_final(session: Session, found: Session) -> bool:
    """Whether solving the session again would give the solution it has, which was found as `found` stood."""
    solution = session.solution
    if solution is None or FOLLOWED in solution.notes or session.system is not found.system:
        return False
    return session.plan == found.plan and not asks_for_solution(found, session)


def follow(session: Session, origin: Origin) -> Session:
    """The session with its solution fitted again from where it stands; markers moved since give the start.

    Raises
    ------
    NoSolutionError
        There is none, or the audit forbids to report it.
    """
    from shadowscale.fit.refit import refit
    from shadowscale.jobs.solve import refuse_fatal, tables_to_solve
    from shadowscale.judge.audit import audit

    photometry = tables_to_solve(session)
    plan = for_refit(session).plan
    solution = refit(
        _with_present_codes(_wished(session), photometry),
        photometry,
        session.velocities,
        replace(plan, start=session.plan.start),
        start=plan.start if markers_moved(session, origin) else None,
    )
    solution = _noted(solution)
    findings = audit(solution, photometry, session.velocities)
    refuse_fatal(findings)
    return replace(session, system=solution.system, solution=solution, audit=findings, versions={})


def markers_moved(session: Session, origin: Origin) -> bool:
    """Whether the contacts are marked elsewhere than when the solution was found."""
    pair = [
        None if each is None else (each.primary, each.secondary)
        for each in (session.markers, origin.markers)
    ]
    return pair[0] != pair[1]


def _wished(session: Session) -> Solution:
    """The solution with the values, the freedom and the priors that are wanted now."""
    solution, system = session.solution, session.system
    assert solution is not None
    assert system is not None
    return replace(solution, system=replace(system, priors=session.plan.priors))


def _with_present_codes(solution: Solution, photometry: Photometry) -> Solution:
    """The solution with the codes of the table's reasons as they are now, outliers behind them."""
    light = solution.light
    outlier = len(photometry.reasons)
    why = np.where(
        (photometry.why == USED) & (light.why == len(light.reasons) - 1), outlier, photometry.why
    )
    reasons = (*photometry.reasons, light.reasons[-1])
    return replace(solution, light=replace(light, why=why, reasons=reasons))


def _noted(solution: Solution) -> Solution:
    if FOLLOWED in solution.notes:
        return solution
    return replace(solution, notes=(*solution.notes, FOLLOWED))


def _belongs(session: Session) -> bool:
    solution, velocities = fitting_solution(session), session.velocities
    if solution is None or session.photometry is None:
        return False
    if solution.system.bands != session.photometry.bands:
        return False
    rows = None if solution.velocity is None else solution.velocity.phase.size
    return rows == (None if velocities is None else velocities.time.size)


def _modelled(plan: Plan) -> Plan:
    """The plan without what can change under way: which quantities are free, their values and priors."""
    return replace(plan, start={}, fixed={}, free=(), priors=(), period=None, epoch=None)


def _obeyed(before: Plan, after: Plan, system: System) -> bool:
    """Whether the system already has the freedom that the plan asks for."""
    wishes = [{*plan.free, *plan.fixed, *(p.name for p in plan.priors)} for plan in (before, after)]
    if wishes[0] - wishes[1]:
        return False  # a wish was taken back: what stands in its place is for the solver to say
    free = {name: key in system.free for key in system.values for name in _names(key)}
    return all(free.get(name, False) for name in after.free) and not any(
        free.get(name, False) for name in after.fixed
    )


def _names(key: str) -> tuple[str, ...]:
    """The names by which a plan may mean a key: itself, without its number, without band or source."""
    parsed = parse_key(key)
    return (key, str(replace(parsed, number=None)), parsed.name)
