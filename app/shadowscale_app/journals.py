"""The journal that follows the work by a few seconds, and what a crash left behind."""

from __future__ import annotations

import time
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QDateTime, QObject, QStandardPaths, QTimer
from PySide6.QtWidgets import QMessageBox, QWidget

from shadowscale.session.session import Session
from shadowscale_app.desk import Desk
from shadowscale_app.errands import Errands

if TYPE_CHECKING:
    from shadowscale.session.journal import Journal, Recoverable

EVERY_MS, SHARE = (
    3000,
    10,
)  # between two writings: so long, and so many times what the last one took


class Journals(QObject):
    """Writes the journal of one window, beside it, and offers those of windows that are gone."""

    def __init__(
        self, desk: Desk, errands: Errands, window: QWidget, *, immediate: bool = False
    ) -> None:
        super().__init__(window)
        self._desk, self._errands, self._window = desk, errands, window
        self._journal: Journal | None = None
        self._timer = QTimer(self)
        self._timer.setInterval(EVERY_MS)
        self._timer.timeout.connect(self.write)
        if not immediate:
            self._timer.start()

    def write(self) -> None:
        """Write the session beside, so that a crash costs little."""
        if self._desk.unsaved and not self._errands.running:
            self._write()

    def _write(self) -> None:
        from shadowscale.session.journal import Journal

        if self._journal is None:
            self._journal = Journal(journal_folder())
        journal, session, path = self._journal, self._desk.session, str(self._desk.path or "")

        def write() -> float:
            began = time.monotonic()
            journal.write(session, path=path)
            return time.monotonic() - began

        self._errands.run("writing the journal", write, self._pace, quiet=True)

    def _pace(self, seconds: float) -> None:
        """Large sessions are written less often."""
        self._timer.setInterval(max(EVERY_MS, round(1000 * SHARE * seconds)))

    def end(self) -> None:
        """Stop the journal: the work was saved or given up on purpose."""
        self._timer.stop()
        if self._journal is not None:
            self._journal.close()

    def offer_recovery(self) -> None:
        """Look for what a crash left behind, and offer it."""

        def look() -> tuple[Recoverable, ...]:
            from shadowscale.session.journal import recoverable

            return recoverable(journal_folder())

        self._errands.run("looking for lost work", look, self._offer, quiet=True)

    def _offer(self, found: tuple[Recoverable, ...]) -> None:
        from shadowscale.session.journal import discard

        buttons = QMessageBox.StandardButton
        for item in found:
            moment = QDateTime.fromSecsSinceEpoch(int(item.saved_at))
            when = moment.toString("yyyy-MM-dd HH:mm")
            answer = QMessageBox.question(
                self._window,
                "Recover work?",
                f"The program ended unexpectedly while {item.name} had unsaved changes.\n"
                f"Open the work as it was at {when}, discard it, or decide later?",
                buttons.Open | buttons.Discard | buttons.Cancel,
                buttons.Open,
            )
            if answer == buttons.Open:
                self._recover(item)
                return
            if answer == buttons.Discard:
                discard(item)

    def _recover(self, item: Recoverable) -> None:
        from shadowscale.session.journal import discard, recover

        def take(session: Session) -> None:
            self._desk.begin(session, Path(item.path) if item.path else None, saved=False)
            self._write()
            self._errands.run(  # once it is written anew
                "tidying up", lambda: discard(item), quiet=True
            )

        self._errands.read(f"recovering {item.name}", lambda: recover(item), take)


def journal_folder() -> Path:
    """Where journals are written."""
    place = QStandardPaths.StandardLocation.AppLocalDataLocation
    return Path(QStandardPaths.writableLocation(place)) / "journal"
