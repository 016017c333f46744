"""Markers pulled by the mouse and moved by keys, as a person does it; the numbers must follow."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

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
