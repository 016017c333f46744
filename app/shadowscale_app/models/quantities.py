"""The table of quantities as a Qt model: rows of the engine, edits as wishes."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt, Signal
from PySide6.QtGui import QColor

from shadowscale.view.rows import FREE, HELD, WITH_PRIOR, Row
from shadowscale.view.written import read_number, symbol
from shadowscale_app import theme
from shadowscale_app.naming import wrapped

HEADERS = ("name", "value", "error", "unit", "state", "held by the data", "limits")
HEADER_TIPS = (
    "Short name; rest on a line for its meaning and what it does to the curve",
    "Double-click to type another one: the curve follows at once",
    "68.3 % limits; empty where it is held",
    "Nominal solar units (IAU 2015), days, degrees, km/s",
    "Free: fitted; held: stays; prior: fitted, with a wish; = another: follows that one. Double-click to change it",
    "Bar: error over value (where that lies around zero, over its natural scale). Number: the strongest correlation; double-click to see it as a picture",
    "What the value can be at all",
)
SYMBOL, VALUE, ERROR, UNIT, STATE, GRADE, LIMITS = range(7)
Index = QModelIndex | QPersistentModelIndex
ROW = Qt.ItemDataRole.UserRole
MARKS = {
    FREE: "\N{WHITE CIRCLE} free",
    HELD: "\N{BLACK CIRCLE} held",
    WITH_PRIOR: "\N{BULLSEYE} prior",
}


class QuantityModel(QAbstractTableModel):
    """Rows of `shadowscale.view.rows`. Signals: `typed(key, value)`, `refused(words)`."""

    typed = Signal(str, float)
    refused = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._rows: tuple[Row, ...] = ()

    @property
    def rows(self) -> tuple[Row, ...]:
        """What is shown."""
        return self._rows

    def show_rows(self, rows: tuple[Row, ...]) -> None:
        """Show other rows; where the keys are the same, the selection stays."""
        same = [row.key for row in rows] == [row.key for row in self._rows]
        if not same:
            self.beginResetModel()
        self._rows = rows
        if not same:
            self.endResetModel()
        elif rows:
            self.dataChanged.emit(self.index(0, 0), self.index(len(rows) - 1, len(HEADERS) - 1))

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008 - Qt's own signature
        """Number of quantities."""
        return 0 if parent.isValid() else len(self._rows)

    def columnCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008 - Qt's own signature
        """Number of columns."""
        return 0 if parent.isValid() else len(HEADERS)

    def headerData(
        self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole
    ) -> Any:
        """Names of the columns."""
        if orientation == Qt.Orientation.Horizontal and role == Qt.ItemDataRole.DisplayRole:
            return HEADERS[section]
        if orientation == Qt.Orientation.Horizontal and role == Qt.ItemDataRole.ToolTipRole:
            return wrapped(HEADER_TIPS[section])
        return None

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Values of basic quantities can be typed."""
        flags = super().flags(index)
        if index.column() == VALUE and self._rows[index.row()].basic:
            flags |= Qt.ItemFlag.ItemIsEditable
        return flags

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """What a cell shows."""
        row = self._rows[index.row()]
        if role == ROW:
            return row
        if role == Qt.ItemDataRole.DisplayRole:
            return _texts(row)[index.column()]
        if role == Qt.ItemDataRole.EditRole:
            return row.value_text.replace("\N{MINUS SIGN}", "-")
        if role == Qt.ItemDataRole.ToolTipRole:
            return wrapped(_tip(row))
        if role == Qt.ItemDataRole.TextAlignmentRole and index.column() == VALUE:
            return int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        if role == Qt.ItemDataRole.ForegroundRole and index.column() in (ERROR, UNIT, LIMITS):
            return QColor(theme.colours().quiet)
        return None

    def setData(self, index: Index, value: Any, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """A typed value becomes a wish; nothing changes here."""
        if role != Qt.ItemDataRole.EditRole:
            return False
        row = self._rows[index.row()]
        if str(value).strip() == row.value_text.replace("\N{MINUS SIGN}", "-"):
            return False
        try:
            self.typed.emit(row.key, read_number(str(value)))
        except ValueError as problem:
            self.refused.emit(str(problem))
            return False
        return True

    def row_of(self, key: str) -> int:
        """The row of a key, -1 if it is not shown."""
        for number, row in enumerate(self._rows):
            if row.key == key:
                return number
        return -1


def as_text(rows: tuple[Row, ...]) -> str:
    """Rows for the clipboard: tab-separated with a header."""
    lines = ["\t".join(HEADERS)]
    lines += ["\t".join(_texts(row)) for row in rows]
    return "\n".join(lines)


def _texts(row: Row) -> tuple[str, ...]:
    state = f"= {symbol(row.tied_to)}" if row.tied_to else MARKS.get(row.state, row.state)
    return (
        row.symbol,
        row.value_text,
        row.error_text,
        row.unit,
        state,
        row.strongest,
        row.bounds_text,
    )


def _tip(row: Row) -> str:
    lines = [f"{row.key}: {row.meaning}"]
    if row.tied_to:
        lines.append(f"tied to {row.tied_to}")
    if row.effect:
        lines.append(row.effect)
    if row.relative is not None:
        of_what = f" {row.of_what}" if row.of_what else ""
        lines.append(
            f"error {100 * row.relative:.2g} %{of_what} \N{EM DASH} {row.grade} held by the data"
        )
    if row.strongest:
        lines.append(f"strongest correlation {row.strongest}")
    if row.bounds_text:
        lines.append(f"limits {row.bounds_text}")
    return "\n".join(lines)
