"""A button that plays and pauses, its signs drawn: not every font has them."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QPainter, QPaintEvent, QPolygonF
from PySide6.QtWidgets import QToolButton, QWidget

SIDE = 11.0  # of a sign [px]


class PlayButton(QToolButton):
    """A triangle; two bars while it plays."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setCheckable(True)

    def sizeHint(self) -> QSize:
        """Room for a sign."""
        return QSize(36, 26)

    def paintEvent(self, event: QPaintEvent) -> None:
        """The button, and its sign upon it."""
        super().paintEvent(event)
        box = QRectF(0.0, 0.0, SIDE, SIDE)
        box.moveCenter(QRectF(self.rect()).center())
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(self.palette().buttonText())
        if self.isChecked():
            bar = QRectF(box.left(), box.top(), SIDE / 3, SIDE)
            painter.drawRect(bar)
            painter.drawRect(bar.translated(2 * SIDE / 3, 0.0))
        else:
            tip = QPointF(box.right(), box.center().y())
            painter.drawPolygon(QPolygonF([box.topLeft(), tip, box.bottomLeft()]))
