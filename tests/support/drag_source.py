"""A file manager of one window: what is dragged from it are the files named as arguments.

`python tests/support/drag_source.py X Y FILE...` stands at X, Y; press the button in it and pull.
"""

from __future__ import annotations

import sys
from pathlib import Path

from PySide6.QtCore import QMimeData, Qt, QUrl
from PySide6.QtGui import QDrag, QMouseEvent
from PySide6.QtWidgets import QApplication, QLabel

SIZE = 60


class Source(QLabel):
    """Begins to drag as soon as it is pressed."""

    def __init__(self, paths: list[str]) -> None:
        super().__init__("files")
        self._urls = [QUrl.fromLocalFile(str(Path(path).absolute())) for path in paths]
        self.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.setFixedSize(SIZE, SIZE)
        self.setWindowFlags(Qt.WindowType.FramelessWindowHint | Qt.WindowType.WindowStaysOnTopHint)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Begin to drag."""
        data = QMimeData()
        data.setUrls(self._urls)
        drag = QDrag(self)
        drag.setMimeData(data)
        drag.exec(Qt.DropAction.CopyAction)


def main(arguments: list[str]) -> int:
    """Show the window."""
    application = QApplication(["files"])
    source = Source(arguments[2:])
    source.move(int(arguments[0]), int(arguments[1]))
    source.show()
    print("ready", flush=True)
    return application.exec()


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
