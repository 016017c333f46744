"""What a hand does in a picture: press, move in small steps, let go."""

from __future__ import annotations

from itertools import pairwise

from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from shadowscale_app.plots.picture import Picture

STEPS = 4


def drag(
    picture: Picture,
    start: float,
    end: float,
    modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier,
    *,
    height: float = 0.3,
) -> None:
    """Drag from one axis value to another at `height` of the picture (0 foot, 1 head)."""
    view = picture.visible()
    y = view.top() + height * view.height()
    draw(picture, [(start, y), (end, y)], modifier)


def draw(
    picture: Picture,
    corners: list[tuple[float, float]],
    modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier,
) -> None:
    """Press at the first corner, move along all, let go at the last; axis values."""
    QApplication.processEvents()
    port, left = picture.viewport(), Qt.MouseButton.LeftButton
    places = [picture.place_of(x, y).toPoint() for x, y in corners]
    QTest.mouseMove(port, places[0])
    QApplication.processEvents()
    QTest.mousePress(port, left, modifier, places[0])
    for before, after in pairwise(places):
        for step in range(1, STEPS + 1):
            way = after - before
            _move(
                picture, before + QPoint(way.x() * step // STEPS, way.y() * step // STEPS), modifier
            )
    QTest.mouseRelease(port, left, modifier, places[-1])
    QApplication.processEvents()


def _move(picture: Picture, place: QPoint, modifier: Qt.KeyboardModifier) -> None:
    """A move with the button held; QTest's own moves carry no buttons on every platform."""

    port = picture.viewport()
    event = QMouseEvent(
        QEvent.Type.MouseMove,
        QPointF(place),
        QPointF(port.mapToGlobal(place)),
        Qt.MouseButton.NoButton,
        Qt.MouseButton.LeftButton,
        modifier,
    )
    QApplication.sendEvent(port, event)
    QApplication.processEvents()
