"""The period search and folding."""

from __future__ import annotations

import time
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from made_up import EPOCH, PERIOD, made_up_session
from shadowscale.errors import Stopped
from shadowscale.fit.plan import Plan
from shadowscale.progress import Progress
from shadowscale.timing import period as period_module
from shadowscale.timing.results import PeriodCandidate, PeriodSearch
from shadowscale_app.bench import NO_PERIOD, Bench


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


@pytest.fixture
def search(monkeypatch: pytest.MonkeyPatch) -> PeriodSearch:
    """Stands in for the search, which has tests of its own."""
    found = PeriodSearch(
        period=PERIOD,
        epoch=EPOCH,
        period_error=1e-5,
        candidates=(
            PeriodCandidate(PERIOD, EPOCH, 1.0, "deeper and shallower eclipses"),
            PeriodCandidate(2 * PERIOD, EPOCH, 0.4, "twice"),
        ),
        words="the eclipses differ in depth, so half the period is excluded",
    )
    monkeypatch.setattr(period_module, "search_period", lambda *_, **__: found)
    return found


@pytest.fixture
def loaded(bench: Bench) -> Bench:
    """Photometry without an ephemeris."""
    bench.desk.begin(replace(made_up_session(solved=False), plan=Plan()))
    return bench


def test_without_a_period_the_series_is_in_front_and_says_what_to_do(loaded: Bench) -> None:
    assert loaded.panes["Whole series"].isVisible()
    assert loaded.status.words.text() == NO_PERIOD
    assert loaded.panes["Folded curve"].pair.points.layers == ()


def test_the_search_folds_places_markers_and_lists_what_it_weighed(
    loaded: Bench, search: PeriodSearch
) -> None:
    loaded.actions_table.by_name["period"].trigger()
    assert loaded.long_lane.wait_until_idle()

    session = loaded.desk.session
    assert session.plan.period == PERIOD
    assert pytest.approx(session.markers.primary[0], abs=0.004) == -0.0433
    assert pytest.approx(sum(session.markers.secondary) / 4, abs=0.002) == 0.5
    assert pytest.approx(session.contact.values["radius_sum"], abs=0.02) == 0.269
    pane = loaded.panes["Period"]
    assert [pane.table.item(row, 0).text() for row in range(2)] == ["2.4371926", "4.8743852"]
    assert search.words == pane.words.text()
    assert loaded.panes["Folded curve"].pair.points.layers


def test_a_search_keeps_what_stands_on_a_period(bench: Bench, search: PeriodSearch) -> None:
    before = bench.desk.session
    bench.actions_table.by_name["period"].trigger()
    assert bench.long_lane.wait_until_idle()

    assert bench.desk.session is before
    assert bench.panes["Period"].table.rowCount() == 2
    assert "keeps its period" in bench.status.words.text()


def test_one_can_fold_with_another_period_and_go_back(loaded: Bench, search: PeriodSearch) -> None:
    pane = loaded.panes["Period"]
    pane.period.setText(f"{PERIOD}")
    pane.epoch.setText(f"{EPOCH}")
    pane.take.click()
    assert loaded.long_lane.wait_until_idle()
    assert loaded.desk.session.plan.period == PERIOD
    assert loaded.desk.history.undo_label == "Fold anew"

    loaded.desk.undo()

    assert loaded.desk.session.plan.period is None


def test_nonsense_for_a_period_is_refused_in_words(loaded: Bench) -> None:
    pane = loaded.panes["Period"]
    pane.period.setText("-2")
    pane.epoch.setText("2459000")

    pane.take.click()

    assert loaded.status.words.text() == "the period must be positive, found -2"


def test_a_stopped_search_keeps_what_it_has_and_says_what_it_left(
    loaded: Bench, search: PeriodSearch, monkeypatch: pytest.MonkeyPatch
) -> None:
    left = "stopped: no period from 2.5 to 30 d was searched"

    def endless(_photometry: object, *, progress: Progress, keep: bool) -> PeriodSearch:
        try:
            while True:
                progress.report(0.4, "searching periods")
                time.sleep(0.001)
        except Stopped:
            assert keep
        progress.report(0.9, "measuring the eclipses")
        return replace(search, words=left, left=(2.5, 30.0))

    monkeypatch.setattr(period_module, "search_period", endless)
    loaded.actions_table.by_name["period"].trigger()
    until = time.monotonic() + 10
    while loaded.status.doing.text() != "searching periods" and time.monotonic() < until:
        QApplication.processEvents()

    QTest.mouseClick(loaded.status.stop, Qt.MouseButton.LeftButton)

    assert loaded.long_lane.wait_until_idle()
    assert loaded.desk.session.plan.period == PERIOD
    assert loaded.panes["Period"].table.rowCount() == 2
    assert loaded.panes["Period"].words.text() == left
    assert loaded.status.words.text().lower() == left
