"""The period search: what was weighed, and folding with any of it."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QLineEdit,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from shadowscale.view.light_points import ephemeris
from shadowscale.view.periods import PeriodLine, period_lines
from shadowscale.view.written import read_number
from shadowscale_app.naming import named
from shadowscale_app.panes.pane import Pane

NOT_SEARCHED = (
    "Nothing was searched yet: Search weighs all periods; or type period and epoch and fold."
)
HEADERS = ("period [d]", "epoch", "score", "")


class PeriodsPane(Pane):
    """A table of candidates and a field for one's own."""

    title = "Period"
    about = (
        "The periods that the search weighed, the likeliest first. Choose one and fold with it: with the right "
        "period the eclipses are thin and lie on one another. Half and twice a period look alike when both "
        "eclipses are equally deep."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._lines: tuple[PeriodLine, ...] = ()
        self.words = QLabel("")
        self.words.setWordWrap(True)
        self.words.setObjectName("quiet")
        self.table = QTableWidget(0, len(HEADERS))
        self.table.setHorizontalHeaderLabels(list(HEADERS))
        named(
            self.table,
            "Periods that were weighed",
            "The likeliest first; a double click folds with one",
        )
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.verticalHeader().hide()
        self.table.verticalHeader().setDefaultSectionSize(22)
        self.table.setShowGrid(False)
        self.table.setAlternatingRowColors(True)
        self.table.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        self.table.horizontalHeader().setStretchLastSection(True)
        self.table.itemDoubleClicked.connect(lambda _: self.fold_with_chosen())
        self.search = named(
            QPushButton("Search"), "Search", "Look for the period in the photometry"
        )
        self.search.clicked.connect(lambda: self.asked.emit("search period", None))
        self.fold = named(
            QPushButton("Fold with chosen"),
            "Fold with chosen",
            "Take the period of the chosen line and measure the eclipses on it",
        )
        self.fold.clicked.connect(self.fold_with_chosen)
        self.period, self.epoch = QLineEdit(), QLineEdit()
        named(
            self.period,
            "Period in days",
            "The period in use, in days; type another and press Enter",
        )
        named(self.epoch, "Epoch", "A time of primary minimum, in the time system of the data")
        self.take = named(
            QPushButton("Fold with these"), "Fold with these", "Take the period and epoch as typed"
        )
        self.take.clicked.connect(self.fold_with_typed)
        self.period.returnPressed.connect(self.fold_with_typed)
        self.epoch.returnPressed.connect(self.fold_with_typed)
        self._place()
        self.show_search(None)

    def refresh(self, names: frozenset[str]) -> None:
        """Show the ephemeris in use."""
        if not names & {"plan", "system", "photometry"}:
            return
        if "photometry" in names and "name" in names:
            self.show_search(None)
        found = ephemeris(self.session)
        self.period.setText("" if found is None else f"{found[0]:.8g}")
        self.epoch.setText("" if found is None else f"{found[1]:.6f}")

    def show_search(self, search: object) -> None:
        """List what a search weighed; None: nothing was searched."""
        self._lines, words = period_lines(search)
        self.words.setText(words or NOT_SEARCHED)
        self.table.setRowCount(len(self._lines))
        for number, line in enumerate(self._lines):
            for column, text in enumerate(line.cells):
                item = QTableWidgetItem(text)
                if column < len(HEADERS) - 1:
                    item.setTextAlignment(
                        Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
                    )
                self.table.setItem(number, column, item)

    def fold_with_chosen(self) -> None:
        """Fold with the chosen line."""
        number = self.table.currentRow()
        if 0 <= number < len(self._lines):
            line = self._lines[number]
            self.asked.emit("fold", (line.period, line.epoch))

    def fold_with_typed(self) -> None:
        """Fold with what was typed."""
        try:
            values = (read_number(self.period.text()), read_number(self.epoch.text()))
            if values[0] <= 0:
                raise ValueError(f"the period must be positive, found {values[0]:g}")
        except ValueError as problem:
            self.told.emit(str(problem))
            return
        self.asked.emit("fold", values)

    def _place(self) -> None:
        row = QHBoxLayout()
        row.setContentsMargins(8, 5, 8, 3)
        row.setSpacing(6)
        for widget in (self.search, self.fold):
            row.addWidget(widget)
        row.addSpacing(12)
        for words, field in (("P", self.period), ("T0", self.epoch)):
            row.addWidget(QLabel(words))
            row.addWidget(field)
        row.addWidget(self.take)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addLayout(row)
        self.words.setContentsMargins(8, 0, 8, 0)
        layout.addWidget(self.words)
        layout.addWidget(self.table, 1)
