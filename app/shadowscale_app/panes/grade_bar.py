"""How well the data hold a quantity, at a glance: a bar of the relative error, and a correlation."""

from __future__ import annotations

from PySide6.QtCore import QModelIndex, QPersistentModelIndex, QRectF, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QStyle, QStyledItemDelegate, QStyleOptionViewItem

from shadowscale.view.grades import BADLY, FAIRLY, STRONG, WELL
from shadowscale.view.rows import Row
from shadowscale_app import theme
from shadowscale_app.models.quantities import ROW

BAR = 20.0
SIGNS = {WELL: "", FAIRLY: "!", BADLY: "!!"}


class GradeBar(QStyledItemDelegate):
    """Paints the row's bar, coloured and signed by its grade."""

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionViewItem,
        index: QModelIndex | QPersistentModelIndex,
    ) -> None:
        """Paint bar, sign and correlation."""
        row: Row = index.data(ROW)
        now = theme.colours()
        painter.save()
        area = QRectF(option.rect).adjusted(5, 0, -3, 0)
        selected = bool(option.state & QStyle.StateFlag.State_Selected)
        if row.bar > 0:
            self._bar(painter, area, row, selected=selected)
        if row.strongest:
            strong = abs(row.correlation) >= STRONG
            tint = now.accent_ink if selected else now.badly if strong else now.quiet
            painter.setPen(QColor(tint))
            painter.setFont(theme.small_font(-1.0))
            words = area.adjusted(BAR + 16, 0, 0, 0)
            text = painter.fontMetrics().elidedText(
                row.strongest, Qt.TextElideMode.ElideRight, int(words.width())
            )
            painter.drawText(
                words, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft, text
            )
        painter.restore()

    def _bar(self, painter: QPainter, area: QRectF, row: Row, *, selected: bool) -> None:
        now = theme.colours()
        tint = QColor(
            {WELL: now.well, FAIRLY: now.fairly, BADLY: now.badly}.get(row.grade, now.quiet)
        )
        ground = QRectF(area.left(), area.center().y() - 2.5, BAR, 5)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(now.grid))
        painter.drawRoundedRect(ground, 2, 2)
        painter.setBrush(tint)
        painter.drawRoundedRect(QRectF(ground.left(), ground.top(), BAR * row.bar, 5), 2, 2)
        painter.setPen(QColor(now.accent_ink) if selected else tint)
        painter.drawText(
            QRectF(ground.right() + 2, area.top(), 12, area.height()),
            Qt.AlignmentFlag.AlignVCenter,
            SIGNS.get(row.grade, ""),
        )
