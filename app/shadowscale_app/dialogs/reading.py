"""How a table is going to be read: columns, units, time system, band, each with its reason, all changeable."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QCheckBox,
    QComboBox,
    QDialog,
    QDialogButtonBox,
    QGridLayout,
    QLabel,
    QLineEdit,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from shadowscale.data import Preview, RawTable, preview_of
from shadowscale_app import trouble
from shadowscale_app.naming import named

NOT_THERE = "(not in this file)"
ROLES = {
    "photometry": ("time", "mag", "flux", "error", "band", "airmass", "quality"),
    "velocities": ("time", "rv1", "rv1_err", "rv2", "rv2_err", "source"),
}
ROLE_WORDS = {
    "time": "Time", "mag": "Magnitude", "flux": "Flux", "error": "Error", "band": "Band", "airmass": "Airmass",
    "quality": "Quality flag", "rv1": "Velocity of star 1", "rv1_err": "its error", "rv2": "Velocity of star 2",
    "rv2_err": "its error", "source": "Source",
}  # fmt: skip
TIME_SYSTEMS = ("BJD_TDB", "BJD_UTC", "HJD_UTC", "HJD_TT", "JD_UTC", "MJD", "unknown")
SYSTEM_TIP = "Kind and scale of the times; an offset that was taken off is written behind: BJD_TDB - 2457000."
UNIT_TIPS = {
    "photometry": "Of the light: ppt, ppm and percent around zero are taken as changes of the light.",
    "velocities": "Of both velocities and their errors.",
}
BAND_TIP = "The band of all rows, where the file does not say it row by row."
ROLE_TIP = "Which column of the file this is; the reason of the guess stands beside it."
AS_FOUND = "as the file has it"
UNITS = {
    "photometry": (AS_FOUND, "mag", "mmag", "ppt", "ppm", "percent"),
    "velocities": (AS_FOUND, "km/s", "m/s"),
}
SHOWN_ROWS = 8


@dataclass(frozen=True)
class Reading:
    """How the person wants a table read; `adds`: to the present session instead of a new one."""

    columns: Mapping[str, str] = field(default_factory=dict)
    band: str | None = None
    adds: bool = False


def ask_reading(
    parent: QWidget | None,
    table: RawTable,
    kind: str,
    *,
    may_add: bool = False,
    adds: bool = False,
) -> Reading | None:
    """Show the dialog for the first rows of a table; None if the person gave up."""
    dialog = ReadingDialog(table, kind, parent, may_add=may_add)
    dialog.adds.setChecked(may_add and adds)
    accepted = dialog.exec() == QDialog.DialogCode.Accepted
    dialog.deleteLater()
    return dialog.reading() if accepted else None


class ReadingDialog(QDialog):
    """The dialog: guesses above, the first rows below, what cannot be read at the foot."""

    def __init__(
        self, table: RawTable, kind: str, parent: QWidget | None = None, *, may_add: bool = False
    ) -> None:
        super().__init__(parent)
        self.table, self.kind = table, kind
        self.setWindowTitle(f"Read {kind} from {Path(table.path).name}")
        self.resize(820, 560)
        self._changed: dict[str, str] = {}
        self._shown_system = ""
        self.boxes: dict[str, QComboBox] = {}
        self.reasons: dict[str, QLabel] = {}
        self.system, self.unit = QComboBox(), QComboBox()
        self.band = QLineEdit()
        self.adds = QCheckBox("Add to the present session")
        named(
            self.adds,
            "Add to the present session",
            "Beside the tables it has, instead of a new one",
        )
        self.adds.setVisible(may_add)
        self.form = QLabel("")
        self.foot = QLabel("")
        self.rows = QTableWidget()
        self.buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Open | QDialogButtonBox.StandardButton.Cancel
        )
        self._place()
        self._look()

    def reading(self) -> Reading:
        """What was chosen."""
        return Reading(dict(self._changed), self.band.text().strip() or None, self.adds.isChecked())

    def choose(self, role: str, column: str) -> None:
        """Take a column for a role."""
        self._changed[role] = "" if column == NOT_THERE else column
        if role in ("mag", "flux") and column != NOT_THERE:
            self._changed["flux" if role == "mag" else "mag"] = ""
        self._look()

    def _place(self) -> None:
        grid = QGridLayout()
        grid.setHorizontalSpacing(12)
        grid.setColumnStretch(2, 1)
        for number, role in enumerate(ROLES[self.kind]):
            box, reason = QComboBox(), QLabel("")
            named(box, ROLE_WORDS[role], ROLE_TIP)
            reason.setObjectName("quiet")
            reason.setWordWrap(True)
            box.activated.connect(
                lambda _, role=role, box=box: self.choose(role, box.currentText())
            )
            for column, widget in enumerate((QLabel(ROLE_WORDS[role]), box, reason)):
                grid.addWidget(widget, number, column)
            self.boxes[role], self.reasons[role] = box, reason
        line = len(ROLES[self.kind])
        self.clock = QLabel("")
        self.clock.setObjectName("quiet")
        self.clock.setWordWrap(True)
        self.system.addItems(TIME_SYSTEMS)
        named(self.system, "Time system", SYSTEM_TIP)
        self.system.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        self.system.textActivated.connect(self._choose_system)
        typed = QLineEdit()
        self.system.setLineEdit(typed)
        named(typed, "Time system, typed", SYSTEM_TIP)
        typed.editingFinished.connect(lambda: self._choose_system(typed.text()))
        self.unit.addItems(UNITS[self.kind])
        named(self.unit, "Unit", UNIT_TIPS[self.kind])
        self.unit.textActivated.connect(self._choose_unit)
        rows: list[tuple[QWidget, ...]] = [
            (QLabel("Time system"), self.system, self.clock),
            (QLabel("Unit"), self.unit),
        ]
        if self.kind == "photometry":
            self.band.setPlaceholderText("such as V")
            named(self.band, "Band of the whole file", BAND_TIP)
            self.band.editingFinished.connect(self._look)
            rows.append((QLabel("Band of the file"), self.band))
        for number, widgets in enumerate(rows, start=line):
            for column, widget in enumerate(widgets):
                grid.addWidget(widget, number, column)
        self.form.setObjectName("quiet")
        self.foot.setWordWrap(True)
        self.foot.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.rows.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        named(self.rows, "First rows of the file", "As the program reads them")
        self.rows.setMaximumHeight(220)
        self.rows.verticalHeader().setDefaultSectionSize(22)
        self.rows.verticalHeader().hide()
        self.rows.setShowGrid(False)
        self.buttons.accepted.connect(self.accept)
        self.buttons.rejected.connect(self.reject)
        layout = QVBoxLayout(self)
        layout.addWidget(self.form)
        layout.addLayout(grid)
        layout.addWidget(self.rows)
        layout.addWidget(self.foot)
        layout.addStretch(1)
        layout.addWidget(self.adds)
        layout.addWidget(self.buttons)

    def _choose_system(self, text: str) -> None:
        if text.strip() != self._shown_system:
            self._set("time_system", text.strip())

    def _choose_unit(self, text: str) -> None:
        self._changed.pop("unit", None)
        if text == AS_FOUND:
            self._look()
        else:
            self._set("unit", text)

    def _set(self, name: str, text: str) -> None:
        self._changed[name] = text
        self._look()

    def _look(self) -> None:
        try:
            found = preview_of(
                self.table, self.kind, columns=self._changed, band=self.band.text().strip() or None
            )
        except Exception as error:
            self.foot.setText(trouble.trouble_of("reading", error).sentence)
            self.buttons.button(QDialogButtonBox.StandardButton.Open).setEnabled(False)
            return
        self._show(found)

    def _show(self, found: Preview) -> None:
        count = f"about {found.row_count}" if found.estimated else str(found.row_count)
        self.form.setText(f"{found.form}, {count} rows")
        guesses = {guess.role: guess for guess in found.guesses}
        for role, box in self.boxes.items():
            box.blockSignals(True)
            box.clear()
            box.addItems([NOT_THERE, *found.columns])
            guess = guesses.get(role)
            box.setCurrentIndex(box.findText(guess.column) if guess is not None else 0)
            box.blockSignals(False)
            unit = f" [{guess.unit}]" if guess is not None and guess.unit else ""
            self.reasons[role].setText("" if guess is None else guess.reason + unit)
        if found.clock is not None:
            if self.system.findText(found.clock.scale) < 0:
                self.system.addItem(found.clock.scale)
            self._shown_system = found.clock.scale
            self.system.setCurrentText(found.clock.scale)
            offset = f"; {found.clock.offset:.10g} d is added" if found.clock.offset else ""
            self.clock.setText(found.clock.reason + offset)
        if found.bands and not self.band.text():
            self.band.setPlaceholderText(", ".join(found.bands))
        self._show_rows(found)
        self._show_foot(found)

    def _show_rows(self, found: Preview) -> None:
        rows = found.rows[:SHOWN_ROWS]
        self.rows.setColumnCount(len(found.columns))
        self.rows.setHorizontalHeaderLabels(list(found.columns))
        self.rows.setRowCount(len(rows))
        for number, row in enumerate(rows):
            for column, text in enumerate(row):
                item = QTableWidgetItem(text)
                item.setTextAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
                self.rows.setItem(number, column, item)
        self.rows.resizeColumnsToContents()

    def _show_foot(self, found: Preview) -> None:
        lines = [str(problem) for problem in found.problems]
        lines += list(found.notes)
        bad = sorted((*found.unreadable, *found.set_aside), key=lambda row: row.line)
        lines += [f"line {row.line} is left out: {row.reason}" for row in bad[:4]]
        if len(bad) > 4:
            more = len(bad) - 4
            lines.append(f"and {more} more line{'s are' if more > 1 else ' is'} left out")
        self.foot.setText("\n".join(lines))
        usable = not found.problems and bool(found.guesses)
        self.buttons.button(QDialogButtonBox.StandardButton.Open).setEnabled(usable)
