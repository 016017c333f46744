"""A line that can be pulled; it does not move by itself, the session moves it."""

from __future__ import annotations

from typing import Any

import pyqtgraph as pg
from PySide6.QtCore import Qt, Signal

from shadowscale.view.markers import Handle
from shadowscale.view.written import phase_text
from shadowscale_app import theme
from shadowscale_app.naming import wrapped

ABOVE, HOT_ABOVE = 20, 22  # the value under the hand covers the other labels
EDGE = 0.25  # of the picture
HANDLING = "Drag it, or click and use the arrow keys (Shift coarse, Alt fine); a double click types its phase."
BARS = ("window", "level")  # drawn as bars along the upper edge
DASHES = {
    "contact": Qt.PenStyle.DashLine,
    "window": Qt.PenStyle.SolidLine,
    "level": Qt.PenStyle.SolidLine,
    "excluded": Qt.PenStyle.DotLine,
}


class MarkerLine(pg.InfiniteLine):
    """One handle's line.

    Signals: `pulled(name, phase, one_side)` while dragged, `let_go(name)`, `pointed_at(name, bool)`,
    `chosen(name, typing)` by a click, or a double click that wants to type its value.
    """

    pulled = Signal(str, float, bool)
    let_go = Signal(str)
    pointed_at = Signal(str, bool)
    chosen = Signal(str, bool)

    def __init__(
        self,
        handle: Handle,
        *,
        span: tuple[float, float] = (0.0, 1.0),
        high: float = 0.93,
        quiet: bool = False,
    ) -> None:
        super().__init__(pos=handle.phase, angle=90, movable=True, span=span)
        self.handle = handle
        self.focused = False
        self._quiet = quiet
        self._held = False
        self._offset = 0.0
        self.label = pg.InfLineLabel(self, text="", position=high, movable=False)
        self.setCursor(Qt.CursorShape.SplitHCursor)
        self.setToolTip(wrapped(f"{_capital(handle.words)}: {handle.effect}.\n{HANDLING}"))
        self.dress()

    def dress(self) -> None:
        """Take the theme's colours."""
        now = theme.colours()
        tint = {"contact": now.contact, "excluded": now.badly}.get(self.handle.group, now.quiet)
        hot = self.focused or self.mouseHovering or self._held
        self.setPen(
            theme.pen(tint, width=2.0 if self.focused else 1.2, style=DASHES[self.handle.group])
        )
        self.setHoverPen(theme.pen(tint, width=2.2))
        text = "" if self._quiet else self.handle.short
        if hot:
            text = f"{self.handle.short}  {phase_text(self.handle.phase)}".strip()
        self.label.fill = pg.mkBrush(theme.colour(now.raised, 0.92 if text else 0.0))
        self.label.border = theme.pen(tint if hot else now.line) if text else pg.mkPen(None)
        self.label.setColor(tint)
        self.label.setFont(theme.small_font(-1.0 if not hot else -0.5))
        self.setZValue(HOT_ABOVE if hot else ABOVE)
        self._turn_label(hot)
        self.label.setFormat(text)

    def _turn_label(self, hot: bool) -> None:
        """Outward of the eclipse; with its value inward where it would leave the picture."""
        side = 1.0 if self.handle.short in ("1", "2") else 0.0
        box = self.getViewBox()
        view = box.viewRect() if hot and box is not None else None
        if view is not None and view.width() > 0:
            across = (self.value() - view.left()) / view.width()
            side = 0.0 if across < EDGE else 1.0 if across > 1.0 - EDGE else side
        height = 0.0 if self.handle.group in BARS else 0.5  # below a bar, on a line
        self.label.anchors = [(side, height), (side, height)]

    def follow(self, handle: Handle) -> None:
        """Stand where the session says."""
        if handle == self.handle:
            return
        self.handle = handle
        self.setPos(handle.phase)
        self.dress()

    def set_focused(self, focused: bool) -> None:
        """Show that the keyboard moves this one."""
        self.focused = focused
        self.dress()

    def hoverEvent(self, event: Any) -> None:
        """Show the value under the mouse."""
        before = self.mouseHovering
        super().hoverEvent(event)
        if before != self.mouseHovering:
            self.dress()
            self.pointed_at.emit(self.handle.name, self.mouseHovering)

    def mouseDragEvent(self, event: Any) -> None:
        """Tell where the line is pulled to."""
        if event.button() != Qt.MouseButton.LeftButton:
            return
        event.accept()
        place = self.mapToParent(event.pos()).x()
        if event.isStart():
            self._offset = self.value() - self.mapToParent(event.buttonDownPos()).x()
            self._held = True
        one_side = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        self.pulled.emit(self.handle.name, self._offset + place, one_side)
        if event.isFinish():
            self._held = False
            self.dress()
            self.let_go.emit(self.handle.name)

    def mouseClickEvent(self, event: Any) -> None:
        """A click gives the line the keyboard, a double click opens the field for its value."""
        if event.button() == Qt.MouseButton.LeftButton:
            event.accept()
            self.chosen.emit(self.handle.name, event.double())


def _capital(words: str) -> str:
    return words[:1].upper() + words[1:]
