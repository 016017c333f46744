"""Markers pulled by the mouse and moved by keys, as a person does it; the numbers must follow."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from hands import drag
from shadowscale_app.bench import Bench
from shadowscale_app.plots.marked import FINE, STEP, MarkedPicture


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


def primary(bench: Bench) -> MarkedPicture:
    """The picture of primary eclipse."""
    return bench.panes["Eclipses"].pairs["primary"].curve


def pixel(picture: MarkedPicture) -> float:
    """Cycles of one pixel."""
    return float(picture.box.viewPixelSize()[0])


def test_a_marker_dragged_by_the_mouse_is_where_the_mouse_let_go(bench: Bench) -> None:
    picture = primary(bench)
    before = bench.desk.session.markers.primary

    drag(picture, before[0], before[0] - 0.006)

    after = bench.desk.session.markers.primary
    assert before[0] - 0.006 == pytest.approx(after[0], abs=pixel(picture))
    assert before[3] + 0.006 == pytest.approx(after[3], abs=pixel(picture))
    assert picture.lines["primary.0"].value() == after[0]


def test_with_control_one_side_moves_alone(bench: Bench) -> None:
    picture = primary(bench)
    before = bench.desk.session.markers.primary

    drag(picture, before[3], before[3] + 0.006, Qt.KeyboardModifier.ControlModifier)

    after = bench.desk.session.markers.primary
    assert before[:3] == after[:3]
    assert before[3] + 0.006 == pytest.approx(after[3], abs=pixel(picture))


def test_wider_contacts_give_larger_stars_at_once(bench: Bench) -> None:
    picture = primary(bench)
    contacts = bench.desk.session.markers.primary
    drag(picture, contacts[0], contacts[0] - 0.004)
    first = bench.desk.session.contact.values["radius_sum"]

    drag(picture, bench.desk.session.markers.primary[0], contacts[0] - 0.011)

    assert bench.desk.session.contact.values["radius_sum"] > first + 0.005


def test_a_drag_is_one_step_and_undo_brings_all_back(bench: Bench) -> None:
    picture = primary(bench)
    before = bench.desk.session
    steps = bench.desk.history.position

    drag(picture, before.markers.primary[0], before.markers.primary[0] - 0.004)

    assert steps + 1 == bench.desk.history.position
    assert bench.desk.history.undo_label == "Move first contact of primary eclipse"
    bench.actions_table.by_name["undo"].trigger()
    assert bench.desk.session is before
    assert before.markers.primary[0] == picture.lines["primary.0"].value()


def test_two_drags_are_two_steps(bench: Bench) -> None:
    picture = primary(bench)
    start = bench.desk.session.markers.primary[0]
    drag(picture, start, start - 0.003)
    middle = bench.desk.session.markers.primary[0]
    drag(picture, middle, middle - 0.003)

    bench.desk.undo()

    assert middle == bench.desk.session.markers.primary[0]


def test_a_marker_is_never_pulled_past_its_neighbour(bench: Bench) -> None:
    picture = primary(bench)
    contacts = bench.desk.session.markers.primary

    drag(picture, contacts[0], contacts[1] + 0.01, Qt.KeyboardModifier.ControlModifier)

    after = bench.desk.session.markers.primary
    assert after[0] < after[1]
    assert contacts[1:] == after[1:]


def test_tab_reaches_the_markers_from_left_to_right(bench: Bench) -> None:
    picture = primary(bench)
    picture.setFocus()
    reached = []

    for _ in range(4):
        QTest.keyClick(picture, Qt.Key.Key_Tab)
        reached.append(picture.focused)

    assert reached == ["primary.0", "primary.1", "primary.2", "primary.3"]
    assert "fourth contact" in picture.accessibleDescription()
    QTest.keyClick(picture, Qt.Key.Key_Tab)
    assert picture.focused == ""


@pytest.mark.parametrize(
    ("modifier", "step"),
    [
        (Qt.KeyboardModifier.NoModifier, STEP),
        (Qt.KeyboardModifier.ShiftModifier, 10 * STEP),
        (Qt.KeyboardModifier.AltModifier, FINE * STEP),
    ],
)
def test_arrows_move_the_marker(bench: Bench, modifier: Qt.KeyboardModifier, step: float) -> None:
    picture = primary(bench)
    before = bench.desk.session.markers.primary
    picture.setFocus()
    picture.focus_marker("primary.0")

    QTest.keyClick(picture, Qt.Key.Key_Left, modifier)

    after = bench.desk.session.markers.primary
    assert before[0] - step == pytest.approx(after[0], abs=1e-12)
    assert before[3] + step == pytest.approx(after[3], abs=1e-12)


def test_escape_puts_the_marker_back(bench: Bench) -> None:
    picture = primary(bench)
    before = bench.desk.session.markers.primary
    picture.setFocus()
    picture.focus_marker("primary.0")
    for _ in range(5):
        QTest.keyClick(picture, Qt.Key.Key_Left)

    QTest.keyClick(picture, Qt.Key.Key_Escape)

    assert before == pytest.approx(bench.desk.session.markers.primary, abs=1e-12)


def test_enter_types_the_value(bench: Bench) -> None:
    picture = primary(bench)
    picture.setFocus()
    picture.focus_marker("primary.0")
    QTest.keyClick(picture, Qt.Key.Key_Return)
    editor = picture.editor
    editor.setText("-0,0512")  # a decimal comma is understood

    QTest.keyClick(editor, Qt.Key.Key_Return)

    assert bench.desk.session.markers.primary[0] == pytest.approx(-0.0512, abs=1e-9)
    assert picture.editor is None


def test_nonsense_typed_for_a_marker_changes_nothing(bench: Bench) -> None:
    picture = primary(bench)
    before = bench.desk.session
    picture.setFocus()
    picture.focus_marker("primary.0")
    QTest.keyClick(picture, Qt.Key.Key_Return)
    picture.editor.setText("about here")

    QTest.keyClick(picture.editor, Qt.Key.Key_Return)

    assert bench.desk.session is before
    assert "about here" in bench.status.words.text()
    QTest.keyClick(picture.editor, Qt.Key.Key_Escape)
    assert picture.editor is None


def test_a_stretch_is_added_dragged_and_removed(bench: Bench) -> None:
    folded = bench.panes["Folded curve"].pair.curve
    bench.panes["Folded curve"].pointed.emit(0.2)
    count = len(bench.desk.session.markers.excluded)
    bench.actions_table.by_name["excluded"].trigger()
    spans = bench.desk.session.markers.excluded
    assert count + 1 == len(spans)
    number = next(n for n, span in enumerate(spans) if span[0] == pytest.approx(0.18))

    drag(folded, 0.18, 0.15)

    assert bench.desk.session.markers.excluded[number][0] == pytest.approx(0.15, abs=pixel(folded))
    folded.setFocus()
    folded.focus_marker(f"excluded.{number}.0")
    bench.actions_table.by_name["drop_span"].trigger()
    assert count == len(bench.desk.session.markers.excluded)


def test_an_eclipse_window_is_dragged_at_its_edge_and_holds_its_contacts(bench: Bench) -> None:
    folded = bench.panes["Folded curve"].pair.curve
    before = bench.desk.session.markers

    drag(folded, before.primary_window[1], 0.14, height=0.97)

    after = bench.desk.session.markers
    assert after.primary_window[1] == pytest.approx(0.14, abs=pixel(folded))
    assert (after.primary, after.secondary) == (before.primary, before.secondary)
    assert bench.desk.history.undo_label == "Move right edge of the window of primary eclipse"
    drag(folded, after.primary_window[1], -0.1, height=0.97)
    assert bench.desk.session.markers.primary_window[1] == before.primary[3]


def test_contacts_can_be_measured_again(bench: Bench) -> None:
    picture = primary(bench)
    truth = bench.desk.session.markers.primary
    drag(picture, truth[0], truth[0] - 0.011)
    moved = bench.desk.session.markers.primary
    assert moved[0] < truth[0] - 0.009

    bench.actions_table.by_name["measure"].trigger()
    assert bench.long_lane.wait_until_idle()

    assert np.abs(np.subtract(bench.desk.session.markers.primary, truth)).max() < 4e-3
    assert bench.desk.history.undo_label == "Measure contacts"
    bench.desk.undo()
    assert moved == bench.desk.session.markers.primary


def test_a_click_gives_a_marker_the_keys_and_a_double_click_its_field(bench: Bench) -> None:
    picture = primary(bench)
    view = picture.visible()
    start = bench.desk.session.markers.primary[3]
    place = picture.place_of(start, view.center().y()).toPoint()
    port = picture.viewport()
    QTest.mouseMove(port, place)
    QApplication.processEvents()

    QTest.mouseClick(port, Qt.MouseButton.LeftButton, pos=place)
    assert picture.focused == "primary.3"
    QTest.mouseDClick(port, Qt.MouseButton.LeftButton, pos=place)
    QTest.mouseRelease(port, Qt.MouseButton.LeftButton, pos=place)
    assert picture.editor is not None
    assert view == picture.visible()  # a double click elsewhere would show everything
    picture.editor.setText(f"{start + 0.002:.6f}")
    QTest.keyClick(picture.editor, Qt.Key.Key_Return)

    assert bench.desk.session.markers.primary[3] == pytest.approx(start + 0.002, abs=1e-6)


def test_resting_on_a_marker_says_what_it_does(bench: Bench) -> None:
    picture = primary(bench)
    place = picture.place_of(bench.desk.session.markers.primary[0], picture.visible().center().y())

    QTest.mouseMove(picture.viewport(), place.toPoint())
    QApplication.processEvents()

    assert "first contact of primary eclipse" in bench.status.words.text()
    assert "give both radii" in bench.status.words.text()
    assert "give both radii" in picture.lines["primary.0"].toolTip()
