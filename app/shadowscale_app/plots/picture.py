"""The plot that all panes use: the theme's look, our own right-click menu, keys, a readable export."""

from __future__ import annotations

import pyqtgraph as pg
from PySide6.QtCore import QEvent, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QAction, QContextMenuEvent, QGuiApplication, QMouseEvent
from PySide6.QtWidgets import QMenu, QWidget

from shadowscale_app import theme
from shadowscale_app.plots.box import Box
from shadowscale_app.plots.figure import ask_and_save

pg.setConfigOptions(antialias=True)


class Picture(pg.PlotWidget):
    """A plot with axes `left` and `bottom`.

    Signals: `pointed(x)` where the mouse is; `outlined(corners)` after something was drawn round with the brush.
    """

    pointed = Signal(float)
    outlined = Signal(object)

    def __init__(
        self,
        name: str,
        *,
        left: str = "",
        bottom: str = "",
        axes: dict[str, pg.AxisItem] | None = None,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent=parent, viewBox=Box(), axisItems=axes)
        self.name = name
        self.home_x: tuple[float, float] | None = None
        self.home_y: tuple[float, float] | None = None
        self.box.outlined.connect(self.outlined)
        self.setAccessibleName(name)
        self.setMenuEnabled(False)
        self.hideButtons()
        self.setFrameShape(pg.QtWidgets.QFrame.Shape.NoFrame)
        for side in ("left", "bottom"):
            axis = self.getAxis(side)
            axis.enableAutoSIPrefix(False)
            axis.setStyle(tickLength=-5, hideOverlappingLabels=True)
        self.getAxis("left").setWidth(62)
        self.getAxis("bottom").setHeight(34)
        self.name_axis("left", left)
        self.name_axis("bottom", bottom)
        self.setMouseTracking(True)
        self.setMinimumSize(120, 60)
        self.dress()

    @property
    def box(self) -> Box:
        """The part inside the axes."""
        found: Box = self.getPlotItem().getViewBox()
        return found

    def name_axis(self, side: str, words: str) -> None:
        """Write what an axis shows, in its middle."""
        axis = self.getAxis(side)
        axis.setLabel(words)
        axis.resizeEvent()  # else it stands where the words before it began

    def dress(self) -> None:
        """Take the theme's colours."""
        now = self._worn = theme.colours()
        self.setBackground(now.raised)
        self.box.setBackgroundColor(now.paper)
        self.box.setBorder(pg.mkPen(now.line))
        for side in ("left", "bottom"):
            axis = self.getAxis(side)
            axis.setPen(pg.mkPen(now.line))
            axis.setTextPen(pg.mkPen(now.quiet))
            axis.setTickFont(theme.small_font(-1.0))
            axis.label.setFont(theme.small_font(-0.5))

    def changeEvent(self, event: QEvent) -> None:
        """Follow the theme."""
        super().changeEvent(event)
        changed = event.type() == QEvent.Type.PaletteChange and hasattr(self, "name")
        if changed and theme.colours() is not self._worn:
            self.dress()

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Our own menu: what one does with a picture."""
        menu = self.menu()
        menu.exec(event.globalPos())
        event.accept()

    def menu(self) -> QMenu:
        """The right-click menu."""
        menu = QMenu(self)
        for words, call in (
            ("Copy picture", self.copy_picture),
            ("Save figure\N{HORIZONTAL ELLIPSIS}", lambda: ask_and_save(self)),
            ("Reset view", self.reset_view),
        ):
            action = QAction(words, menu)
            action.triggered.connect(call)
            menu.addAction(action)
        return menu

    def copy_picture(self) -> None:
        """Put what is seen on the clipboard."""
        QGuiApplication.clipboard().setPixmap(self.grab())

    def reset_view(self) -> None:
        """Show everything again."""
        if self.home_x is None and self.home_y is None:
            self.box.enableAutoRange()
        if self.home_x is not None:
            self.setXRange(*self.home_x, padding=0)
        if self.home_y is not None:
            self.setYRange(*self.home_y, padding=0)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Tell where the mouse points."""
        super().mouseMoveEvent(event)
        inside = self.at(event.position())
        if inside is not None:
            self.pointed.emit(inside.x())

    def at(self, position: QPointF) -> QPointF | None:
        """Axis values at a place in the widget; None outside the axes."""
        scene = self.mapToScene(position.toPoint())
        if not self.box.sceneBoundingRect().contains(scene):
            return None
        found: QPointF = self.box.mapSceneToView(scene)
        return found

    def place_of(self, x: float, y: float) -> QPointF:
        """Where in the widget an axis value is."""
        return QPointF(self.mapFromScene(self.box.mapViewToScene(QPointF(x, y))))

    def visible(self) -> QRectF:
        """What the axes show now."""
        found: QRectF = self.box.viewRect()
        return found

    def link_x(self, other: Picture) -> None:
        """Move along with another picture sideways."""
        self.setXLink(other)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """A double click shows everything again."""
        super().mouseDoubleClickEvent(event)
        if event.button() == Qt.MouseButton.LeftButton and not self.on_something():
            self.reset_view()

    def on_something(self) -> bool:
        """Whether the mouse rests on a thing that answers a double click by itself."""
        return False
