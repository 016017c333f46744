"""After the window shows: load and compile what computing needs, with a word in the status line."""

from __future__ import annotations

import importlib
import threading

from PySide6.QtCore import QObject, Signal

MODULES = (
    "shadowscale.view.density",
    "shadowscale.fit",
    "shadowscale.jobs.solve",
    "shadowscale.data",
)


class Warmer(QObject):
    """Loads modules in a thread. Signal `told(words)`."""

    told = Signal(str)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._thread: threading.Thread | None = None
        self._closed = False

    def start(self) -> None:
        """Begin."""
        self.told.emit("Making ready to compute\N{HORIZONTAL ELLIPSIS}")
        self._thread = threading.Thread(target=self._run, name="warmer", daemon=True)
        self._thread.start()

    def close(self) -> None:
        """Wait for the module that is being loaded, load no more."""
        self._closed = True
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def _run(self) -> None:
        for name in MODULES:
            if self._closed:
                return
            importlib.import_module(name)
        if not self._closed:
            self.told.emit("Ready.")
