"""The program as it is, in a real window, which tells an outside hand where its things are.

`python tests/support/watched_window.py FILE [OPENED...]` writes a JSON object into FILE several times a second.
"""

from __future__ import annotations

import json
import os
import sys
from pathlib import Path
from typing import Any

from PySide6.QtCore import QPoint, QTimer
from PySide6.QtWidgets import QApplication, QMessageBox, QPushButton, QWidget

from shadowscale.view.follow import FOLLOWED
from shadowscale_app import program
from shadowscale_app.warm import READY

EVERY_MS = 150


class Watched(program.Bench):
    """The window with a timer that tells."""

    def __init__(self) -> None:
        super().__init__()
        self._timer = QTimer(self)
        self._timer.timeout.connect(self._tell)
        self._timer.start(EVERY_MS)

    def end(self) -> None:
        """End the timer, too."""
        self._timer.stop()
        super().end()

    def _tell(self) -> None:
        path = Path(sys.argv[1])
        path.with_suffix(".part").write_text(json.dumps(self._seen()), encoding="utf-8")
        os.replace(path.with_suffix(".part"), path)

    def _seen(self) -> dict[str, Any]:
        session = self.desk.session
        solution, contact = session.solution, session.contact
        active = QApplication.activeModalWidget()
        return {
            "ready": bool(READY),
            "busy": self.work.running or self.files.errands.running or bool(self.status.live.text()),
            "samples": {b.accessibleName(): _middle(b) for b in self.start.findChildren(QPushButton)},
            "markers": self._markers(),
            "solved": solution is not None,
            "followed": solution is not None and FOLLOWED in solution.notes,
            "radius_sum": None if contact is None else contact.values.get("radius_sum"),
            "first_contact": None if session.markers is None else session.markers.primary[0],
            "words": self.panes["Eclipses"].geometry_words.text(),  # type: ignore[attr-defined]
            "status": self.status.words.text(),
            "unsaved": self.isWindowModified(),
            "asked": active.text() if isinstance(active, QMessageBox) else "",
            "explained": active.informativeText() if isinstance(active, QMessageBox) else "",
            "dialog": "" if active is None else active.windowTitle(),
            "clipboard": QApplication.clipboard().text(),
            "name": session.name,
            "rows": [0 if part is None else len(part.time) for part in (session.photometry, session.velocities)],
            "answers": {}
            if active is None
            else {b.text().replace("&", ""): _middle(b) for b in active.findChildren(QPushButton)},
        }  # fmt: skip

    def _markers(self) -> dict[str, list[int]]:
        picture = self.panes["Eclipses"].pairs["primary"].curve  # type: ignore[attr-defined]
        if not picture.isVisible():
            return {}
        view = picture.visible()
        height = view.top() + 0.35 * view.height()
        places = {n: picture.place_of(line.value(), height) for n, line in picture.lines.items()}
        port = picture.viewport()
        return {name: _on_screen(port, place.toPoint()) for name, place in places.items()}


def _middle(widget: QWidget) -> list[int]:
    return _on_screen(widget, widget.rect().center())


def _on_screen(widget: QWidget, place: QPoint) -> list[int]:
    found = widget.mapToGlobal(place)
    return [found.x(), found.y()]


if __name__ == "__main__":
    program.Bench = Watched  # type: ignore[misc]
    sys.exit(program.run(sys.argv[2:]))
