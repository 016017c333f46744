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
    """Work for the thread, and what the window does with its result.

    A `quiet` one is not shown; one that only `reads` can be given up.
    """

    doing: str
    work: Callable[[], Any]
    then: Callable[[Any], object]
    quiet: bool
    reads: bool


class Errands(QObject):
    """One thread at a time. Signals: `busy(words, reads)`: what is being done, whether it can be given up;
    empty: nothing more. `given_up(words)`.

    What goes wrong is told. With `immediate` everything happens at once, for tests.
    """

    busy = Signal(str, bool)
    given_up = Signal(str)
    _arrived = Signal(object, object)

    def __init__(self, parent: QObject | None = None, *, immediate: bool = False) -> None:
        super().__init__(parent)
        self.immediate = immediate
        self._waiting: deque[Errand] = deque()
        self._running: tuple[Errand, threading.Thread] | None = None
        self._left: list[threading.Thread] = []
        self._arrived.connect(self._take)

    @property
    def running(self) -> bool:
        """Whether anything is being done or waits."""
        return self._running is not None or bool(self._waiting)

    @property
    def left_behind(self) -> bool:
        """Whether a reading that was given up has not come to its end: nothing can interrupt it."""
        self._left = [thread for thread in self._left if thread.is_alive()]
        return bool(self._left)

    def run(
        self,
        doing: str,
        work: Callable[[], Any],
        then: Callable[[Any], object] = lambda _: None,
        *,
        quiet: bool = False,
    ) -> None:
        """Have something done; `then` gets the result, on the window's thread."""
        self._ask(Errand(doing, work, then, quiet, reads=False))

    def read(self, doing: str, work: Callable[[], Any], then: Callable[[Any], object]) -> None:
        """Have something read that changes nothing, so that it can be given up."""
        self._ask(Errand(doing, work, then, quiet=False, reads=True))

    def give_up(self) -> None:
        """What is being read is no longer wanted; its thread ends by itself, and nobody hears of it."""
        if self._running is None or not self._running[0].reads:
            return
        (errand, thread), self._running = self._running, None
        self._left.append(thread)
        self.busy.emit("", False)
        self.given_up.emit(errand.doing)
        self._start()

    def wait_until_idle(self, seconds: float = LONGEST_WAIT) -> bool:
        """Let all be done, the user kept from anything else; whether it was."""
        until = time.monotonic() + seconds
        while self.running and time.monotonic() < until:
            QCoreApplication.processEvents(QEventLoop.ProcessEventsFlag.ExcludeUserInputEvents, 20)
            time.sleep(0.002)
        return not self.running

    def close(self) -> None:
        """Let what is being written come to its end; called before the application goes."""
        self._waiting.clear()
        self.give_up()
        if self._running is not None:
            self._running[1].join()
            self._running = None

    def _ask(self, errand: Errand) -> None:
        if self.immediate:
            with trouble.guard(errand.doing):
                errand.then(errand.work())
            return
        self._waiting.append(errand)
        self._start()

    def _start(self) -> None:
        if self._running is not None or not self._waiting:
            return
        errand = self._waiting.popleft()
        thread = threading.Thread(target=self._run, args=(errand,), name="errands", daemon=True)
        self._running = errand, thread
        if not errand.quiet:
            self.busy.emit(errand.doing, errand.reads)
        thread.start()

    def _run(self, errand: Errand) -> None:
        try:
            result: object = errand.work()
        except Exception as error:  # carried to the window, which shows it
            result = Failure(error)
        try:
            self._arrived.emit(errand, result)
        except RuntimeError:
            return  # the window went while something that was given up was still read

    def _take(self, errand: Errand, result: object) -> None:
        if self._running is None or self._running[0] is not errand:
            return  # given up, or closed
        self._running[1].join()
        self._running = None
        if not errand.quiet:
            self.busy.emit("", False)
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
