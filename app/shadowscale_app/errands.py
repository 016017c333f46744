"""Reading and writing of files beside the window, one after another, so that no frame waits for a disk."""

from __future__ import annotations

import threading
import time
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from PySide6.QtCore import QCoreApplication, QEventLoop, QObject, Signal

from shadowscale_app import trouble

LONGEST_WAIT = 600.0  # s, for a file that must be written before the window closes


@dataclass(frozen=True, eq=False)
class Errand:
    """Work for the thread, and what the window does with its result; a `quiet` one is not shown."""

    doing: str
    work: Callable[[], Any]
    then: Callable[[Any], object]
    quiet: bool


class Errands(QObject):
    """One thread at a time. Signal `busy(words)`: what is being done; empty: nothing more.

    What goes wrong is told. With `immediate` everything happens at once, for tests.
    """

    busy = Signal(str)
    _arrived = Signal(object, object)

    def __init__(self, parent: QObject | None = None, *, immediate: bool = False) -> None:
        super().__init__(parent)
        self.immediate = immediate
        self._waiting: deque[Errand] = deque()
        self._thread: threading.Thread | None = None
        self._arrived.connect(self._take)

    @property
    def running(self) -> bool:
        """Whether anything is being done or waits."""
        return self._thread is not None or bool(self._waiting)

    def run(
        self,
        doing: str,
        work: Callable[[], Any],
        then: Callable[[Any], object] = lambda _: None,
        *,
        quiet: bool = False,
    ) -> None:
        """Have something done; `then` gets the result, on the window's thread."""
        errand = Errand(doing, work, then, quiet)
        if self.immediate:
            with trouble.guard(doing):
                then(work())
            return
        self._waiting.append(errand)
        self._start()

    def wait_until_idle(self, seconds: float = LONGEST_WAIT) -> bool:
        """Let all be done, the user kept from anything else; whether it was."""
        until = time.monotonic() + seconds
        while self.running and time.monotonic() < until:
            QCoreApplication.processEvents(QEventLoop.ProcessEventsFlag.ExcludeUserInputEvents, 20)
            time.sleep(0.002)
        return not self.running

    def close(self) -> None:
        """Let what was begun come to its end; called before the application goes."""
        self._waiting.clear()
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def _start(self) -> None:
        if self._thread is not None or not self._waiting:
            return
        errand = self._waiting.popleft()
        self._thread = threading.Thread(
            target=self._run, args=(errand,), name="errands", daemon=True
        )
        if not errand.quiet:
            self.busy.emit(errand.doing)
        self._thread.start()

    def _run(self, errand: Errand) -> None:
        try:
            result: object = errand.work()
        except Exception as error:  # carried to the window, which shows it
            result = Failure(error)
        self._arrived.emit(errand, result)

    def _take(self, errand: Errand, result: object) -> None:
        if self._thread is None:
            return  # closed
        self._thread.join()
        self._thread = None
        if not errand.quiet:
            self.busy.emit("")
        if isinstance(result, Failure):
            trouble.tell(errand.doing, result.error)
        else:
            with trouble.guard(errand.doing):
                errand.then(result)
        self._start()


@dataclass(frozen=True, eq=False)
class Failure:
    """What went wrong in the thread."""

    error: Exception
