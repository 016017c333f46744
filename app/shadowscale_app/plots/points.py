"""Measured points: drawn one by one up to a limit, above it as a picture of their density.

The points are painted once for a view and kept as a pixmap, so that a marker or a curve that moves
over them costs the same however many there are.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import hypot
from typing import Any

import numpy as np
import pyqtgraph as pg
from pyqtgraph.Qt.internals import PrimitiveArray
from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QImage, QPaintEngine, QPainter, QPen, QPixmap, QTransform

from shadowscale_app import theme

MOST_POINTS = 20_000
FINE, FINEST = 3.0, 6.0  # pixels for one of the screen: in a drawing without pixels; at most
UNSEEN = 0.2  # pixels that points may move before they are painted anew


@dataclass(frozen=True, eq=False)
class Layer:
    """Points of one look. `error` None: no bars."""

    x: Any
    y: Any
    error: Any
    colour: str
    shape: str = "o"
    size: float = 4.0
    opacity: float = 0.8


class Points(pg.GraphicsObject):
    """Layers of points in one item."""

    def __init__(self) -> None:
        super().__init__()
        self._layers: tuple[Layer, ...] = ()
        self._bounds = QRectF()
        self._kept: tuple[Any, QPixmap] | None = None
        self._version = 0
        self.setZValue(1)

    def show_layers(self, layers: tuple[Layer, ...]) -> None:
        """Replace what is drawn; what moves by less than can be seen stays as it is painted."""
        layers = tuple(layer for layer in layers if len(layer.x))
        if self._kept is not None and self._looks_as(layers):
            return
        self.prepareGeometryChange()
        self._layers = layers
        self._bounds = _bounds(self._layers)
        self._version += 1
        self._kept = None
        self.informViewBoundsChanged()
        self.update()

    def _looks_as(self, layers: tuple[Layer, ...]) -> bool:
        """Whether other layers would give the picture that is kept."""
        wide, high = self.pixelVectors()
        if wide is None or high is None or len(layers) != len(self._layers):
            return False
        room = (UNSEEN * abs(wide.x()), UNSEEN * abs(high.y()))
        return all(_alike(*pair, room) for pair in zip(self._layers, layers, strict=True))

    @property
    def layers(self) -> tuple[Layer, ...]:
        """What is drawn."""
        return self._layers

    @property
    def as_density(self) -> bool:
        """Whether the present view is drawn as a density picture."""
        return self._in_view() > MOST_POINTS

    def boundingRect(self) -> QRectF:
        """Everything that the view shows: the item fills it."""
        return QRectF(self.viewRect()) if self.getViewBox() is not None else self._bounds

    def dataBounds(
        self, axis: int, frac: float = 1.0, orthoRange: Any = None
    ) -> tuple[float | None, float | None]:
        """Range of the points, for the view that fits itself."""
        if not self._layers:
            return (None, None)
        bounds = self._bounds
        return (bounds.left(), bounds.right()) if axis == 0 else (bounds.top(), bounds.bottom())

    def pixelPadding(self) -> float:
        """Room for the points' own size."""
        return 6.0

    def viewTransformChanged(self) -> None:
        """Paint anew after the view moved."""
        super().viewTransformChanged()
        self.prepareGeometryChange()
        self._kept = None

    def paint(self, painter: QPainter, option: Any, widget: Any = None) -> None:
        """Put the kept pixmap; make it first where the view is new."""
        box = self.getViewBox()
        if box is None or not self._layers:
            return
        area = box.mapRectToScene(box.rect())
        ratio = _fineness(painter, self.sceneTransform())
        key = (self._version, self.sceneTransform(), area, ratio, theme.colours().dark)
        if self._kept is None or self._kept[0] != key:
            self._kept = (key, self._pixmap(area, ratio))
        to_device = painter.worldTransform()
        painter.save()
        # item coordinates -> scene -> device: undo the item's own transform, keep the device's
        painter.setWorldTransform(self.sceneTransform().inverted()[0] * to_device)
        painter.drawPixmap(area.topLeft(), self._kept[1])
        painter.restore()

    def _pixmap(self, area: QRectF, ratio: float) -> QPixmap:
        pixmap = QPixmap(max(1, round(area.width() * ratio)), max(1, round(area.height() * ratio)))
        pixmap.setDevicePixelRatio(ratio)
        pixmap.fill(Qt.GlobalColor.transparent)
        painter = QPainter(pixmap)
        transform = self.sceneTransform() * QTransform.fromTranslate(-area.left(), -area.top())
        many = self.as_density
        for layer in self._layers:
            if many and len(layer.x) > MOST_POINTS // 10:
                _draw_density(painter, layer, self.viewRect(), area, transform)
            else:
                _draw_points(painter, layer, transform)
        painter.end()
        return pixmap

    def _in_view(self) -> int:
        rect = self.viewRect()
        if rect is None:
            return 0
        return sum(_count(layer, rect) for layer in self._layers)


def _fineness(painter: QPainter, to_scene: QTransform) -> float:
    """Pixels of what is painted on for one of the scene: as many as a screen or a saved figure shows."""
    engine = painter.paintEngine()
    if engine is not None and engine.type() == QPaintEngine.Type.SVG:
        return FINE
    whole = to_scene.inverted()[0] * painter.deviceTransform()
    return round(min(max(hypot(whole.m11(), whole.m12()), 0.5), FINEST), 3)


def _count(layer: Layer, rect: QRectF) -> int:
    if len(layer.x) <= MOST_POINTS // 10:
        return len(layer.x)
    from shadowscale.view.density import points_in_view

    return points_in_view(layer.x, (rect.left(), rect.right(), rect.top(), rect.bottom()))


def _alike(one: Layer, two: Layer, room: tuple[float, float]) -> bool:
    """Whether two layers differ by less than `room` in x and y, and in nothing else."""
    look = [(each.colour, each.shape, each.size, each.opacity) for each in (one, two)]
    if look[0] != look[1] or len(one.x) != len(two.x) or (one.error is None) != (two.error is None):
        return False
    pairs = [(one.x, two.x, room[0]), (one.y, two.y, room[1])]
    if one.error is not None:
        pairs.append((one.error, two.error, room[1]))
    return all(old is new or bool(np.abs(old - new).max() <= most) for old, new, most in pairs)


def _bounds(layers: tuple[Layer, ...]) -> QRectF:
    if not layers:
        return QRectF()
    left = min(float(np.min(layer.x)) for layer in layers)
    right = max(float(np.max(layer.x)) for layer in layers)
    low = min(float(np.nanmin(layer.y)) for layer in layers)
    high = max(float(np.nanmax(layer.y)) for layer in layers)
    return QRectF(left, low, max(right - left, 1e-12), max(high - low, 1e-12))


def _draw_points(painter: QPainter, layer: Layer, transform: QTransform) -> None:
    x = transform.m11() * layer.x + transform.dx()
    y = transform.m22() * layer.y + transform.dy()
    if layer.error is not None and len(x) <= MOST_POINTS // 4:
        _draw_bars(painter, layer, x, y, half=abs(transform.m22()) * layer.error)
    stamp, side = _stamp(layer, painter.device().devicePixelRatioF())
    fragments = PrimitiveArray(QPainter.PixmapFragment, 10)
    fragments.resize(len(x))
    table = fragments.ndarray()
    ratio = stamp.devicePixelRatio()
    table[:, 0], table[:, 1] = x, y
    table[:, 2:4] = 0.0
    table[:, 4:6] = side * ratio
    table[:, 6:8] = 1.0 / ratio
    table[:, 8], table[:, 9] = 0.0, 1.0
    painter.drawPixmapFragments(*fragments.drawargs(), stamp)  # type: ignore[call-arg]


def _draw_bars(painter: QPainter, layer: Layer, x: Any, y: Any, *, half: Any) -> None:
    lines = PrimitiveArray(QLineF, 4)
    lines.resize(len(x))
    table = lines.ndarray()
    table[:, 0], table[:, 1], table[:, 2], table[:, 3] = x, y - half, x, y + half
    painter.setPen(QPen(theme.colour(layer.colour, 0.35 * layer.opacity), 1.0))
    painter.drawLines(*lines.drawargs())


def _draw_density(
    painter: QPainter, layer: Layer, rect: QRectF, area: QRectF, transform: QTransform
) -> None:
    from shadowscale.view.density import density_picture

    ratio = painter.device().devicePixelRatioF()
    width, height = max(1, round(area.width() * ratio)), max(1, round(area.height() * ratio))
    shades = density_picture(
        layer.x,
        layer.y,
        rectangle=(rect.left(), rect.right(), rect.top(), rect.bottom()),
        width=width,
        height=height,
    )
    if transform.m22() > 0:  # an axis that grows downwards, as magnitudes do
        shades = np.ascontiguousarray(shades[::-1])
    image = QImage(shades.data, width, height, width, QImage.Format.Format_Alpha8).copy()
    coloured = QImage(width, height, QImage.Format.Format_ARGB32_Premultiplied)
    coloured.fill(theme.colour(layer.colour))
    mask = QPainter(coloured)
    mask.setCompositionMode(QPainter.CompositionMode.CompositionMode_DestinationIn)
    mask.drawImage(0, 0, image)
    mask.end()
    painter.drawImage(QRectF(0, 0, area.width(), area.height()), coloured)


def _stamp(layer: Layer, ratio: float) -> tuple[QPixmap, float]:
    from pyqtgraph.graphicsItems.ScatterPlotItem import Symbols

    side = layer.size + 2.0
    pixmap = QPixmap(round(side * ratio), round(side * ratio))
    pixmap.fill(Qt.GlobalColor.transparent)
    pixmap.setDevicePixelRatio(pixmap.width() / side)
    painter = QPainter(pixmap)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.translate(QPointF(side / 2, side / 2))
    painter.scale(layer.size, layer.size)
    ink = theme.colour(layer.colour, layer.opacity)
    if layer.shape == "x":
        pen = QPen(ink, 1.2 / layer.size)
        painter.setPen(pen)
        painter.drawLine(QPointF(-0.4, -0.4), QPointF(0.4, 0.4))
        painter.drawLine(QPointF(-0.4, 0.4), QPointF(0.4, -0.4))
    elif layer.shape == "ring":
        painter.setPen(QPen(ink, 1.2 / layer.size))
        painter.drawEllipse(QPointF(0, 0), 0.42, 0.42)
    else:
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(ink)
        painter.drawPath(Symbols[layer.shape])
    painter.end()
    return pixmap, side
