"""The picture of the start page: a shadow crossing a star, and the light that is left, as one line."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPaintEvent, QPen
from PySide6.QtWidgets import QWidget

from shadowscale_app import theme

HEIGHT, WIDTH = 120, 720
RADIUS, SHADOW = 30.0, 21.0
PLACES = (0.13, 0.31, 0.5, 0.69, 0.87)
# how far the shadow is from the star's middle at each place, in radii, and the light that is left
STEPS = ((-2.1, 0.0), (-1.05, 0.42), (0.0, 1.0), (1.05, 0.42), (2.1, 0.0))
DROP = 26.0


class Emblem(QWidget):
    """Five moments of an eclipse above its light curve."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFixedSize(WIDTH, HEIGHT)
        self.setAccessibleName("Five moments of an eclipse above its light curve")

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint it."""
        now = theme.colours()
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        for place, (offset, _) in zip(PLACES, STEPS, strict=True):
            middle = QPointF(place * WIDTH, RADIUS + 4)
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(theme.ORANGE))
            painter.drawEllipse(middle, RADIUS, RADIUS)
            painter.setBrush(QColor(now.ink))
            painter.drawEllipse(middle + QPointF(offset * RADIUS, 3.0), SHADOW, SHADOW)
        painter.setPen(QPen(QColor(now.model), 2.2))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawPath(_curve())
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(now.ink))
        for place, (_, lost) in zip(PLACES, STEPS, strict=True):
            painter.drawEllipse(QRectF(place * WIDTH - 3, _level(lost) - 3, 6, 6))
        painter.end()


def _level(lost: float) -> float:
    return HEIGHT - 44.0 + DROP * lost


def _curve() -> QPainterPath:
    """The line through the five points, level outside."""
    path = QPainterPath(QPointF(0, _level(0)))
    x = [place * WIDTH for place in PLACES]
    path.lineTo(x[0] + 40, _level(0))
    path.cubicTo(x[1] - 20, _level(0), x[1] - 12, _level(0.3), x[1], _level(0.42))
    path.cubicTo(x[1] + 30, _level(0.95), x[2] - 70, _level(1), x[2], _level(1))
    path.cubicTo(x[2] + 70, _level(1), x[3] - 30, _level(0.95), x[3], _level(0.42))
    path.cubicTo(x[3] + 12, _level(0.3), x[3] + 20, _level(0), x[4] - 40, _level(0))
    path.lineTo(WIDTH, _level(0))
    return path
