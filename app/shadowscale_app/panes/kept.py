"""Solutions kept by name, side by side."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QInputDialog,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from shadowscale.session.session import Kept
from shadowscale.view.compared import comparison
from shadowscale_app.desk import Change
from shadowscale_app.panes.pane import Pane


class KeptPane(Pane):
    """A column a solution, the present one first."""

    title = "Kept"
    about = (
        "Solutions that you kept, beside the present one. Differences larger than both errors together are marked "
        "with a sign. Go back to a kept solution at any time; that is a step that can be undone."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.table = QTableWidget()
        self.table.setAccessibleName("Kept solutions")
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setAlternatingRowColors(True)
        self.table.setShowGrid(False)
        self.table.verticalHeader().setDefaultSectionSize(22)
        self.table.horizontalHeader().setStretchLastSection(True)
        self.keep = QPushButton("Keep present")
        self.back = QPushButton("Go back to chosen")
        self.drop = QPushButton("Forget chosen")
        self.keep.clicked.connect(self.ask_name)
        self.back.clicked.connect(self._go_back)
        self.drop.clicked.connect(self._forget)
        self.table.itemSelectionChanged.connect(self._enable)
        row = QHBoxLayout()
        row.setContentsMargins(8, 5, 8, 5)
        for button in (self.keep, self.back, self.drop):
            row.addWidget(button)
        row.addStretch(1)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addLayout(row)
        layout.addWidget(self.table, 1)

    def refresh(self, names: frozenset[str]) -> None:
        """Fill the table anew."""
        if not names & {"kept", "solution"}:
            return
        found = comparison(self.session)
        self.table.setColumnCount(len(found.names))
        self.table.setRowCount(len(found.rows))
        self.table.setHorizontalHeaderLabels(list(found.names))
        self.table.setVerticalHeaderLabels([row.what for row in found.rows])
        for number, row in enumerate(found.rows):
            for column, text in enumerate(row.cells):
                item = QTableWidgetItem(text)
                item.setTextAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
                self.table.setItem(number, column, item)
        self.table.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
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
        """Number of the kept solution whose column is chosen; -1 if none."""
        column = self.table.currentColumn() - (1 if self.session.solution is not None else 0)
        return column if 0 <= column < len(self.session.kept) else -1

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
