"""The inside of a picture: dragging moves, Shift zooms into a rectangle, the brush draws round points."""

from __future__ import annotations

from typing import Any

import pyqtgraph as pg
from PySide6.QtCore import QPointF, Qt, Signal
from PySide6.QtGui import QPainterPath
from PySide6.QtWidgets import QGraphicsPathItem

from shadowscale_app import theme


class Box(pg.ViewBox):
    """A view box with a brush; `outlined` carries the corners of what was drawn round, in axis values."""

    outlined = Signal(object)

    def __init__(self) -> None:
        super().__init__(enableMenu=False)
        self.brushing = False
        self._outline: list[QPointF] = []
        self._trace = QGraphicsPathItem()
        self._trace.setZValue(1e6)
        self.addItem(self._trace, ignoreBounds=True)

    def mouseDragEvent(self, event: Any, axis: int | None = None) -> None:
        """Draw round points while brushing; otherwise move, or zoom with Shift."""
        left = event.button() == Qt.MouseButton.LeftButton
        if self.brushing and left and axis is None:
            event.accept()
            self._brush(event)
            return
        zoom = left and bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        self.state["mouseMode"] = self.RectMode if zoom else self.PanMode
        if event.button() == Qt.MouseButton.RightButton:
            event.ignore()  # the right button opens the menu and does nothing else
            return
        super().mouseDragEvent(event, axis=axis)

    def _brush(self, event: Any) -> None:
        if event.isStart():
            self._outline = [self.mapSceneToView(event.buttonDownScenePos())]
        self._outline.append(self.mapSceneToView(event.scenePos()))
        path = QPainterPath(self._outline[0])
        for corner in self._outline[1:]:
            path.lineTo(corner)
        path.closeSubpath()
        self._trace.setPen(theme.pen(theme.colours().accent, width=1.5, style=Qt.PenStyle.DashLine))
        self._trace.setBrush(theme.colour(theme.colours().accent, 0.12))
        self._trace.setPath(path)
        if event.isFinish():
            self._trace.setPath(QPainterPath())
            self.outlined.emit(tuple((corner.x(), corner.y()) for corner in self._outline))
