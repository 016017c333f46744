"""Which of many starts is kept; the solver itself is played by invented solutions."""

from dataclasses import replace

import pytest

from made_up import made_up_session
from shadowscale.errors import NotConvergedError
from shadowscale.jobs import starts
from shadowscale.jobs.starts import RATIOS, solve_from_many_starts


@pytest.fixture
def play(monkeypatch):
    """Let `solve_session` give the reduced chi2 that the test wants for each start."""
    asked = []

    def prepare(by_ratio):
        solved = made_up_session()

        def solve_session(session, *, progress):
            ratio = session.plan.start.get("radius_ratio")
            asked.append(ratio)
            reduced = by_ratio.get(ratio, 1.5)
            if reduced is None:
                raise NotConvergedError(f"nothing at {ratio}")
            progress.report(1.0, "done")
            fit = replace(solved.solution.fit, raw_reduced_chi2={"V": reduced, "star 1": 1.0})
            return replace(session, solution=replace(solved.solution, fit=fit))

        monkeypatch.setattr(starts, "solve_session", solve_session)
        return asked

    return prepare


class Told:
    def __init__(self):
        self.fractions = []

    def report(self, fraction, words):
        self.fractions.append(fraction)


def test_a_start_that_fits_better_wins_and_the_plan_says_so(play):
    asked = play({None: 1.2, 1.25: 1.1})
    progress = Told()
    found = solve_from_many_starts(made_up_session(solved=False), progress=progress)
    assert found.plan.start == {"radius_ratio": 1.25}
    assert found.solution.fit.raw_reduced_chi2["V"] == 1.1
    assert asked == [None, *RATIOS]
    assert progress.fractions == pytest.approx([(n + 1) / 8 for n in range(8)])


def test_the_plain_start_keeps_its_place_where_nothing_is_better(play):
    play({None: 1.1, 0.8: 1.1 * (1 - 1e-9)})
    found = solve_from_many_starts(made_up_session(solved=False))
    assert found.plan.start == {}


def test_starts_that_fail_are_passed_over_and_the_first_failure_is_told(play):
    play({None: None})
    assert solve_from_many_starts(made_up_session(solved=False)).plan.start == {
        "radius_ratio": 0.35
    }
    play(dict.fromkeys((None, *RATIOS)))
    with pytest.raises(NotConvergedError, match="nothing at None"):
        solve_from_many_starts(made_up_session(solved=False))
