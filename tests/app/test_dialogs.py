"""The dialogs: how a table is read, troubles, priors."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QDialogButtonBox

from shadowscale.data import head_of, read_photometry
from shadowscale.errors import NotDetachedError, Problem, TableError
from shadowscale_app import trouble
from shadowscale_app.bench import Bench
from shadowscale_app.dialogs.prior import PriorDialog
from shadowscale_app.dialogs.reading import AS_FOUND, NOT_THERE, Reading, ReadingDialog
from shadowscale_app.dialogs.trouble import TroubleDialog

TABLE = """# BJD_TDB of an invented pair
BJD_TDB,V,V_err,check
{rows}
2460001.9,cloudy,0.01,11.0
"""


@pytest.fixture
def table(tmp_path: Path) -> Path:
    rows = "\n".join(
        f"{2460000 + n / 500:.5f},{12 + 0.3 * (n % 97 < 9):.4f},0.0100,11.2{n % 10}"
        for n in range(600)
    )
    path = tmp_path / "night.csv"
    path.write_text(TABLE.format(rows=rows), encoding="utf-8")
    return path


@pytest.fixture
def dialog(qapp: QApplication, table: Path) -> Iterator[ReadingDialog]:
    found = ReadingDialog(head_of(table), "photometry")
    yield found
    found.deleteLater()


def test_every_guess_is_shown_with_its_reason(dialog: ReadingDialog) -> None:
    assert dialog.boxes["time"].currentText() == "BJD_TDB"
    assert dialog.boxes["mag"].currentText() == "V"
    assert dialog.boxes["error"].currentText() == "V_err"
    for role in ("time", "mag", "error"):
        assert dialog.reasons[role].text(), role
    assert dialog.system.currentText() == "BJD_TDB"
    assert dialog.rows.rowCount() >= 5


def test_unit_and_time_system_can_be_changed(
    dialog: ReadingDialog, qapp: QApplication, table: Path
) -> None:
    dialog.unit.setCurrentText("mmag")
    dialog.unit.textActivated.emit("mmag")
    dialog.system.setEditText("HJD_UTC - 2400000")
    QTest.keyClick(dialog.system.lineEdit(), Qt.Key.Key_Return)

    columns = dialog.reading().columns
    assert (columns["unit"], columns["time_system"]) == ("mmag", "HJD_UTC - 2400000")
    assert dialog.system.currentText() == "HJD_UTC"
    read = read_photometry([table], columns=[columns])
    assert read.time_scale == "HJD_UTC"
    assert np.ptp(np.log10(read.flux[read.used])) == pytest.approx(0.3e-3 / 2.5, rel=1e-6)
    dialog.unit.textActivated.emit(AS_FOUND)
    assert "unit" not in dialog.reading().columns


def test_a_guess_can_be_changed(dialog: ReadingDialog) -> None:
    dialog.choose("mag", "check")

    assert dialog.boxes["mag"].currentText() == "check"
    assert dialog.reading().columns["mag"] == "check"


def test_without_light_it_cannot_be_opened_and_says_why(dialog: ReadingDialog) -> None:
    dialog.choose("mag", NOT_THERE)

    assert not dialog.buttons.button(QDialogButtonBox.StandardButton.Open).isEnabled()
    assert dialog.foot.text()


def test_rows_that_cannot_be_read_are_named(dialog: ReadingDialog) -> None:
    assert "line 603" in dialog.foot.text()


def test_opening_a_table_begins_a_session_as_it_was_read(bench: Bench, table: Path) -> None:
    bench.opening.ask = lambda *_, **__: Reading({}, "R")

    bench.open_paths([str(table)])

    photometry = bench.desk.session.photometry
    assert photometry.time.size == 600
    assert photometry.bands == ("R",)
    assert bench.desk.session.name == "night"
    assert bench.desk.unsaved
    assert table == bench.files.recent()[0]


def test_a_session_that_was_read_keeps_its_columns(bench: Bench, table: Path) -> None:
    bench.opening.ask = lambda *_, **__: Reading({"mag": "check"}, None)

    bench.open_paths([str(table)])

    source = bench.desk.session.photometry_sources[0]
    assert source.columns["mag"] == "check"
    assert source.sha256


def test_an_error_is_readable_and_copyable(bench: Bench, told: list[trouble.Trouble]) -> None:
    before = bench.desk.session
    problem = Problem(
        "night3.csv",
        "a number",
        "'12,43'",
        line=418,
        column="mag",
        help="is the comma a decimal mark?",
    )

    found = trouble.tell("opening night3.csv", TableError(problem))

    assert (
        found.sentence
        == "night3.csv, line 418, column 'mag': expected a number, found '12,43'; is the comma a decimal mark?"
    )
    dialog = bench.findChild(TroubleDialog)
    dialog.copy()
    assert "opening night3.csv" in QGuiApplication.clipboard().text()
    assert "line 418" in QGuiApplication.clipboard().text()
    assert bench.desk.session is before
    assert trouble.log_file().read_text(encoding="utf-8").count("line 418") >= 1
    dialog.close()
    told.clear()


def test_no_solution_says_what_would_help(told: list[trouble.Trouble]) -> None:
    error = NotDetachedError(
        "star 1 fills its lobe", {"fill-out": 1.02}, "use a model of distorted stars"
    )

    found = trouble.trouble_of("solving", error)

    assert "fill-out = 1.02" in found.sentence
    assert "use a model of distorted stars" in found.sentence
    assert found.expected


def test_a_mistake_of_the_program_keeps_its_details(told: list[trouble.Trouble]) -> None:
    with trouble.guard("drawing"):
        _ = {}["nothing"]

    assert not told[0].expected
    assert "KeyError" in told[0].details
    assert "save it under another name" in told[0].sentence
    told.clear()


def test_a_prior_needs_a_positive_sigma(bench: Bench) -> None:
    dialog = PriorDialog(bench.desk.session, "radius_ratio", bench)
    dialog.sigma.setText("-1")
    with pytest.raises(ValueError, match="sigma must be positive, found -1"):
        dialog.numbers()
    dialog.sigma.setText("0,02")
    assert pytest.approx(dialog.numbers()) == (0.78145695, 0.02)
    dialog.deleteLater()


def test_a_trouble_that_comes_again_opens_one_window(
    bench: Bench, told: list[trouble.Trouble]
) -> None:
    for _ in range(5):
        trouble.tell("drawing", ValueError("the same again"))

    dialogs = bench.findChildren(TroubleDialog)
    assert len(dialogs) == 1
    assert len(told) == 5
    dialogs[0].close()
    told.clear()


def test_a_second_table_can_be_added_to_the_session(
    bench: Bench, table: Path, tmp_path: Path
) -> None:
    bench.opening.ask = lambda *_, **__: Reading({}, "R")
    bench.open_paths([str(table)])
    other = tmp_path / "later.csv"
    other.write_text(table.read_text(encoding="utf-8").replace("24600", "24601"), encoding="utf-8")
    asked: list[bool] = []
    bench.opening.ask = lambda *_, may_add, adds: (
        asked.append(may_add),
        Reading({}, "I", adds=True),
    )[1]

    bench.open_paths([str(other)])

    session = bench.desk.session
    assert asked == [True]
    assert session.photometry.bands == ("R", "I")
    assert len(session.photometry_sources) == 2
    assert bench.desk.history.undo_label == "Add later.csv"
    bench.desk.undo()
    assert bench.desk.session.photometry.bands == ("R",)
