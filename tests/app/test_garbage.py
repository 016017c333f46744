"""Garbage is collected by the window's event loop, and by nothing else."""

from __future__ import annotations

import gc
import threading
import weakref

from PySide6.QtCore import QCoreApplication, QObject
from pytestqt.qtbot import QtBot

from shadowscale_app.garbage import EVERY_MS, Collector


class Ring:
    """Something that only a collection can find to be of no use."""

    def __init__(self) -> None:
        self.me = self


def test_garbage_goes_at_an_event_and_not_before(qtbot: QtBot) -> None:
    gc.enable()
    owner = QObject()
    Collector(owner)
    assert not gc.isenabled()
    ring = weakref.ref(Ring())
    made = [[] for _ in range(10 * gc.get_threshold()[0])]
    worker = threading.Thread(target=lambda: made.extend([[] for _ in range(20_000)]))
    worker.start()
    worker.join()
    assert ring() is not None

    qtbot.waitUntil(lambda: ring() is None, timeout=20 * EVERY_MS)
    assert len(made) > 20_000
    owner.deleteLater()
    QCoreApplication.processEvents()
