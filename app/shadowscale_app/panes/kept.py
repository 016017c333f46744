"""Solutions kept by name, side by side."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QInputDialog,
    QLabel,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from shadowscale.session.session import Kept
from shadowscale.view.compared import side_by_side
from shadowscale_app.desk import Change
from shadowscale_app.naming import named
from shadowscale_app.panes.pane import Pane

if TYPE_CHECKING:
    from shadowscale.jobs.compare_inputs import Compared

WIDEST_NAME = 92  # [pixels], so that a solution, another and their sigmas are seen at once
SIGMAS = "\N{GREEK CAPITAL LETTER DELTA}/\N{GREEK SMALL LETTER SIGMA}"


class KeptPane(Pane):
    """A column a solution, the present one first."""

    patient = True
    title = "Kept"
    about = (
        "Solutions that you kept, beside the present one, and those of other files. The columns of sigmas say how far "
        "each quantity lies from the first solution in units of both errors together; a sign marks more than three. "
        "Where the rows are the same, chi-squared, AIC and BIC say which describes them better: the least is best. "
        "Go back to a kept solution at any time; that is a step that can be undone."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.beside: tuple[Compared, ...] = ()
        self.table = QTableWidget()
        named(
            self.table,
            "Kept solutions",
            "A column a solution; choose one to go back to it or to forget it",
        )
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setAlternatingRowColors(True)
        self.table.setShowGrid(False)
        self.table.verticalHeader().setDefaultSectionSize(22)
        self.table.verticalHeader().setMinimumWidth(60)
        self.table.verticalHeader().setMaximumWidth(WIDEST_NAME)
        self.words = QLabel("")
        self.words.setObjectName("quiet")
        self.words.setWordWrap(True)
        self.words.setContentsMargins(10, 2, 10, 4)
        self.keep = _button("Keep", "Remember the present solution under a name", self.ask_name)
        self.back = _button("Go back", "Take up the solution whose column is chosen", self._go_back)
        self.drop = _button("Forget", "Drop the solution whose column is chosen", self._forget)
        self.file = _button(
            "Compare with file\N{HORIZONTAL ELLIPSIS}",
            "Put another session, a sheet or a typed table of quantities beside these",
            lambda: self.asked.emit("compare", None),
        )
        self.table.itemSelectionChanged.connect(self._enable)
        row = QHBoxLayout()
        row.setContentsMargins(8, 5, 8, 5)
        row.setSpacing(6)
        for button in (self.keep, self.back, self.drop, self.file):
            row.addWidget(button)
        row.addStretch(1)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addLayout(row)
        layout.addWidget(self.table, 1)
        layout.addWidget(self.words)

    def refresh(self, names: frozenset[str]) -> None:
        """Fill the table anew."""
        if {"photometry", "name"} <= names:
            self.beside = ()
        if names & {"kept", "solution"}:
            self._fill()

    def show_beside(self, columns: tuple[Compared, ...]) -> None:
        """Put solutions of a file beside the session's own."""
        self.beside += columns
        self._fill()

    def _fill(self) -> None:
        found = side_by_side(self.session, self.beside)
        heads = [found.names[0]] if found.names else []
        heads += [text for name in found.names[1:] for text in (name, SIGMAS)]
        self.table.setColumnCount(len(heads))
        self.table.setRowCount(len(found.rows))
        self.table.setHorizontalHeaderLabels(heads)
        self.table.setVerticalHeaderLabels([row.what for row in found.rows])
        for number, row in enumerate(found.rows):
            self.table.verticalHeaderItem(number).setToolTip(row.what)
            cells = [row.values[0]]
            for pair in zip(row.values[1:], row.sigmas, strict=True):
                cells += pair
            for column, text in enumerate(cells):
                item = QTableWidgetItem(text)
                item.setTextAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
                self.table.setItem(number, column, item)
        self.table.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        self.words.setText("; ".join(found.words))
        self.words.setVisible(bool(found.words))
        self._enable()

    def ask_name(self) -> None:
        """Ask for a name and keep the present solution under it."""
        name, agreed = QInputDialog.getText(
            self, "Keep solution", "Name", text=f"solution {len(self.session.kept) + 1}"
        )
        if agreed and name.strip():
            self.keep_as(name.strip())

    def keep_as(self, name: str) -> None:
        """Keep the present solution."""
        session = self.session
        if session.solution is None or session.system is None:
            return
        kept = Kept(name, session.plan, session.system, session.solution, session.audit)
        self.wanted.emit(Change(f"Keep {name}", replace(session, kept=(*session.kept, kept))))

    def _enable(self) -> None:
        self.keep.setEnabled(self.session.solution is not None)
        for button in (self.back, self.drop):
            button.setEnabled(self._chosen() >= 0)

    def _chosen(self) -> int:
        """Number of the kept solution whose column (or whose sigmas) is chosen; -1 if none."""
        solution = (self.table.currentColumn() + 1) // 2
        number = solution - (1 if self.session.solution is not None else 0)
        return number if 0 <= number < len(self.session.kept) else -1

    def _go_back(self) -> None:
        number = self._chosen()
        if number < 0:
            return
        kept = self.session.kept[number]
        session = replace(
            self.session,
            plan=kept.plan,
            system=kept.system,
            solution=kept.solution,
            contact=kept.solution.contact,
            audit=kept.audit,
        )
        self.wanted.emit(Change(f"Go back to {kept.name}", session))

    def _forget(self) -> None:
        number = self._chosen()
        if number >= 0:
            kept = self.session.kept
            rest = (*kept[:number], *kept[number + 1 :])
            self.wanted.emit(
                Change(f"Forget {kept[number].name}", replace(self.session, kept=rest))
            )


def _button(words: str, tip: str, call: Callable[[], object]) -> QPushButton:
    button = QPushButton(words)
    button.clicked.connect(lambda: call())
    return named(button, words, tip)
