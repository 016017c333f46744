"""Start the program with no arguments and end it as soon as its window has painted."""

import os

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

from PySide6.QtCore import QEvent, QObject, QTimer
from PySide6.QtWidgets import QApplication, QMainWindow


class Watch(QObject):
    """Ends the process after the main window's first paint; a compiler in a thread is not waited for."""

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Look at an event on its way."""
        if event.type() == QEvent.Type.Paint and isinstance(watched, QMainWindow):
            QTimer.singleShot(0, lambda: os._exit(0))
        return False


application = QApplication(["shadowscale"])
watch = Watch()
application.installEventFilter(watch)

from shadowscale_app.__main__ import main  # noqa: E402 - as late as a start does

main([])
