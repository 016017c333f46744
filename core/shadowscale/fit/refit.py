"""A solution followed from where it stands: what a dragged marker or a typed value asks for."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace

from shadowscale.data.limb_tables import read_limb_table
from shadowscale.data.photometry import Ints, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.limb import limb_choices
from shadowscale.fit.plan import Plan
from shadowscale.fit.priors import prior_constraints
from shadowscale.fit.problem import Problem, Weighting, fit_system
from shadowscale.fit.result import assemble
from shadowscale.fit.solution import Solution

_JITTER = re.compile(r"^(?P<source>.*), star (?P<star>[12])$")


def refit(
    solution: Solution,
    photometry: Photometry,
    velocities: Velocities | None,
    plan: Plan,
    *,
    start: Mapping[str, float] | None = None,
) -> Solution:
    """Fit again with what the solution decided: free quantities, levels, orbit, weights, outliers.

    Parameters
    ----------
    solution : Solution
        Its system is where the fit starts.
    photometry, velocities, plan
        As of `solve`; rows set aside meanwhile stay aside.
    start : mapping of key to value, optional
        Values to start from instead of the solution's.

    Returns
    -------
    Solution
        With linear errors; contact solution, decisions and alternatives are those of `solution`,
        since no other minimum is looked for.
    """
    taken = {name: value for name, value in (start or {}).items() if name in solution.system.values}
    system = solution.system.with_values(taken)
    table = None if plan.limb_table is None else read_limb_table(plan.limb_table)
    choices, _ = limb_choices(plan, system.bands, system.values, table=table)
    rules = [rule for choice in choices.values() for rule in choice.constraints]
    problem = Problem(photometry, velocities)
    weighting = _weighting(problem, solution)
    fitted = fit_system(
        problem, system, weighting=weighting,
        constraints=[*rules, *prior_constraints(plan, system)],
    )  # fmt: skip
    found = assemble(
        fitted, problem=problem, plan=plan, weighting=weighting, ground=None, branches=(),
        decisions=solution.decisions, notes=solution.notes,
    )  # fmt: skip
    return replace(found, contact=solution.contact, alternatives=solution.alternatives)


def _weighting(problem: Problem, solution: Solution) -> Weighting:
    """The solution's weights, where its rows still are the table's."""
    fresh = problem.weighting()
    why = solution.light.why
    aligned = why.size == fresh.why.size
    weighting = replace(fresh, light_scale=solution.fit.error_scale)
    if aligned:
        # What the table sets aside now, and what the fit had set aside.
        outlier = len(solution.light.reasons) - 1
        weighting = replace(weighting, why=_joined(fresh.why, why, outlier))
    velocities, result = problem.velocities, solution.velocity
    if velocities is None or result is None:
        return weighting
    jitter = {}
    for name, value in solution.fit.jitter.items():
        match = _JITTER.match(name)
        if match is not None and match["source"] in velocities.sources:
            jitter[int(match["star"]), velocities.sources.index(match["source"])] = value
    errors = {}
    if velocities.errors_from_scatter:
        rms = solution.fit.rms_velocity
        errors = {star: rms[f"star {star}"] for star in (1, 2) if f"star {star}" in rms}
    return replace(weighting, jitter=jitter, star_error=errors)


def _joined(table: Ints, fit: Ints, outlier: int) -> Ints:
    """The table's reasons, with the fit's outliers among the rows that take part."""
    why = table.copy()
    why[(table == 0) & (fit == outlier)] = outlier
    return why
