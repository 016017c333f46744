"""The numbers of the model that is drawn: the solution's, or those of a model that was moved by hand."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from math import isclose, isfinite, nan
from types import MappingProxyType

from shadowscale.fit.solution import ASSUMED, Estimate
from shadowscale.session.session import Session

NONE: Mapping[str, Estimate] = MappingProxyType({})


def moved_by_hand(session: Session) -> bool:
    """Whether values were set since the solution, so that its errors say nothing of the model."""
    system, solution = session.system, session.solution
    return system is not None and solution is not None and system.values != solution.system.values


def shown_estimates(session: Session) -> Mapping[str, Estimate]:
    """What is shown of each quantity; without its error where moving the model by hand changed it."""
    system, solution = session.system, session.solution
    if solution is None:
        return NONE
    if system is None or not moved_by_hand(session):
        return solution.estimates
    from shadowscale.fit.derived import assumed_inputs, derived_values

    given = {name: value for name, (value, _) in assumed_inputs(session.plan, system).items()}
    values = {**derived_values(system, given), **system.values}
    found = {}
    for name, estimate in solution.estimates.items():
        value = values.get(name, nan)
        if estimate.how == ASSUMED or isclose(value, estimate.value, rel_tol=1e-9):
            found[name] = estimate
        elif isfinite(value):
            found[name] = replace(estimate, value=value, minus=None, plus=None)
    return found
