"""Opening, saving, exporting; recent files; the journal and its recovery."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QSettings, QStandardPaths, Qt, QTimer
from PySide6.QtWidgets import QApplication, QFileDialog, QMessageBox, QWidget

from shadowscale.session.session import Session, Source
from shadowscale_app import trouble
from shadowscale_app.desk import Change, Desk
from shadowscale_app.dialogs.reading import Reading, ask_reading

if TYPE_CHECKING:
    from shadowscale.session.journal import Journal
    from shadowscale_app.dialogs.exporting import Target

ORGANISATION, PROGRAM = "Shadowscale", "Shadowscale"
RECENT, MOST_RECENT = "recent", 10
JOURNAL_MS = 8000
SESSION_SUFFIX = ".json"
TABLES = "Tables and sessions (*.csv *.txt *.dat *.tsv *.ecsv *.fits *.fit *.xml *.vot *.json *.gz);;All files (*)"


class Files(QObject):
    """What the bench does with files."""

    def __init__(
        self, desk: Desk, window: QWidget, *, ask: Callable[..., Reading | None] = ask_reading
    ) -> None:
        super().__init__(window)
        self._desk, self._window, self._ask = desk, window, ask
        self._journal: Journal | None = None
        self._timer = QTimer(self)
        self._timer.setInterval(JOURNAL_MS)
        self._timer.timeout.connect(self.write_journal)
        self._timer.start()

    def ask_open(self) -> None:
        """Ask which files, and open them."""
        paths, _ = QFileDialog.getOpenFileNames(self._window, "Open", self._folder(), TABLES)
        if paths:
            self.open_paths([Path(path) for path in paths])

    def ask_velocities(self) -> None:
        """Ask for a table of velocities."""
        path, _ = QFileDialog.getOpenFileName(
            self._window, "Add velocities", self._folder(), TABLES
        )
        if path:
            self.add_velocities(Path(path))

    def open_paths(self, paths: Sequence[Path]) -> None:
        """Open a session, or tables: velocities are told from photometry by their columns."""
        from shadowscale.data import sniff_kind

        for path in paths:
            if path.suffix == SESSION_SUFFIX:
                self.open_session(path)
            elif sniff_kind(path) == "velocities":
                self.add_velocities(path)
            else:
                self.open_photometry([path])
            self._remember(path)

    def open_session(self, path: Path) -> None:
        """Open a session file."""
        from shadowscale.session.store import open_session

        if self.may_leave():
            with waiting():
                session = open_session(path)
                self._desk.begin(session, path)
            self._remember(path)

    def open_photometry(self, paths: Sequence[Path]) -> None:
        """Look into a table, ask how to read it, begin a session with it or add it to the present one."""
        from shadowscale.data import read_photometry

        path = paths[0]
        reading = self._ask(
            self._window, path, "photometry", may_add=self._desk.session.photometry is not None
        )
        if reading is None:
            return
        session = self._desk.session
        adds = session.photometry is not None and reading.adds
        if not adds and not self.may_leave():
            return
        base = session if adds else Session(name=path.stem)
        added = Source(str(path.absolute()), reading.columns, band=reading.band or "")
        sources = (*base.photometry_sources, added)
        with waiting():
            photometry = read_photometry(
                [source.path for source in sources],
                columns=[source.columns for source in sources],
                band=[source.band or None for source in sources],
            )
        sources = _with_checksums(sources, photometry.files)
        fresh = replace(
            base,
            photometry_sources=sources,
            photometry=photometry,
            system=None,
            solution=None,
            audit=(),
        )
        if adds:
            self._desk.apply(Change(f"Add {path.name}", fresh))
        else:
            self._desk.begin(fresh, saved=False)

    def add_velocities(self, path: Path) -> None:
        """Look into a table of velocities, ask, and add it."""
        from shadowscale.data import read_velocities

        reading = self._ask(self._window, path, "velocities")
        if reading is None:
            return
        session = self._desk.session
        sources = (*session.velocity_sources, Source(str(path.absolute()), reading.columns))
        velocities = read_velocities(
            [source.path for source in sources], columns=[source.columns for source in sources]
        )
        sources = _with_checksums(sources, velocities.files)
        self._desk.apply(
            Change(
                f"Add {path.name}",
                replace(session, velocity_sources=sources, velocities=velocities),
            )
        )

    def save(self) -> bool:
        """Save where it was saved before, else ask; whether it was."""
        return self.save_as() if self._desk.path is None else self.save_to(self._desk.path)

    def save_as(self) -> bool:
        """Ask where, and save."""
        start = str(Path(self._folder()) / f"{self._desk.session.name}{SESSION_SUFFIX}")
        path, _ = QFileDialog.getSaveFileName(
            self._window, "Save session", start, "Session (*.json)"
        )
        return bool(path) and self.save_to(Path(path))

    def save_to(self, path: Path) -> bool:
        """Save the session in a file."""
        from shadowscale.session.store import save_session

        with trouble.guard(f"saving {path.name}"):
            save_session(self._desk.session, path)
            self._desk.mark_saved(path)
            self._remember(path)
            return True
        return False

    def ask_export(self) -> Target | None:
        """Ask where the sheet and all the rest are to be written."""
        from shadowscale_app.dialogs.exporting import ask_target

        return ask_target(self._window, self._desk.session, self._folder())

    def close_session(self) -> None:
        """Back to the start page."""
        if self.may_leave():
            self._desk.begin(Session())

    def may_leave(self) -> bool:
        """Ask about unsaved work; whether to go on."""
        if not self._desk.unsaved:
            return True
        buttons = QMessageBox.StandardButton
        answer = QMessageBox.question(
            self._window,
            "Unsaved changes",
            f"Save the changes of {self._desk.session.name}?",
            buttons.Save | buttons.Discard | buttons.Cancel,
            buttons.Save,
        )
        return self.save() if answer == buttons.Save else answer == buttons.Discard

    def recent(self) -> list[Path]:
        """Files that were opened or saved last and are still there, newest first."""
        stored = settings().value(RECENT, [])
        texts = stored if isinstance(stored, list) else [stored] if stored else []
        return [Path(str(text)) for text in texts if Path(str(text)).exists()]

    def write_journal(self) -> None:
        """Write the session beside, so that a crash costs little."""
        if not self._desk.unsaved:
            return
        from shadowscale.session.journal import Journal

        if self._journal is None:
            self._journal = Journal(journal_folder())
        with trouble.guard("writing the journal"):
            journal_folder().mkdir(parents=True, exist_ok=True)
            self._journal.write(self._desk.session, path=str(self._desk.path or ""))

    def end(self) -> None:
        """Stop the journal: the work was saved or given up on purpose."""
        self._timer.stop()
        if self._journal is not None:
            self._journal.close()

    def offer_recovery(self) -> None:
        """Offer what a crash left behind."""
        from shadowscale.session.journal import discard, recover, recoverable

        for item in recoverable(journal_folder()):
            answer = QMessageBox.question(
                self._window, "Recover work?",
                f"The program ended unexpectedly while {item.name!r} had unsaved changes. Open them?",
            )  # fmt: skip
            if answer == QMessageBox.StandardButton.Yes:
                with trouble.guard(f"recovering {item.name}"):
                    self._desk.begin(
                        recover(item), Path(item.path) if item.path else None, saved=False
                    )
                    discard(item)
                    return
            else:
                discard(item)

    def _remember(self, path: Path) -> None:
        texts = [
            str(path.absolute()),
            *(str(each) for each in self.recent() if each != path.absolute()),
        ]
        settings().setValue(RECENT, texts[:MOST_RECENT])

    def _folder(self) -> str:
        recent = self.recent()
        return str(recent[0].parent) if recent else os.getcwd()


@contextmanager
def waiting() -> Iterator[None]:
    """The cursor says that it takes a moment."""
    QApplication.setOverrideCursor(Qt.CursorShape.WaitCursor)
    try:
        yield
    finally:
        QApplication.restoreOverrideCursor()


def settings() -> QSettings:
    """The program's settings on this machine."""
    return QSettings(ORGANISATION, PROGRAM)


def journal_folder() -> Path:
    """Where journals are written."""
    place = QStandardPaths.StandardLocation.AppLocalDataLocation
    return Path(QStandardPaths.writableLocation(place)) / "journal"


def sample_sessions() -> list[tuple[str, str, Path]]:
    """Title, words and file of each sample session."""
    from shadowscale_app.samples import samples

    return samples()


def _with_checksums(sources: tuple[Source, ...], files: Sequence[object]) -> tuple[Source, ...]:
    sums = {getattr(file, "path", ""): getattr(file, "sha256", "") for file in files}
    return tuple(
        replace(source, sha256=source.sha256 or sums.get(source.path, "")) for source in sources
    )
