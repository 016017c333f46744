"""After the window shows: load and compile what computing needs, with a word in the status line.

Until that is done the panes show what needs no model, so that nothing compiles on the window's thread.
"""

from __future__ import annotations

import threading

from PySide6.QtCore import QObject, Signal

from shadowscale.errors import Stopped
from shadowscale_app import trouble

PATIENCE = 0.5  # [s] for a step that only loads


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
    """Loads and compiles in a thread: what pictures need, then what a solution needs.

    Signals `told(words)`, `ready()` once pictures can be drawn.
    """

    told = Signal(str)
    ready = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._thread: threading.Thread | None = None
        self._closing = threading.Event()

    def start(self) -> None:
        """Begin."""
        self.told.emit("Making ready to compute\N{HORIZONTAL ELLIPSIS}")
        self._thread = threading.Thread(target=self._run, name="warmer", daemon=True)
        self._thread.start()

    @property
    def busy(self) -> bool:
        """Whether the thread still works."""
        return self._thread is not None and self._thread.is_alive()

    def close(self) -> None:
        """Ask it to end at the next step; what is compiled just now is not waited for."""
        self._closing.set()
        if self._thread is not None:
            self._thread.join(PATIENCE)

    def report(self, fraction: float, words: str) -> None:
        """Between two steps: whether to go on."""
        if self._closing.is_set():
            raise Stopped

    def _run(self) -> None:
        from shadowscale.view.warming import warm, warm_solver

        try:
            warm(self)
            READY.reach()
            self.ready.emit()
            self.told.emit("Ready to draw; making ready to solve\N{HORIZONTAL ELLIPSIS}")
            warm_solver(self)
        except Stopped:
            return
        except Exception as error:
            trouble.tell("making ready to compute", error)
            READY.reach()
            self.ready.emit()
        self.told.emit("Ready.")
