"""Garbage is collected between events, and in the thread of the window alone.

By itself Python collects whenever enough objects were made: also within a call of Qt that holds a
lock, or in the thread of a solver. A dialog that is thrown away there stops the program for ever
(seen with PySide6 6.11.3 on Python 3.11: a destructor waits for the lock of the `disconnect` it is in).
"""

from __future__ import annotations

import gc

from PySide6.QtCore import QObject, QTimer

EVERY_MS = 1000


class Collector(QObject):
    """Collects in place of Python, as often as Python would have done at the next event."""

    def __init__(self, parent: QObject) -> None:
        super().__init__(parent)
        gc.disable()
        timer = QTimer(self)
        timer.timeout.connect(collect)
        timer.start(EVERY_MS)


def collect() -> None:
    """Collect the oldest generation that is due, and so the younger ones."""
    counts, limits = gc.get_count(), gc.get_threshold()
    for generation in (2, 1, 0):
        if counts[generation] > limits[generation]:
            gc.collect(generation)
            return
