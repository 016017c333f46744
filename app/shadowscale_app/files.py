"""Saving, packing; asking where; recent files, and work that is not saved."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QObject, QSettings, Signal
from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from shadowscale.session.session import Session
from shadowscale_app.desk import Desk
from shadowscale_app.errands import Errands

if TYPE_CHECKING:
    from shadowscale_app.dialogs.exporting import Target

ORGANISATION, PROGRAM = "Shadowscale", "Shadowscale"
RECENT, MOST_RECENT = "recent", 10
SESSION_SUFFIX, PACKED_SUFFIX = ".json", ".zip"
TABLES = "Tables and sessions (*.csv *.txt *.dat *.tsv *.ecsv *.fits *.fit *.xml *.vot *.json *.zip *.gz);;All files (*)"


class Files(QObject):
    """What the bench does with files. Reading and writing happen beside the window, in `errands`.

    Signal `told(words)`.
    """

    told = Signal(str)

    def __init__(self, desk: Desk, window: QWidget, *, immediate: bool = False) -> None:
        super().__init__(window)
        self.errands = Errands(self, immediate=immediate)
        self._desk, self.window = desk, window

    def ask_tables(self, title: str, *, several: bool = False) -> list[Path]:
        """Ask which file, or which files; none if the person gave up."""
        ask = QFileDialog.getOpenFileNames if several else QFileDialog.getOpenFileName
        found, _ = ask(self.window, title, self._folder(), TABLES)
        return [Path(path) for path in ([found] if isinstance(found, str) else found) if path]

    def save(self) -> None:
        """Save where it was saved before, else ask."""
        if self._desk.path is None:
            self.save_as()
        else:
            self.save_to(self._desk.path)

    def save_as(self) -> None:
        """Ask where, and save."""
        start = str(Path(self._folder()) / f"{self._desk.session.name}{SESSION_SUFFIX}")
        path, _ = QFileDialog.getSaveFileName(
            self.window, "Save session", start, "Session (*.json)"
        )
        if path:
            self.save_to(Path(path))

    def save_to(self, path: Path) -> None:
        """Save the session in a file."""
        session = self._desk.session

        def write() -> None:
            from shadowscale.session.store import save_session

            save_session(session, path)

        def take(_: object) -> None:
            self._desk.mark_saved(path, session)
            self.remember(path)

        self.errands.run(f"saving {path.name}", write, take)

    def ask_pack(self) -> None:
        """Ask where, and write the session with its data into one file."""
        start = str(Path(self._folder()) / f"{self._desk.session.name}{PACKED_SUFFIX}")
        path, _ = QFileDialog.getSaveFileName(
            self.window, "Pack session", start, "Packed session (*.zip)"
        )
        if path:
            self.pack_to(Path(path))

    def pack_to(self, path: Path) -> None:
        """Write the session with its data into one file."""
        path = path if path.suffix.lower() == PACKED_SUFFIX else path.with_suffix(PACKED_SUFFIX)
        session = self._desk.session
        self.errands.run(
            f"packing {path.name}",
            lambda: _packed(session, path),
            lambda _: self.told.emit(f"Packed with its data into {path}."),
        )

    def ask_export(self) -> Target | None:
        """Ask where the sheet and all the rest are to be written."""
        from shadowscale_app.dialogs.exporting import ask_target

        return ask_target(self.window, self._desk.session, Path(self._folder()))

    def ask_compare(self, then: Callable[[Any], object]) -> None:
        """Ask for a session, a sheet or a typed table, and hand over the solutions in it."""
        path, _ = QFileDialog.getOpenFileName(
            self.window, "Compare with", self._folder(), "Sessions, sheets, tables (*.json *.csv *.txt);;All files (*)"
        )  # fmt: skip
        if path:
            self.errands.read(f"reading {Path(path).name}", lambda: _compared(Path(path)), then)

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
            self.window,
            "Unsaved changes",
            f"Save the changes of {self._desk.session.name}?",
            buttons.Save | buttons.Discard | buttons.Cancel,
            buttons.Save,
        )
        if answer == buttons.Save:
            self.save()
            return self.errands.wait_until_idle() and not self._desk.unsaved
        return answer == buttons.Discard

    def recent(self) -> list[Path]:
        """Files that were opened or saved last and are still there, newest first."""
        stored = settings().value(RECENT, [])
        texts = stored if isinstance(stored, list) else [stored] if stored else []
        return [Path(str(text)) for text in texts if Path(str(text)).exists()]

    def remember(self, path: Path) -> None:
        """Put a file on the list of recent ones."""
        texts = [
            str(path.absolute()),
            *(str(each) for each in self.recent() if each != path.absolute()),
        ]
        settings().setValue(RECENT, texts[:MOST_RECENT])

    def _folder(self) -> str:
        """Where the person worked last; at first where the program was started, if one may write there."""
        recent = self.recent()
        if recent:
            return str(recent[0].parent)
        return os.getcwd() if os.access(os.getcwd(), os.W_OK) else str(Path.home())


def _packed(session: Session, path: Path) -> Path:
    from shadowscale.jobs.packing import pack_session

    return pack_session(session, path, overwrite=True)  # the file dialog has asked


def _compared(path: Path) -> object:
    from shadowscale.jobs.compare_inputs import read_compared

    return read_compared(path)


def settings() -> QSettings:
    """The program's settings on this machine."""
    return QSettings(ORGANISATION, PROGRAM)


def sample_sessions() -> list[tuple[str, str, Path]]:
    """Title, words and file of each sample session."""
    from shadowscale_app.samples import samples

    return samples()
