"""A picture with markers: pulled by the mouse, or reached by Tab and moved by the arrow keys."""

from __future__ import annotations

from collections.abc import Iterable

import pyqtgraph as pg
from PySide6.QtCore import QEvent, QPoint, Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent
from PySide6.QtWidgets import QLineEdit, QWidget

from shadowscale.session.session import Markers
from shadowscale.view.markers import Handle, handles
from shadowscale.view.written import phase_text, read_number
from shadowscale_app import theme
from shadowscale_app.naming import named
from shadowscale_app.plots.marker import BARS, MarkerLine
from shadowscale_app.plots.picture import Picture

EDITING = "A phase in cycles; Enter puts the marker there, Escape leaves it where it is"
KEYS = "\N{EM DASH} arrows move it (Shift coarse, Alt fine), Enter types, Escape puts back"
EDITOR = 110  # [pixels], the field in which a phase is typed
LABEL_HEIGHT = 0.08  # of the picture, from its upper edge to a marker's label
STEP, COARSE, FINE = 5e-4, 10.0, 0.1  # cycles a key press; factors of Shift and Alt
BANDS = {"window": (0.945, 1.0), "level": (0.885, 0.94), "excluded": (0.0, 1.0)}


class MarkedPicture(Picture):
    """A picture with the session's markers.

    Signals: `pulled(name, phase, one_side, gesture)`: move it there, steps of one gesture belong together;
    `let_go(name)`: the gesture ended; `told(words)`: for the status line.
    """

    pulled = Signal(str, float, bool, int)
    let_go = Signal(str)
    told = Signal(str)

    def __init__(
        self,
        name: str,
        *,
        groups: tuple[str, ...],
        left: str = "",
        bottom: str = "",
        only: str = "",
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(name, left=left, bottom=bottom, parent=parent)
        self.groups, self.only = set(groups), only
        self.lines: dict[str, MarkerLine] = {}
        self._bands: dict[str, pg.LinearRegionItem] = {}
        self._inverted = False
        self._focused = ""
        self._start = 0.0
        self._gesture = 0
        self._editor: QLineEdit | None = None
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)

    def show_markers(self, markers: Markers | None) -> None:
        """Draw the markers where they are; lines are kept so that a drag goes on."""
        found = (
            []
            if markers is None
            else [handle for handle in handles(markers) if self._shows(handle)]
        )
        wanted = {handle.name: handle for handle in found}
        for name in [name for name in self.lines if name not in wanted]:
            self.removeItem(self.lines.pop(name))
        for name, handle in wanted.items():
            if name in self.lines:
                self.lines[name].follow(handle)
            else:
                self._add_line(handle)
        self._show_bands(found)
        if self._focused not in self.lines:
            self._focused = ""

    def set_inverted(self, inverted: bool) -> None:
        """The axis grows downwards, as magnitudes do; labels and bars stay on top."""
        if inverted == self._inverted:
            return
        self._inverted = inverted
        self.box.invertY(inverted)
        for item in (*self.lines.values(), *self._bands.values()):
            self.removeItem(item)
        self.lines.clear()
        self._bands.clear()

    def show_groups(self, groups: Iterable[str], markers: Markers | None) -> None:
        """Choose which kinds of markers are drawn."""
        self.groups = set(groups)
        self.show_markers(markers)

    def dress(self) -> None:
        """Take the theme's colours."""
        super().dress()
        for line in getattr(self, "lines", {}).values():
            line.dress()
        for name, band in getattr(self, "_bands", {}).items():
            band.setBrush(_band_brush(name))

    @property
    def focused(self) -> str:
        """The marker that the keyboard moves; empty if none."""
        return self._focused

    @property
    def editor(self) -> QLineEdit | None:
        """The little field in which a value is typed; None while it is closed."""
        return self._editor

    def on_something(self) -> bool:
        """Whether the mouse rests on a marker."""
        return any(line.mouseHovering for line in self.lines.values())

    def focus_marker(self, name: str) -> None:
        """Give one marker the keyboard."""
        if self._focused in self.lines:
            self.lines[self._focused].set_focused(False)
        self._focused = name
        if name in self.lines:
            line = self.lines[name]
            line.set_focused(True)
            self._start = line.handle.phase
            self._gesture += 1
            self._tell_keys(line)

    def _tell_keys(self, line: MarkerLine) -> None:
        words = f"{line.handle.words}, phase {phase_text(line.handle.phase)}"
        self.setAccessibleDescription(f"{words}: {line.handle.effect}")
        self.told.emit(f"{words} {KEYS}")

    def focusNextPrevChild(self, forward: bool) -> bool:
        """Tab walks along the markers before it leaves the picture."""
        names = self._in_order()
        at = (
            names.index(self._focused)
            if self._focused in names
            else (-1 if forward else len(names))
        )
        at += 1 if forward else -1
        if self.hasFocus() and 0 <= at < len(names):
            self.focus_marker(names[at])
            return True
        self.focus_marker("")
        return bool(super().focusNextPrevChild(forward))

    def event(self, event: QEvent) -> bool:
        """Let Tab reach the markers: the graphics view would take it for itself."""
        tabs = (Qt.Key.Key_Tab, Qt.Key.Key_Backtab)
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress:
            key = event.key()
            if key in tabs and self.focusNextPrevChild(key == tabs[0]):
                return True
        return bool(super().event(event))

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """The keyboard leaves: no marker has it."""
        super().focusOutEvent(event)
        if self._editor is None and event.reason() != Qt.FocusReason.PopupFocusReason:
            self.focus_marker("")

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Arrows, Enter, Escape on the marker that has the keyboard."""
        line = self.lines.get(self._focused)
        key = event.key()
        if line is None or key not in (
            Qt.Key.Key_Left,
            Qt.Key.Key_Right,
            Qt.Key.Key_Return,
            Qt.Key.Key_Enter,
            Qt.Key.Key_Escape,
        ):
            super().keyPressEvent(event)
            return
        event.accept()
        one_side = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        if key in (Qt.Key.Key_Left, Qt.Key.Key_Right):
            step = _step(event.modifiers()) * (1 if key == Qt.Key.Key_Right else -1)
            self.pulled.emit(self._focused, line.handle.phase + step, one_side, self._gesture)
            self._tell_keys(line)
        elif key == Qt.Key.Key_Escape:
            self.pulled.emit(self._focused, self._start, one_side, self._gesture)
            self.let_go.emit(self._focused)
        else:
            self._ask_value(line)

    def keyReleaseEvent(self, event: QKeyEvent) -> None:
        """The full solution follows when the key comes up."""
        super().keyReleaseEvent(event)
        if (
            self._focused
            and event.key() in (Qt.Key.Key_Left, Qt.Key.Key_Right)
            and not event.isAutoRepeat()
        ):
            self.let_go.emit(self._focused)

    def _shows(self, handle: Handle) -> bool:
        return handle.group in self.groups and (not self.only or handle.name.startswith(self.only))

    def _in_order(self) -> list[str]:
        return sorted(self.lines, key=lambda name: self.lines[name].handle.phase)

    def _add_line(self, handle: Handle) -> None:
        high = 0.0 if handle.group in BARS else 1.0 - LABEL_HEIGHT
        high = 1.0 - high if self._inverted else high
        line = MarkerLine(handle, span=self._span(handle.group), high=high, quiet=not self.only)
        line.pulled.connect(self._pulled)
        line.let_go.connect(self._let_go)
        line.pointed_at.connect(self._pointed_at)
        line.chosen.connect(self._chosen)
        self.lines[handle.name] = line
        self.addItem(line, ignoreBounds=True)

    def _pulled(self, name: str, phase: float, one_side: bool) -> None:
        self.pulled.emit(name, phase, one_side, self._gesture)
        self._pointed_at(name, True)

    def _let_go(self, name: str) -> None:
        self.let_go.emit(name)
        self._gesture += 1

    def _pointed_at(self, name: str, inside: bool) -> None:
        if name in self.lines:
            handle = self.lines[name].handle
            words = f"{handle.words}, phase {phase_text(handle.phase)}: {handle.effect}"
            self.told.emit(words if inside else "")

    def _chosen(self, name: str, typing: bool) -> None:
        self.setFocus()
        self.focus_marker(name)
        if typing and name in self.lines and self._editor is None:
            self._ask_value(self.lines[name])

    def _span(self, group: str) -> tuple[float, float]:
        low, high = BANDS.get(group, (0.0, 1.0))
        return (1.0 - high, 1.0 - low) if self._inverted else (low, high)

    def _show_bands(self, found: list[Handle]) -> None:
        edges: dict[str, list[float]] = {}
        groups: dict[str, str] = {}
        for handle in found:
            if handle.group in BANDS:
                stem = handle.name.rpartition(".")[0]
                edges.setdefault(stem, []).append(handle.phase)
                groups[stem] = handle.group
        for stem in [stem for stem in self._bands if stem not in edges]:
            self.removeItem(self._bands.pop(stem))
        for stem, ends in edges.items():
            if stem not in self._bands:
                band = pg.LinearRegionItem(
                    values=ends,
                    movable=False,
                    span=self._span(groups[stem]),
                    pen=pg.mkPen(None),
                    brush=_band_brush(stem),
                )
                band.setZValue(-5)
                self._bands[stem] = band
                self.addItem(band, ignoreBounds=True)
            self._bands[stem].setRegion(ends)

    def _ask_value(self, line: MarkerLine) -> None:
        editor = QLineEdit(f"{line.handle.phase:.6f}", self)
        named(editor, f"Phase of {line.handle.words}", EDITING)
        editor.setFixedWidth(EDITOR)
        place = self.place_of(line.handle.phase, self.visible().center().y()).toPoint()
        beside = place.x() + 6 if place.x() + 6 + EDITOR < self.width() else place.x() - 6 - EDITOR
        editor.move(QPoint(beside, place.y()))
        editor.selectAll()
        self._editor = editor
        editor.returnPressed.connect(self._take_value)
        editor.installEventFilter(self)
        editor.show()
        editor.setFocus()

    def eventFilter(self, watched: object, event: QEvent) -> bool:
        """Escape or leaving closes the little editor without a change."""
        if watched is self._editor and self._editor is not None:
            escape = (
                event.type() == QEvent.Type.KeyPress
                and isinstance(event, QKeyEvent)
                and event.key() == Qt.Key.Key_Escape
            )
            if escape or event.type() == QEvent.Type.FocusOut:
                self._close_editor()
                return escape
        return False

    def _take_value(self) -> None:
        if self._editor is None:
            return
        name = self._focused
        try:
            value = read_number(self._editor.text())
        except ValueError as problem:
            self.told.emit(str(problem))
            return
        self._close_editor()
        self.pulled.emit(name, value, False, self._gesture)
        self.let_go.emit(name)

    def _close_editor(self) -> None:
        editor, self._editor = self._editor, None
        if editor is not None:
            editor.removeEventFilter(self)
            editor.hide()
            editor.deleteLater()
            self.setFocus()


def _step(modifiers: Qt.KeyboardModifier) -> float:
    if modifiers & Qt.KeyboardModifier.ShiftModifier:
        return STEP * COARSE
    return STEP * (FINE if modifiers & Qt.KeyboardModifier.AltModifier else 1.0)


def _band_brush(stem: str) -> pg.QtGui.QBrush:
    now = theme.colours()
    if stem.startswith("excluded"):
        return pg.mkBrush(theme.colour(now.badly, 0.13))
    if stem.startswith("level"):
        return pg.mkBrush(theme.colour(now.well, 0.30))
    return pg.mkBrush(theme.colour(now.contact, 0.22))
