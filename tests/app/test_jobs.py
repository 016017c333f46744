"""The two lanes: newest wins, stale answers are dropped, stop works, nothing is left running."""

from __future__ import annotations

import threading
import time
from collections.abc import Iterator

import pytest
from PySide6.QtWidgets import QApplication

from shadowscale.errors import NotConvergedError, Stopped
from shadowscale.progress import Progress
from shadowscale_app.jobs import Answer, LiveLane, LongLane


@pytest.fixture
def live(qapp: QApplication) -> Iterator[LiveLane]:
    lane = LiveLane()
    yield lane
    lane.close()


@pytest.fixture
def long(qapp: QApplication) -> Iterator[LongLane]:
    lane = LongLane()
    yield lane
    lane.close()


def test_the_newest_request_is_answered_and_no_other(live: LiveLane) -> None:
    answers: list[Answer] = []
    live.answered.connect(answers.append)
    gate = threading.Event()
    live.submit(lambda _: (gate.wait(10), "first")[1])
    live.submit(lambda _: "second")
    live.submit(lambda _: "third")

    gate.set()

    assert live.wait_until_idle()
    assert [answer.result for answer in answers] == ["third"]


def test_a_newer_request_stops_the_one_that_runs(live: LiveLane) -> None:
    ended: list[str] = []

    def slow(progress: Progress) -> str:
        try:
            while True:
                progress.report(0.5, "working")
                time.sleep(0.001)
        except Stopped:
            ended.append("stopped")
            raise

    live.submit(slow)
    live.submit(lambda _: "quick")

    assert live.wait_until_idle()
    assert ended in (["stopped"], [])  # it may never have begun


def test_an_error_comes_back_as_an_object(live: LiveLane) -> None:
    answers: list[Answer] = []
    live.answered.connect(answers.append)

    def fail(_: Progress) -> object:
        raise NotConvergedError("the fit did not settle")

    live.submit(fail)

    assert live.wait_until_idle()
    assert str(answers[0].error) == "the fit did not settle"


def test_work_does_not_run_on_the_window_s_thread(live: LiveLane) -> None:
    answers: list[Answer] = []
    live.answered.connect(answers.append)

    live.submit(lambda _: threading.current_thread() is threading.main_thread())

    assert live.wait_until_idle()
    assert answers[0].result is False


def test_immediate_work_is_answered_before_submit_returns(qapp: QApplication) -> None:
    lane, answers = LiveLane(immediate=True), []
    lane.answered.connect(answers.append)

    lane.submit(lambda _: 42)

    assert [answer.result for answer in answers] == [42]


def test_a_long_job_tells_how_far_it_is(long: LongLane) -> None:
    told: list[tuple[float, str]] = []
    answers: list[Answer] = []
    long.progressed.connect(lambda fraction, words, _left: told.append((fraction, words)))
    long.answered.connect(answers.append)

    def work(progress: Progress) -> str:
        progress.report(0.0, "begin")
        progress.report(1.0, "end")
        return "done"

    assert long.start(work)
    assert long.wait_until_idle()
    assert answers[0].result == "done"
    assert told[-1] == (1.0, "end")


def test_stop_ends_a_long_job_without_an_answer(long: LongLane) -> None:
    answers: list[Answer] = []
    stopped: list[bool] = []
    long.answered.connect(answers.append)
    long.stopped.connect(lambda: stopped.append(True))
    running = threading.Event()

    def work(progress: Progress) -> None:
        while True:
            running.set()
            progress.report(0.1, "on and on")
            time.sleep(0.001)

    long.start(work)
    assert running.wait(10)
    assert not long.start(lambda _: None)  # one at a time

    long.stop()

    assert long.wait_until_idle()
    assert (answers, stopped) == ([], [True])


def test_work_that_keeps_what_it_has_goes_on_until_it_is_stopped_again(long: LongLane) -> None:
    answers: list[Answer] = []
    long.answered.connect(answers.append)
    told = threading.Event()
    stops: list[int] = []

    def work(progress: Progress) -> str:
        for stop in range(2):
            try:
                while True:
                    told.set()
                    progress.report(0.1, "searching")
                    time.sleep(0.001)
            except Stopped:
                stops.append(stop)
        return "what there was"

    long.start(work)
    for count in (1, 2):
        told.clear()
        assert told.wait(10)
        long.stop()
        until = time.monotonic() + 10
        while len(stops) < count and time.monotonic() < until:
            time.sleep(0.001)

    assert long.wait_until_idle()
    assert stops == [0, 1]
    assert [answer.result for answer in answers] == ["what there was"]


def test_closing_ends_work_that_would_go_on(qapp: QApplication) -> None:
    lane, running = LongLane(), threading.Event()

    def work(progress: Progress) -> None:
        for _ in range(3):  # it keeps what it has after the first
            try:
                while True:
                    running.set()
                    progress.report(0.1, "searching")
            except Stopped:
                continue

    lane.start(work)
    assert running.wait(10)
    lane.close()

    assert not lane.running


def test_new_words_are_told_at_once_and_repeated_ones_seldom(long: LongLane) -> None:
    told: list[str] = []
    long.progressed.connect(lambda _fraction, words, _left: told.append(words))

    def work(progress: Progress) -> str:
        for number in range(200):
            progress.report(number / 1000, "solving")
        progress.report(0.8, "writing")
        return "done"

    long.start(work)

    assert long.wait_until_idle()
    assert told[0] == "solving"
    assert told[-1] == "writing"
    assert len(told) < 20
