"""Work beside the window: a live lane where the newest request wins, and a long lane with progress.

Work is a plain function of a `Progress`; it gets frozen objects and returns one. It never touches a
widget: answers come back over queued signals. `Stopped` is caught here and nowhere else.
"""

from __future__ import annotations

import sys
import threading
import time
from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtCore import QCoreApplication, QEventLoop, QObject, Signal

from shadowscale.errors import Stopped
from shadowscale.progress import Progress

Work = Callable[[Progress], object]
TURN = (
    1e-3  # [s] after which the window and a fit beside it change places; Python's own 5 ms are seen
)


@dataclass(frozen=True, eq=False)
class Answer:
    """What came of a request: a result, or the error that stopped it."""

    number: int
    result: object = None
    error: BaseException | None = None


class LiveLane(QObject):
    """One thread; a newer request takes the place of the one waiting and stops the one running.

    Signals: `answered(Answer)` for the newest request only; `busy(bool)`.
    """

    answered = Signal(object)
    busy = Signal(bool)
    _arrived = Signal(object)

    def __init__(self, parent: QObject | None = None, *, immediate: bool = False) -> None:
        super().__init__(parent)
        self.immediate = immediate
        sys.setswitchinterval(TURN)
        self._newest = 0
        self._answered = 0
        self._waiting: tuple[int, Work] | None = None
        self._closed = False
        self._ready = threading.Condition()
        self._thread: threading.Thread | None = None
        self._arrived.connect(self._take)

    def submit(self, work: Work) -> int:
        """Ask for work; its number."""
        self._newest += 1
        self.busy.emit(True)
        if self.immediate:
            self._take(_answer(self._newest, work, _Newest(self, self._newest)))
            return self._newest
        with self._ready:
            self._waiting = (self._newest, work)
            self._ready.notify()
        if self._thread is None:
            self._thread = threading.Thread(target=self._run, name="live lane", daemon=True)
            self._thread.start()
        return self._newest

    def drop(self) -> None:
        """Whatever is asked for or running is no longer wanted."""
        self._newest += 1
        self._answered = self._newest
        with self._ready:
            self._waiting = None
        self.busy.emit(False)

    def close(self) -> None:
        """End the thread; called before the application goes."""
        self.drop()
        with self._ready:
            self._closed = True
            self._ready.notify()
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def wait_until_idle(self, seconds: float = 60.0) -> bool:
        """Let events pass until the newest request is answered; whether it was."""
        return _wait(lambda: self._answered >= self._newest, seconds)

    def is_newest(self, number: int) -> bool:
        """Whether no newer request was made."""
        return number == self._newest

    def _run(self) -> None:
        while True:
            with self._ready:
                self._ready.wait_for(lambda: self._waiting is not None or self._closed)
                if self._closed:
                    return
                assert self._waiting is not None
                (number, work), self._waiting = self._waiting, None
            answer = _answer(number, work, _Newest(self, number))
            if not self._closed:
                self._arrived.emit(answer)

    def _take(self, answer: Answer) -> None:
        if not self.is_newest(answer.number):
            return  # stale
        self._answered = answer.number
        self.busy.emit(False)
        if not isinstance(answer.error, Stopped):
            self.answered.emit(answer)


class LongLane(QObject):
    """One long job at a time, with progress, time left and stop.

    Signals: `progressed(fraction, words, seconds left or -1)`, `answered(Answer)`, `stopped()`,
    `busy(bool)`.
    """

    progressed = Signal(float, str, float)
    answered = Signal(object)
    stopped = Signal()
    busy = Signal(bool)
    _arrived = Signal(object)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._thread: threading.Thread | None = None
        self._wanted, self._closing = threading.Event(), threading.Event()
        self._abandoned = False
        self._number = 0
        self._arrived.connect(self._take)

    @property
    def running(self) -> bool:
        """Whether a job runs."""
        return self._thread is not None

    def start(self, work: Work) -> bool:
        """Begin a job; False if one runs already."""
        if self.running:
            return False
        self._wanted.clear()
        self._abandoned = False
        self._number += 1
        self._thread = threading.Thread(
            target=self._run, args=(self._number, work), name="long lane", daemon=True
        )
        self.busy.emit(True)
        self._thread.start()
        return True

    def stop(self) -> None:
        """Ask the job to end; it does at its next report, or goes on with what it has until asked again."""
        self._wanted.set()

    def abandon(self) -> None:
        """What runs is for something that is gone: it stops, and nobody hears of it."""
        self._abandoned = self.running

    @property
    def abandoned(self) -> bool:
        """Whether what still runs is no longer wanted."""
        return self._abandoned

    def close(self) -> None:
        """Stop and end the thread; called before the application goes."""
        self._closing.set()
        if self._thread is not None:
            self._thread.join()
            self._thread = None

    def wait_until_idle(self, seconds: float = 120.0) -> bool:
        """Let events pass until no job runs; whether it came to that."""
        return _wait(lambda: not self.running, seconds)

    def _stopping(self) -> bool:
        """Whether the job is to stop now: once each time it was asked, always if nobody waits for it."""
        asked = self._wanted.is_set()
        self._wanted.clear()
        return asked or self._abandoned or self._closing.is_set()

    def _run(self, number: int, work: Work) -> None:
        self._arrived.emit(_answer(number, work, _Reporting(self, self._stopping)))

    def _take(self, answer: Answer) -> None:
        if self._thread is not None:
            self._thread.join()
            self._thread = None
        abandoned, self._abandoned = self._abandoned, False
        self.busy.emit(False)
        if abandoned:
            return
        if isinstance(answer.error, Stopped):
            self.stopped.emit()
        else:
            self.answered.emit(answer)


class _Newest:
    """Stops work that a newer request has overtaken."""

    def __init__(self, lane: LiveLane, number: int) -> None:
        self._lane, self._number = lane, number

    def report(self, fraction: float, words: str) -> None:
        if not self._lane.is_newest(self._number):
            raise Stopped


class _Reporting:
    """Passes progress on with the time left: at most ten times a second, but always where it says something new."""

    def __init__(self, lane: LongLane, stopping: Callable[[], bool]) -> None:
        self._lane, self._stopping = lane, stopping
        self._began = time.monotonic()
        self._told, self._words = 0.0, ""

    def report(self, fraction: float, words: str) -> None:
        if self._stopping():
            raise Stopped
        now = time.monotonic()
        if now - self._told < 0.1 and fraction < 1.0 and words == self._words:
            return
        self._told, self._words = now, words
        spent = now - self._began
        left = spent * (1 - fraction) / fraction if fraction > 0.02 and spent > 0.5 else -1.0
        self._lane.progressed.emit(fraction, words, left)


def _answer(number: int, work: Work, progress: Progress) -> Answer:
    try:
        return Answer(number, work(progress))
    except Exception as error:  # carried to the window, which shows it
        return Answer(number, error=error)


def _wait(done: Callable[[], bool], seconds: float) -> bool:
    until = time.monotonic() + seconds
    while not done():
        if time.monotonic() > until:
            return False
        QCoreApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        time.sleep(0.002)
    return True
