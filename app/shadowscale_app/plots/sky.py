"""The two stars painted to scale, seen from here and from above."""

from __future__ import annotations

import numpy as np
from pyqtgraph.functions import arrayToQPolygonF
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPaintEvent, QPen, QPolygonF, QRadialGradient
from PySide6.QtWidgets import QSizePolicy, QWidget

from shadowscale.view.scene import Disc, Scene
from shadowscale_app import theme

STOPS = 12
SUN_WORDS = 16.0  # pixels beside the Sun's circle


class Sky(QWidget):
    """A painted scene."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.scene: Scene | None = None
        self.setAccessibleName("System to scale")
        self.setMinimumSize(200, 110)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)

    def show_scene(self, scene: Scene | None) -> None:
        """Paint another scene."""
        self.scene = scene
        self.setAccessibleDescription(scene.words if scene is not None else "")
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the sky view above and the orbit from above below it."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        now = theme.colours()
        painter.fillRect(self.rect(), QColor("#0B0E14" if now.dark else "#1B2130"))
        if self.scene is None:
            painter.setPen(QColor("#9BA1AC"))
            painter.drawText(
                self.rect(),
                Qt.AlignmentFlag.AlignCenter,
                "The system appears here\nonce there is a model.",
            )
            return
        width, height = float(self.width()), float(self.height())
        inset = min(0.40 * width, 0.62 * height)
        left = QRectF(0, 0, width - inset - 8, height)
        self._paint_sky(painter, left)
        self._paint_above(painter, QRectF(width - inset - 4, height - inset - 4, inset, inset))
        painter.end()

    def _paint_sky(self, painter: QPainter, area: QRectF) -> None:
        scene = self.scene
        assert scene is not None
        reach = max(float(np.abs(scene.sky1[:, 0]).max()), float(np.abs(scene.sky2[:, 0]).max()))
        biggest = max(disc.radius for disc in scene.discs)
        tall = (
            max(float(np.abs(scene.sky1[:, 1]).max()), float(np.abs(scene.sky2[:, 1]).max()))
            + biggest
        )
        # the Sun has a column of its own on the left, so that no star ever passes over it
        sun = 2.2 * (scene.sun_radius or 0.0)
        words = 0.0 if scene.sun_radius is None else SUN_WORDS
        scale = min(
            (area.width() - words) / (2.1 * (reach + biggest) + sun),
            (area.height() - 30) / (2.1 * tall),
        )
        middle = area.center() + QPointF((sun * scale + words) / 2, -4)
        painter.setPen(QPen(QColor(255, 255, 255, 60), 1))
        for orbit in (scene.sky1, scene.sky2):
            painter.drawPolyline(_polygon(orbit, middle, scale))
        for disc in sorted(scene.discs, key=lambda disc: -disc.depth):
            _paint_disc(
                painter,
                disc,
                middle + QPointF(disc.x * scale, -disc.y * scale),
                disc.radius * scale,
                scene.discs.index(disc) + 1,
            )
        self._paint_sun(painter, area, scale)

    def _paint_sun(self, painter: QPainter, area: QRectF, scale: float) -> None:
        scene = self.scene
        assert scene is not None
        painter.setFont(theme.small_font(-1.5))
        if scene.sun_radius is None:
            return
        radius = scene.sun_radius * scale
        place = QPointF(area.left() + 8 + max(radius, 10), area.bottom() - 22 - radius)
        painter.setPen(QPen(QColor(theme.YELLOW), 1.2, Qt.PenStyle.DotLine))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawEllipse(place, radius, radius)
        painter.setPen(QColor(theme.YELLOW))
        words = QRectF(place.x() - 20, area.bottom() - 20, 40, 14)
        painter.drawText(words, Qt.AlignmentFlag.AlignCenter, "Sun")

    def _paint_above(self, painter: QPainter, area: QRectF) -> None:
        scene = self.scene
        assert scene is not None
        reach = float(max(np.abs(scene.above1).max(), np.abs(scene.above2).max())) + max(
            d.radius for d in scene.discs
        )
        scale = 0.42 * area.height() / reach
        middle = area.center() + QPointF(0, -6)
        for orbit, tint in ((scene.above1, theme.ORANGE), (scene.above2, theme.SKY)):
            painter.setPen(QPen(theme.colour(tint, 0.55), 1))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawPolyline(_polygon(orbit, middle, scale))
        for disc, tint in zip(scene.discs, (theme.ORANGE, theme.SKY), strict=True):
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(tint))
            place = middle + QPointF(disc.x * scale, -disc.depth * scale)
            radius = max(2.0, disc.radius * scale)
            painter.drawEllipse(place, radius, radius)
        painter.setPen(QPen(QColor(255, 255, 255, 130), 1))
        foot = QPointF(middle.x(), area.bottom() - 3)
        painter.drawLine(QPointF(middle.x(), middle.y() + 0.42 * area.height()), foot)
        painter.drawPolyline(QPolygonF([foot + QPointF(-3, -4), foot, foot + QPointF(3, -4)]))
        painter.setFont(theme.small_font(-2.0))
        painter.drawText(foot + QPointF(6, -1), "to us")


def _paint_disc(painter: QPainter, disc: Disc, place: QPointF, radius: float, star: int) -> None:
    tint = QColor(theme.ORANGE if star == 1 else theme.SKY).lighter(135)
    gradient = QRadialGradient(place, radius)
    for stop in range(STOPS + 1):
        share = stop / STOPS
        level = float(
            disc.intensity[min(int(share * (disc.intensity.size - 1)), disc.intensity.size - 1)]
        )
        level = 0.15 + 0.85 * level
        gradient.setColorAt(
            share, QColor.fromRgbF(tint.redF() * level, tint.greenF() * level, tint.blueF() * level)
        )
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QBrush(gradient))
    painter.drawEllipse(place, radius, radius)
    if radius > 9:
        painter.setPen(QColor(0, 0, 0, 170))
        painter.setFont(theme.small_font(-1.0))
        painter.drawText(
            QRectF(place.x() - 10, place.y() - 10, 20, 20), Qt.AlignmentFlag.AlignCenter, str(star)
        )


def _polygon(
    orbit: np.ndarray[tuple[int, int], np.dtype[np.float64]], middle: QPointF, scale: float
) -> QPolygonF:
    x, y = middle.x() + orbit[:, 0] * scale, middle.y() - orbit[:, 1] * scale
    polygon: QPolygonF = arrayToQPolygonF(x, y)
    return polygon
