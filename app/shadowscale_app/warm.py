"""After the window shows: load and compile what computing needs, with a word in the status line.

Until that is done the panes show what needs no model, so that nothing compiles on the window's thread.
"""

from __future__ import annotations

import threading

from PySide6.QtCore import QObject, Signal

from shadowscale_app import trouble


class Readiness:
    """Whether models can be computed without a wait."""

    def __init__(self) -> None:
        self._ready = threading.Event()

    def __bool__(self) -> bool:
        return self._ready.is_set()

    def reach(self) -> None:
        """From now on they can."""
        self._ready.set()


READY = Readiness()


class Warmer(QObject):
    """Loads and compiles in a thread. Signals `told(words)`, `ready()`."""

    told = Signal(str)
    ready = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._thread: threading.Thread | None = None

    def start(self) -> None:
        """Begin."""
        self.told.emit("Making ready to compute\N{HORIZONTAL ELLIPSIS}")
        self._thread = threading.Thread(target=self._run, name="warmer", daemon=True)
        self._thread.start()

    def close(self) -> None:
        """Wait until it is done: a compiler cannot be interrupted."""
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def _run(self) -> None:
        from shadowscale.view.warming import warm

        try:
            warm()
        except Exception as error:
            trouble.tell("making ready to compute", error)
        READY.reach()
        self.told.emit("Ready.")
        self.ready.emit()
