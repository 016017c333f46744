"""The table of quantities: typing, holding, the slider, and what it shows."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QMenu

from shadowscale.view.grades import BADLY, FAIRLY, WELL
from shadowscale.view.rows import leaders, quantity_rows
from shadowscale_app.bench import Bench
from shadowscale_app.models.quantities import ERROR, STATE, SYMBOL, VALUE


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


def cell(bench: Bench, key: str, column: int) -> str:
    """What the table shows."""
    pane = bench.panes["Quantities"]
    return pane.model.index(pane.model.row_of(key), column).data()


def type_value(bench: Bench, key: str, text: str) -> None:
    """Open the cell as a person does and type."""
    table = bench.panes["Quantities"].table
    bench.bring("Quantities")
    index = table.model().index(table.model().row_of(key), VALUE)
    table.setCurrentIndex(index)
    table.edit(index)
    editor = table.findChild(QLineEdit)
    editor.setText(text)
    QTest.keyClick(editor, Qt.Key.Key_Return)
    QApplication.processEvents()  # the table takes the text after the key


def test_values_errors_and_units_are_those_of_the_solution(bench: Bench) -> None:
    assert (
        cell(bench, "radius_sum", VALUE),
        cell(bench, "radius_sum", ERROR),
    ) == ("0.26900", "\N{PLUS-MINUS SIGN}0.00040")
    assert cell(bench, "third_light[V]", SYMBOL) == "l3 V"
    assert "held" in cell(bench, "third_light[V]", STATE)
    assert "prior" in cell(bench, "radius_ratio", STATE)


def test_typing_a_value_changes_the_model_at_once(bench: Bench) -> None:
    before = bench.desk.session.system

    type_value(bench, "inclination", "87.5")

    session = bench.desk.session
    assert session.system.value("inclination") == 87.5
    assert session.plan.start["inclination"] == 87.5
    assert bench.desk.history.undo_label == "Set inclination"
    assert before.value("inclination") == 89.1
    assert cell(bench, "inclination", VALUE).startswith("87.5")


def test_a_value_outside_its_limits_is_refused_in_words(bench: Bench) -> None:
    before = bench.desk.session

    type_value(bench, "inclination", "97")

    assert bench.desk.session is before
    assert "inclination" in bench.status.words.text()
    assert "90" in bench.status.words.text()


def test_a_held_quantity_stays_held_where_it_was_typed(bench: Bench) -> None:
    type_value(bench, "third_light[V]", "0.1")

    assert bench.desk.session.plan.fixed["third_light[V]"] == (0.1,)


def test_the_slider_moves_the_model_and_is_one_step(bench: Bench) -> None:
    pane = bench.panes["Quantities"]
    pane.table.setCurrentIndex(pane.model.index(pane.model.row_of("inclination"), VALUE))
    steps = bench.desk.history.position

    pane.slider.setSliderDown(True)
    for position in (-3, -9, -20):
        pane.slider.setValue(position)
    pane.slider.setSliderDown(False)

    assert bench.desk.session.system.value("inclination") == pytest.approx(89.1 - 20 * 0.01)
    assert steps + 1 == bench.desk.history.position
    assert pane.slider.value() == 0


def test_holding_and_freeing(bench: Bench) -> None:
    pane = bench.panes["Quantities"]
    pane.set_state("radius_sum", "held")
    assert "radius_sum" not in bench.desk.session.system.free
    assert pytest.approx(bench.desk.session.plan.fixed["radius_sum"]) == (0.269,)

    pane.set_state("radius_sum", "free")

    assert "radius_sum" in bench.desk.session.system.free
    assert "radius_sum" not in bench.desk.session.plan.fixed


def test_limb_darkening_is_held_with_all_its_coefficients(bench: Bench) -> None:
    bench.panes["Quantities"].set_state("limb_darkening1[V].1", "free")
    free = bench.desk.session.system.free
    assert {"limb_darkening1[V].1", "limb_darkening1[V].2"} <= set(free)

    bench.panes["Quantities"].set_state("limb_darkening1[V].2", "held")

    assert bench.desk.session.plan.fixed["limb_darkening1[V]"] == (0.6, 0.55)


def test_tying_and_untying(bench: Bench) -> None:
    pane = bench.panes["Quantities"]
    menu = QMenu()
    pane.add_ties(menu, pane.model.rows[pane.model.row_of("gamma2")])
    (tie,) = menu.actions()
    assert tie.text() == "Tie to \N{GREEK SMALL LETTER GAMMA}1"
    tie.trigger()
    session = bench.desk.session

    assert session.plan.ties == {"gamma2": "gamma1"}
    assert session.system.value("gamma2") == session.system.value("gamma1")
    assert "gamma2" not in session.system.free
    assert cell(bench, "gamma2", STATE) == "= \N{GREEK SMALL LETTER GAMMA}1"
    assert leaders(session, "gamma1") == ()
    pane.table.selectRow(pane.model.row_of("gamma2"))
    assert not pane.slider.isEnabled()  # what it follows is moved instead

    menu = QMenu()
    pane.add_ties(menu, pane.model.rows[pane.model.row_of("gamma2")])
    (untie,) = menu.actions()
    assert untie.text() == "Untie from \N{GREEK SMALL LETTER GAMMA}1"
    untie.trigger()

    assert bench.desk.session.plan.ties == {}
    assert "gamma2" in bench.desk.session.system.free
    assert cell(bench, "gamma2", STATE).endswith("free")


def test_limb_darkening_is_tied_with_all_its_coefficients(bench: Bench) -> None:
    bench.panes["Quantities"].tie("limb_darkening2[V].1", "limb_darkening1[V]")
    system = bench.desk.session.system

    assert system.limb_darkening(2, "V") == system.limb_darkening(1, "V")
    assert not [name for name in system.free if name.startswith("limb_darkening2[V]")]
    bench.panes["Quantities"].untie("limb_darkening2[V].1")
    assert not bench.desk.session.system.ties


def test_rows_can_be_copied(bench: Bench) -> None:
    pane = bench.panes["Quantities"]
    pane.table.selectRow(pane.model.row_of("inclination"))

    pane.copy()

    lines = QGuiApplication.clipboard().text().splitlines()
    assert len(lines) == 2
    assert lines[1].split("\t")[:2] == ["i", "89.100"]


def test_grades_follow_the_relative_error(bench: Bench) -> None:
    rows = {row.key: row for row in quantity_rows(bench.desk.session)}

    assert (
        rows["radius_sum"].grade,
        pytest.approx(rows["radius_sum"].relative),
    ) == (WELL, 0.0004 / 0.269)
    assert {row.grade for row in rows.values()} <= {WELL, FAIRLY, BADLY, ""}
    assert "k" in rows["radius_sum"].strongest
    assert all(row.grade for row in rows.values() if row.error_text)  # by natural scales, too
    solution = bench.desk.session.solution
    gamma, larger = (
        solution.estimates["gamma1"],
        max(solution.estimates[k].value for k in ("K1", "K2")),
    )
    assert rows["gamma1"].relative == pytest.approx(gamma.plus / larger)
