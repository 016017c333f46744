"""Solving from many starts: what is kept of them."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from made_up import made_up_session
from shadowscale.errors import NoSolutionError, NotConvergedError, Stopped
from shadowscale.fit import solve as fit_solve
from shadowscale.fit.solution import Solution
from shadowscale.progress import Progress
from shadowscale.view.starts import STARTS, solve_from_many_starts


class Answers:
    """Stands in for the solver: every other start finds the radii exchanged, one finds nothing."""

    def __init__(self) -> None:
        self.plans: list[Any] = []

    def __call__(
        self, photometry: object, velocities: object, plan: Any, *, progress: Progress
    ) -> Solution:
        progress.report(0.5, "fitting")
        self.plans.append(plan)
        if len(self.plans) == 3:
            raise NotConvergedError("the fit did not settle")
        solution = made_up_session().solution
        if len(self.plans) % 2:
            return solution
        estimates = dict(solution.estimates)
        estimates["radius_ratio"] = replace(estimates["radius_ratio"], value=1.28)
        system = solution.system.with_values({"radius_ratio": 1.28})
        fit = replace(solution.fit, chi2=solution.fit.chi2 + 4.0)
        return replace(solution, estimates=estimates, system=system, fit=fit)


@pytest.fixture
def answers(monkeypatch: pytest.MonkeyPatch) -> Answers:
    found = Answers()
    monkeypatch.setattr(fit_solve, "solve", found)
    return found


def test_the_best_is_kept_and_the_others_are_alternatives(answers: Answers) -> None:
    session = made_up_session()

    found = solve_from_many_starts(session)

    assert len(answers.plans) == STARTS
    assert session.solution.fit.chi2 == found.solution.fit.chi2
    new = [each for each in found.solution.alternatives if each.words == "found from another start"]
    assert [(pytest.approx(each.delta_chi2), each.values["radius_ratio"]) for each in new] == [
        (4.0, 1.28)
    ]


def test_starts_differ_and_repeat_with_their_seed(answers: Answers) -> None:
    solve_from_many_starts(made_up_session())
    solve_from_many_starts(made_up_session())

    first, second = answers.plans[:STARTS], answers.plans[STARTS:]
    assert [plan.start for plan in first] == [plan.start for plan in second]
    ratios = [plan.start["radius_ratio"] for plan in first]
    assert min(ratios) < 1 < max(ratios)
    assert len(set(ratios)) == STARTS
    assert all(60 <= plan.start["inclination"] <= 90 for plan in first)


class Impatient:
    """Stops when so much is done."""

    def __init__(self, fraction: float) -> None:
        self.fraction = fraction
        self.words: list[str] = []

    def report(self, fraction: float, words: str) -> None:
        self.words.append(words)
        if fraction > self.fraction:
            raise Stopped


def test_a_stop_keeps_what_was_found(answers: Answers) -> None:
    impatient = Impatient(0.2)

    found = solve_from_many_starts(made_up_session(), progress=impatient)

    assert 0 < len(answers.plans) < STARTS
    assert any(each.words == "found from another start" for each in found.solution.alternatives)
    assert f"the best of 2 further starts of {STARTS}" in found.solution.notes[-1]
    assert set(impatient.words) == {f"start {number} of {STARTS}" for number in (1, 2, 3)}


def test_a_stop_before_anything_was_found_leaves_all_as_it_was(answers: Answers) -> None:
    with pytest.raises(Stopped, match=r"^$"):
        solve_from_many_starts(made_up_session(), progress=Impatient(0.01))
    assert len(answers.plans) == 0


def test_there_must_be_a_solution_to_start_from() -> None:
    with pytest.raises(NoSolutionError, match=r"there is no solution to start from.*solve first"):
        solve_from_many_starts(made_up_session(solved=False))


def test_the_plan_that_led_to_the_best_is_kept(
    answers: Answers, monkeypatch: pytest.MonkeyPatch
) -> None:
    def better(
        photometry: object, velocities: object, plan: Any, *, progress: Progress
    ) -> Solution:
        solution = answers(photometry, velocities, plan, progress=progress)
        chi2 = solution.fit.chi2 - 50.0 * (len(answers.plans) == 5)
        return replace(solution, fit=replace(solution.fit, chi2=chi2))

    monkeypatch.setattr(fit_solve, "solve", better)
    session = made_up_session()

    found = solve_from_many_starts(session)

    assert found.plan is answers.plans[4]
    assert found.plan.start["radius_ratio"] != session.system.value("radius_ratio")
