"""Long jobs while other things happen: what is late never stands for what is there now."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable, Iterator
from dataclasses import replace

import pytest
from PySide6.QtWidgets import QApplication

from made_up import made_up_session
from shadowscale.jobs import solve as solving
from shadowscale.progress import Progress
from shadowscale.session.session import Session
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.work import LATE


class Slow:
    """Stands in for the solver: goes on until it is let go or stopped, and keeps what it was given."""

    def __init__(self) -> None:
        self.given: list[Session] = []
        self.gate = threading.Event()

    def __call__(self, session: Session, *, progress: Progress) -> Session:
        self.given.append(session)
        while not self.gate.is_set():
            progress.report(0.5, "solving")
            time.sleep(0.001)
        return replace(session, solution=replace(made_up_session().solution))


@pytest.fixture
def slow(monkeypatch: pytest.MonkeyPatch) -> Iterator[Slow]:
    found = Slow()
    monkeypatch.setattr(solving, "solve_session", found)
    yield found
    found.gate.set()


def until(true: Callable[[], bool]) -> None:
    """Let events pass until something is so."""
    end = time.monotonic() + 20
    while not true():
        assert time.monotonic() < end
        QApplication.processEvents()


def test_a_solution_of_another_session_never_arrives(bench: Bench, slow: Slow) -> None:
    bench.work.solve()
    until(lambda: len(slow.given) == 1)
    other = replace(made_up_session(solved=False), name="other")

    bench.desk.begin(other)

    assert bench.long_lane.wait_until_idle()
    assert bench.desk.session is other
    assert not bench.status.bar.isVisible()


def test_what_is_asked_for_the_new_session_begins_when_the_old_one_ended(
    bench: Bench, slow: Slow
) -> None:
    bench.work.solve()
    until(lambda: len(slow.given) == 1)
    other = replace(made_up_session(solved=False), name="other")
    bench.desk.begin(other)

    bench.work.solve()
    until(lambda: len(slow.given) == 2)

    assert slow.given[1] is other
    assert bench.status.bar.isVisible()
    slow.gate.set()
    assert bench.long_lane.wait_until_idle()
    assert bench.desk.session.name == "other"
    assert bench.desk.session.solution is not None


@pytest.mark.parametrize("following", [True, False])
def test_what_changed_while_it_was_solved_is_said_and_solved_again(
    bench: Bench, slow: Slow, following: bool
) -> None:
    bench.live.following = following
    bench.work.solve()
    until(lambda: len(slow.given) == 1)
    plan = replace(bench.desk.session.plan, orbit="eccentric")
    bench.live.forget()
    bench.desk.apply(Change("Set orbit", replace(bench.desk.session, plan=plan)))
    bench.live.forget()

    slow.gate.set()
    until(lambda: not bench.work.running)
    told = bench.status.words.text()
    if following:
        until(lambda: len(slow.given) == 2 and not bench.work.running)
        assert slow.given[1].plan.orbit == "eccentric"
    else:
        assert told == LATE
        assert len(slow.given) == 1
    bench.live.following = False
    bench.live.forget()


def test_a_contact_that_was_moved_meanwhile_asks_for_nothing(bench: Bench, slow: Slow) -> None:
    bench.work.solve()
    until(lambda: len(slow.given) == 1)
    markers = bench.desk.session.markers
    first, *rest = markers.primary
    moved = replace(markers, primary=(first - 0.001, *rest))
    bench.desk.apply(Change("Move", replace(bench.desk.session, markers=moved)))

    slow.gate.set()

    assert bench.long_lane.wait_until_idle()
    assert bench.status.words.text() == "Solved."
    assert moved == bench.desk.session.markers
