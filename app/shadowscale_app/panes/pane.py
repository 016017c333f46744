"""What every pane is: it shows a session and says what is wanted."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QWidget

from shadowscale.session.session import Session


class Pane(QWidget):
    """A pane.

    Signals: `wanted(Change)` a step; `let_go()` the end of a gesture; `looked(mapping)` how things are
    shown; `told(words)` for the status line; `pointed(phase)` the phase under the cursor;
    `asked(name, argument)` an action of the bench. A `patient` pane draws only while it is seen, and
    catches up when it comes to the front: a drag must not wait for it.
    """

    wanted = Signal(object)
    let_go = Signal()
    looked = Signal(object)
    told = Signal(str)
    pointed = Signal(float)
    asked = Signal(str, object)

    patient = False
    title = ""
    about = ""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.session = Session()
        self._missed: frozenset[str] = frozenset()
        self.setAccessibleName(self.title)
        self.setAccessibleDescription(self.about)

    def display(self, session: Session, names: frozenset[str]) -> None:
        """Show a session; `names` are the fields that are new."""
        self.session = session
        if self.patient and not self.isVisible():
            self._missed |= names
        else:
            self._catch_up(names)

    def showEvent(self, event: QShowEvent) -> None:
        """Draw what was missed."""
        super().showEvent(event)
        if self._missed:
            self._catch_up(frozenset())

    def _catch_up(self, names: frozenset[str]) -> None:
        names, self._missed = names | self._missed, frozenset()
        self.refresh(names)

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed."""

    def point(self, phase: float) -> None:
        """Show the phase under the cursor, wherever that is."""
