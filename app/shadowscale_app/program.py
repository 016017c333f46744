"""The program with its window, from start to exit status."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication

from shadowscale_app import theme, trouble
from shadowscale_app.bench import Bench
from shadowscale_app.files import ORGANISATION, PROGRAM, settings
from shadowscale_app.garbage import Collector


def run(paths: Sequence[str]) -> int:
    """Open the window; the process's exit status."""
    application = QApplication.instance() or QApplication(sys.argv[:1])
    assert isinstance(application, QApplication)
    application.setApplicationName(PROGRAM)
    application.setOrganizationName(ORGANISATION)
    application.setProperty(theme.CHOICE, settings().value(theme.CHOICE, theme.FOLLOW))
    trouble.catch_everything()
    Collector(application)
    bench = Bench()
    theme.dress(application)  # now: widgets put into others that are dressed are dressed each time
    bench.show()
    QTimer.singleShot(0, bench, bench.warmer.start)
    QTimer.singleShot(0, bench, bench.journals.offer_recovery)
    if paths:
        QTimer.singleShot(0, bench, lambda: bench.open_paths(paths))
    status = application.exec()
    if bench.warmer.busy or bench.files.errands.left_behind:
        # a compiler and a reader cannot be interrupted, and all that matters is saved
        os._exit(status)
    return status
