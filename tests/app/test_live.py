"""The loop of a drag: geometry at once, the fit behind it; stale fits never reach the window."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from dataclasses import replace

import pytest

from hands import drag
from made_up import made_up_session
from shadowscale.errors import NotConvergedError
from shadowscale.jobs import solve as jobs_solve
from shadowscale.progress import SILENT, Progress
from shadowscale.session.session import Session
from shadowscale.view.follow import Origin, markers_moved
from shadowscale.view.markers import moved
from shadowscale.view.rows import with_state, with_value
from shadowscale_app import live
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.models.quantities import VALUE


class Solver:
    """Stands in for both solvers: answers with an inclination of its own, when it is let."""

    def __init__(self) -> None:
        self.asked: list[Session] = []
        self.moved: list[bool] = []
        self.gate = threading.Event()
        self.gate.set()
        self.error: Exception | None = None

    def __call__(self, session: Session, *, progress: Progress = SILENT) -> Session:
        self.asked.append(session)
        self.gate.wait(20)
        progress.report(0.5, "fitting")
        return self.answer(session)

    def follow(self, session: Session, origin: Origin) -> Session:
        self.asked.append(session)
        self.moved.append(markers_moved(session, origin))
        self.gate.wait(20)
        return self.answer(session)

    def answer(self, session: Session) -> Session:
        if self.error is not None:
            raise self.error
        found = made_up_session().solution
        system = found.system.with_values({"inclination": 80.0 + len(self.asked)})
        value = replace(found.estimates["inclination"], value=80.0 + len(self.asked))
        estimates = {**found.estimates, "inclination": value}
        return replace(
            session, system=system, solution=replace(found, system=system, estimates=estimates)
        )


@pytest.fixture
def solver(monkeypatch: pytest.MonkeyPatch) -> Solver:
    found = Solver()
    monkeypatch.setattr(jobs_solve, "solve_session", found)
    monkeypatch.setattr(live, "follow", found.follow)
    return found


@pytest.fixture
def following(bench: Bench) -> Iterator[Bench]:
    """The bench with the fit in its own thread, following changes."""
    bench.lane.immediate = False
    bench.live.following = True
    return bench


def hold_third_light(bench: Bench) -> None:
    """Something that changes what a fit would find."""
    bench.desk.apply(Change("Hold", with_state(bench.desk.session, "third_light[V]", "held")))


def shown_inclination(bench: Bench) -> str:
    model = bench.panes["Quantities"].model
    return str(model.index(model.row_of("inclination"), VALUE).data())


def test_a_drag_is_followed_by_a_fit_and_the_table_shows_it(
    following: Bench, solver: Solver
) -> None:
    picture = following.panes["Eclipses"].pairs["primary"].curve
    start = following.desk.session.markers.primary[0]

    drag(picture, start, start - 0.006)
    assert following.live.wait_until_idle()

    assert len(solver.asked) >= 1
    assert shown_inclination(following) == f"{80 + len(solver.asked)}.000"
    assert start - 0.006 == pytest.approx(following.desk.session.markers.primary[0], abs=1e-3)


def test_only_moved_markers_give_the_fit_its_start(following: Bench, solver: Solver) -> None:
    picture = following.panes["Eclipses"].pairs["primary"].curve
    start = following.desk.session.markers.primary[0]

    drag(picture, start, start - 0.006)
    assert following.live.wait_until_idle()
    hold_third_light(following)
    assert following.live.wait_until_idle()

    assert solver.moved == [True] * (len(solver.moved) - 1) + [False]
    assert solver.asked[-2].contact is following.desk.session.contact


def test_while_a_quick_fit_runs_the_next_one_waits_and_takes_the_newest(
    following: Bench, solver: Solver
) -> None:
    solver.gate.clear()
    markers = following.desk.session.markers
    following.live._submit()
    for step in range(1, 6):
        moved_markers = moved(markers, "primary.0", markers.primary[0] - 1e-3 * step)
        following.desk.apply(
            Change("Move", replace(following.desk.session, markers=moved_markers), "a drag")
        )
        following.live._timer.stop()
        following.live._submit()

    solver.gate.set()
    assert following.live.wait_until_idle()

    assert len(solver.asked) == 2
    assert solver.asked[-1].markers is following.desk.session.markers
    assert shown_inclination(following) == "82.000"


def test_another_model_needs_the_whole_solver(following: Bench, solver: Solver) -> None:
    session = following.desk.session
    following.desk.apply(
        Change("Law", replace(session, plan=replace(session.plan, law="quadratic")))
    )

    assert following.live.wait_until_idle()

    assert len(solver.asked) == 1
    assert solver.moved == []


def test_a_fit_is_no_step_of_its_own(following: Bench, solver: Solver) -> None:
    before = following.desk.session
    position = following.desk.history.position
    hold_third_light(following)

    assert following.live.wait_until_idle()

    assert shown_inclination(following) == "81.000"
    assert position + 1 == following.desk.history.position
    following.desk.undo()
    assert following.desk.session is before


def test_an_overtaken_fit_never_arrives(following: Bench, solver: Solver) -> None:
    solver.gate.clear()
    for law in ("linear", "quadratic"):
        session = following.desk.session
        following.desk.apply(Change("Law", replace(session, plan=replace(session.plan, law=law))))
        following.live._timer.stop()
        following.live._submit()

    solver.gate.set()
    assert following.live.wait_until_idle()

    assert solver.asked[-1].plan.law == "quadratic"
    assert shown_inclination(following) == f"{80 + len(solver.asked)}.000"


def test_a_quick_fit_of_other_wishes_is_not_shown(following: Bench, solver: Solver) -> None:
    solver.gate.clear()
    hold_third_light(following)
    following.live._timer.stop()
    following.live._submit()
    following.desk.apply(Change("Set", with_value(following.desk.session, "third_light[V]", 0.05)))
    following.live._timer.stop()
    following.live._submit()

    solver.gate.set()
    assert following.live.wait_until_idle()

    assert [each.plan.fixed["third_light[V]"] for each in solver.asked] == [(0.02,), (0.05,)]
    assert shown_inclination(following) == "82.000"


def test_undo_while_a_fit_runs_drops_its_answer(following: Bench, solver: Solver) -> None:
    before = following.desk.session
    solver.gate.clear()
    hold_third_light(following)
    following.live._timer.stop()
    following.live._submit()

    following.desk.undo()
    solver.gate.set()
    following.lane.wait_until_idle()

    assert following.desk.session is before


def test_a_fit_without_a_solution_is_told_and_nothing_is_lost(
    following: Bench, solver: Solver
) -> None:
    solver.error = NotConvergedError("the fit did not settle")
    solution = following.desk.session.solution

    hold_third_light(following)
    assert following.live.wait_until_idle()

    assert "the fit did not settle" in following.status.words.text()
    assert solution is following.desk.session.solution


def test_looking_and_typing_a_free_value_ask_for_no_fit(following: Bench, solver: Solver) -> None:
    following.actions_table.by_name["magnitudes"].trigger()
    following.panes["Quantities"].set_value("inclination", 88.0)

    assert following.live.wait_until_idle()

    assert solver.asked == []
    assert shown_inclination(following) == "88.000"


def test_switched_off_the_fit_does_not_follow(following: Bench, solver: Solver) -> None:
    following.actions_table.by_name["follow"].trigger()

    hold_third_light(following)
    following.live.wait_until_idle()

    assert solver.asked == []


def test_solve_puts_markers_and_is_one_step(following: Bench, solver: Solver) -> None:
    loaded = made_up_session(solved=False)
    following.desk.begin(loaded)

    following.actions_table.by_name["solve"].trigger()
    assert following.long_lane.wait_until_idle()

    session = following.desk.session
    assert session.solution is not None
    assert following.desk.history.undo_label == "Solve"
    assert shown_inclination(following) == "81.000"
