"""Every control of the window and of its dialogs has a name and a sentence on hover; every action, too."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QAbstractSlider,
    QAbstractSpinBox,
    QComboBox,
    QDialogButtonBox,
    QGraphicsView,
    QHeaderView,
    QLineEdit,
    QProgressBar,
    QScrollBar,
    QTabBar,
    QTextEdit,
    QWidget,
)

from made_up import made_up_session
from shadowscale.data import head_of
from shadowscale_app.actions import TABLE
from shadowscale_app.bench import Bench
from shadowscale_app.dialogs.brushing import BrushDialog
from shadowscale_app.dialogs.exporting import ExportDialog
from shadowscale_app.dialogs.prior import PriorDialog
from shadowscale_app.dialogs.reading import ReadingDialog
from shadowscale_app.samples import samples


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


CONTROLS = (
    QAbstractButton, QComboBox, QLineEdit, QAbstractSpinBox, QAbstractSlider, QAbstractItemView, QProgressBar,
)  # fmt: skip
PICTURES = (QGraphicsView, QTextEdit)  # a name; what they show stands on their pane's tab
INNER = (QScrollBar, QHeaderView)  # parts that Qt makes and names by what they belong to
SHORTEST = 12  # letters of a sentence


def controls(root: QWidget, kinds: tuple[type, ...]) -> Iterator[QWidget]:
    """All widgets of these kinds that are no inner parts of others."""
    for widget in root.findChildren(QWidget):
        owner = widget.parentWidget()
        inner = isinstance(widget, INNER) or isinstance(owner, (QTabBar, QAbstractSpinBox))
        inner = inner or (isinstance(widget, QAbstractItemView) and _of_a_list(widget))
        inner = inner or widget.objectName().startswith("qt_") or isinstance(owner, QComboBox)
        if isinstance(widget, kinds) and not inner:
            yield widget


def _of_a_list(widget: QWidget) -> bool:
    owner = widget.parentWidget()
    while owner is not None and not isinstance(owner, QComboBox):
        owner = owner.parentWidget()
    return owner is not None


def describe(widget: QWidget) -> str:
    owner = widget.parentWidget()
    return f"{type(widget).__name__} {widget.accessibleName()!r} in {type(owner).__name__}"


def nameless(root: QWidget) -> list[str]:
    return [describe(w) for w in controls(root, CONTROLS + PICTURES) if not w.accessibleName()]


def speechless(root: QWidget) -> list[str]:
    """Controls without a sentence on hover; the table of quantities has one a line and a column."""
    return [
        describe(widget)
        for widget in controls(root, CONTROLS)
        if len(widget.toolTip() or widget.accessibleDescription()) < SHORTEST
    ]


def test_every_control_of_the_window_has_a_name_and_a_sentence(bench: Bench) -> None:
    bench.desk.begin(made_up_session(("V", "I")))
    for title in bench.panes:
        bench.bring(title)

    assert len(list(controls(bench, CONTROLS))) > 40
    assert nameless(bench) == []
    assert speechless(bench) == []


def test_every_control_of_the_start_page_has_a_name_and_a_sentence(
    bench: Bench, tmp_path: Path
) -> None:
    bench.start.offer(samples(), [tmp_path / "work.json"])

    assert nameless(bench.start) == []
    assert speechless(bench.start) == []


@pytest.mark.parametrize("kind", ["photometry", "velocities", "brush", "prior", "export"])
def test_every_control_of_the_dialogs_has_a_name_and_a_sentence(bench: Bench, kind: str) -> None:
    folder = samples()[0][2].parent
    dialogs = {
        "photometry": lambda: ReadingDialog(head_of(folder / "photometry.csv"), "photometry"),
        "velocities": lambda: ReadingDialog(head_of(folder / "velocities.csv"), "velocities"),
        "brush": lambda: BrushDialog(3),
        "prior": lambda: PriorDialog(made_up_session(), "radius_ratio"),
        "export": lambda: ExportDialog(folder / "sheet"),
    }
    dialog = dialogs[kind]()
    standard = dialog.findChildren(QDialogButtonBox)[0].findChildren(QAbstractButton)

    ours = [text for text in speechless(dialog) if "QDialogButtonBox" not in text]
    assert ours == []
    assert [t for t in nameless(dialog) if "QDialogButtonBox" not in t] == []
    assert all(button.text() for button in standard)
    dialog.deleteLater()


def test_every_column_of_the_table_says_what_it_is(bench: Bench) -> None:
    model, roles = bench.panes["Quantities"].model, bench.panes["Quantities"].table

    for column in range(model.columnCount()):
        tip = model.headerData(column, roles.horizontalHeader().orientation(), 3)  # the tip's role
        assert len(tip) > SHORTEST, column


def test_every_action_says_what_it_does() -> None:
    assert [entry.name for entry in TABLE if len(entry.tip) < SHORTEST] == []


def test_every_pane_says_what_it_shows(bench: Bench) -> None:
    for pane in bench.panes.values():
        assert len(pane.about) > 40, pane.title
        assert pane.accessibleDescription() == pane.about
