"""The only thing that changes: the present session and the steps that led to it."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields, replace
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from shadowscale.session.history import History
from shadowscale.session.session import Session

ALL = frozenset(field.name for field in fields(Session))
NOT_WORK = frozenset({"view"})  # what may differ without anything being unsaved


@dataclass(frozen=True, eq=False)
class Change:
    """What a pane wants: a new session, the step's name, and whether it goes on with a gesture.

    Steps with the same non-empty `merge` in a row are one step.
    """

    label: str
    session: Session
    merge: str = ""


class Desk(QObject):
    """Holds the session. Signal `changed(session, names)`: which of its fields are new.

    `complete(before, after)` adds to each step what follows from it at once.
    """

    changed = Signal(object, object)

    def __init__(self, session: Session | None = None, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.path: Path | None = None
        self.complete: Callable[[Session, Session], Session] = lambda _before, after: after
        self.travelling = False
        self._telling = False
        self._history = History(session or Session())
        self._saved = self._history.session
        self._shown = self._history.session

    @property
    def session(self) -> Session:
        """The present session."""
        return self._history.session

    @property
    def history(self) -> History:
        """The steps, for those who list them."""
        return self._history

    @property
    def unsaved(self) -> bool:
        """Whether there is work that no file holds."""
        return bool(changed_names(self._saved, self.session) - NOT_WORK)

    def begin(self, session: Session, path: Path | None = None, *, saved: bool = True) -> None:
        """Put another session on the desk, with a history of its own."""
        self._history = History(session)
        self._saved = session if saved else Session()
        self.path = path
        self._shown = session
        self.changed.emit(session, ALL)

    def apply(self, change: Change) -> None:
        """Do a step that can be undone."""
        if change.session is self.session:
            return
        session = self.complete(self.session, change.session)
        self._history.push(change.label, session, merge=change.merge or None)
        self._tell()

    def settle(self, session: Session) -> None:
        """Take results that belong to the present step."""
        if session is not self.session:
            self._history.amend(session)
        self._tell()

    def look(self, view: Mapping[str, object]) -> None:
        """Remember how things are shown; not a step."""
        self.settle(replace(self.session, view={**self.session.view, **view}))

    def close_gesture(self) -> None:
        """The next change is a step of its own."""
        self._history.close()

    def undo(self) -> None:
        """One step back."""
        self._travel(self._history.undo)

    def redo(self) -> None:
        """One step forward."""
        self._travel(self._history.redo)

    def mark_saved(self, path: Path, session: Session | None = None) -> None:
        """A session (the present one) is in that file."""
        self.path, self._saved = path, session or self.session
        self.changed.emit(self.session, frozenset())

    def _travel(self, go: Callable[[], Session]) -> None:
        go()
        self.travelling = True
        try:
            self._tell()
        finally:
            self.travelling = False

    def _tell(self) -> None:
        if self._telling:
            return  # whoever tells now goes on until all is told
        self._telling = True
        try:
            while self._shown is not self.session:
                names = changed_names(self._shown, self.session)
                self._shown = self.session
                self.changed.emit(self.session, names)
        finally:
            self._telling = False


def changed_names(before: Session, after: Session) -> frozenset[str]:
    """The fields that are not the very same object."""
    return frozenset(name for name in ALL if getattr(before, name) is not getattr(after, name))
