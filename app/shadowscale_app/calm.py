"""Controls that the wheel does not change by accident while it scrolls past them."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtWidgets import QWidget


class Calm(QObject):
    """Passes the wheel on to what scrolls, unless the control has the keyboard."""

    def keep(self, widget: QWidget) -> None:
        """Keep a control calm."""
        widget.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        widget.installEventFilter(self)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Leave the wheel to the parent of a control that is not in use."""
        if event.type() != QEvent.Type.Wheel or not isinstance(watched, QWidget):
            return False
        if watched.hasFocus():
            return False
        event.ignore()
        return True
