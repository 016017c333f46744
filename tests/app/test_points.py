"""Brushing points away with a reason, and back."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from hands import draw
from shadowscale.view.selecting import ONE_LINED
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.dialogs.brushing import BACK, BrushDialog


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


def brush(bench: Bench, answer: str | None, *, margin: float = 0.0) -> int:
    """Draw round the bottom of secondary eclipse and answer the question; how many points were asked about."""
    counts: list[int] = []
    bench.points.ask = lambda _parent, count: (counts.append(count), answer)[1]
    if not bench.brushing:
        bench.actions_table.by_name["brush"].trigger()
    curve = bench.panes["Eclipses"].pairs["secondary"].curve
    left, right = 0.492 - margin, 0.508 + margin
    draw(curve, [(left, 0.76), (right, 0.76), (right, 0.70), (left, 0.70), (left, 0.755)])
    return counts[0] if counts else 0


def test_points_drawn_round_are_set_aside_with_the_reason(bench: Bench) -> None:
    used = int(bench.desk.session.photometry.used.sum())

    count = brush(bench, "clouds in the west")

    photometry = bench.desk.session.photometry
    assert count > 10
    assert used - count == int(photometry.used.sum())
    aside = photometry.why == photometry.reasons.index("clouds in the west")
    phase = bench.desk.session.solution.light.phase[aside]
    assert np.all((phase > 0.491) & (phase < 0.509))
    last = bench.desk.session.exclusions[-1]
    assert (last.table, last.file, last.reason) == ("light", "nights.csv", "clouds in the west")
    assert sorted(photometry.line[aside]) == sorted(last.lines)


def test_they_come_back_by_the_brush_and_by_undo(bench: Bench) -> None:
    before = bench.desk.session.photometry
    brush(bench, "flare")
    bench.desk.undo()
    assert before is bench.desk.session.photometry

    brush(bench, "flare")
    brush(bench, BACK, margin=0.001)  # generously: the pixels are not the same any more

    assert int(before.used.sum()) == int(bench.desk.session.photometry.used.sum())
    assert "flare" not in [each.reason for each in bench.desk.session.exclusions]


def test_giving_up_changes_nothing(bench: Bench) -> None:
    before = bench.desk.session

    assert brush(bench, None) > 0

    assert bench.desk.session is before


def test_points_that_the_reader_rejected_do_not_come_back(bench: Bench) -> None:
    flagged = bench.desk.session.photometry.why.tolist().index(1)

    bench.points.take_all_back()

    assert bench.desk.session.photometry.why[flagged] == 1


def test_the_question_gives_the_reason(bench: Bench) -> None:
    dialog = BrushDialog(3, bench)
    dialog.reason.setEditText("satellite")
    assert dialog.reason.currentText() == "satellite"
    assert not dialog.back
    dialog.deleteLater()


def test_velocities_are_set_aside_by_the_brush_too(bench: Bench) -> None:
    bench.bring("Velocities")
    counts: list[int] = []
    bench.points.ask = lambda _parent, count: (counts.append(count), "blended lines")[1]
    bench.actions_table.by_name["brush"].trigger()
    before = bench.desk.session.velocities
    QApplication.processEvents()
    view = bench.panes["Velocities"].curve.visible()
    gamma = -14.2
    box = [
        (-0.1, gamma - 60),
        (0.1, gamma - 60),
        (0.1, gamma + 60),
        (-0.1, gamma + 60),
        (-0.1, gamma - 55),
    ]
    assert view.contains(0.0, gamma)

    draw(bench.panes["Velocities"].curve, box)

    after = bench.desk.session.velocities
    gone = int(before.used1.sum() + before.used2.sum() - after.used1.sum() - after.used2.sum())
    assert gone == counts[0] > 0
    assert {"rv1", "rv2"} == {each.table for each in bench.desk.session.exclusions[1:]}
    bench.points.take_all_back()
    again = bench.desk.session.velocities
    assert np.array_equal(before.why1, again.why1)
    assert np.array_equal(before.why2, again.why2)
    assert tuple(each for each in bench.desk.session.exclusions if each.table != "light") == ()


def test_the_one_lined_switch_leaves_star_2_out_and_takes_it_back(bench: Bench) -> None:
    bench.bring("Velocities")
    QApplication.processEvents()
    pane = bench.panes["Velocities"]
    used = bench.desk.session.velocities.used2.sum()
    assert not pane.mass.isVisible()

    QTest.mouseClick(pane.one_line, Qt.MouseButton.LeftButton)

    assert not bench.desk.session.velocities.used2.any()
    assert bench.desk.session.velocities.used1.all()
    assert {each.reason for each in bench.desk.session.exclusions if each.table == "rv2"} == {
        ONE_LINED
    }
    assert bench.desk.history.undo_label == "Leave out velocities of star 2"
    assert pane.mass.isVisible()
    QTest.mouseClick(pane.one_line, Qt.MouseButton.LeftButton)
    assert used == bench.desk.session.velocities.used2.sum()
    assert not [each for each in bench.desk.session.exclusions if each.table == "rv2"]


def test_without_velocities_of_star_2_there_is_nothing_to_switch(bench: Bench) -> None:
    session = bench.desk.session
    table = session.velocities
    alone = replace(table, rv2=np.full(table.time.size, np.nan), why2=np.ones_like(table.why2))

    bench.desk.apply(Change("Change", replace(session, velocities=alone)))

    pane = bench.panes["Velocities"]
    assert pane.one_line.isChecked()
    assert not pane.one_line.isEnabled()
