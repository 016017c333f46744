"""Opening, saving, packing; recent files."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QObject, QSettings, Signal
from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from shadowscale.session.session import Session, Source
from shadowscale_app.desk import Change, Desk
from shadowscale_app.dialogs.reading import Reading, ask_reading
from shadowscale_app.errands import Errands

if TYPE_CHECKING:
    from shadowscale_app.dialogs.exporting import Target

ORGANISATION, PROGRAM = "Shadowscale", "Shadowscale"
RECENT, MOST_RECENT = "recent", 10
JOURNAL_MS, JOURNAL_SHARE = (
    3000,
    10,
)  # between two writings: so long, and so many times what the last one took
Then = Callable[[], object]
SESSION_SUFFIX, PACKED_SUFFIX = ".json", ".zip"
TABLES = "Tables and sessions (*.csv *.txt *.dat *.tsv *.ecsv *.fits *.fit *.xml *.vot *.json *.zip *.gz);;All files (*)"


class Files(QObject):
    """What the bench does with files. Reading and writing happen beside the window, in `errands`.

    Signal `told(words)`.
    """

    told = Signal(str)

    def __init__(
        self,
        desk: Desk,
        window: QWidget,
        *,
        ask: Callable[..., Reading | None] = ask_reading,
        immediate: bool = False,
    ) -> None:
        super().__init__(window)
        self.errands = Errands(self, immediate=immediate)
        self._desk, self._window, self._ask = desk, window, ask

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

    def open_paths(self, paths: Sequence[Path], then: Then | None = None) -> None:
        """Open a session, or tables: velocities are told from photometry by their columns; then go on."""
        if not paths:
            if then is not None:
                then()
            return
        path, rest = paths[0], paths[1:]

        def go_on() -> None:
            self._remember(path)
            self.open_paths(rest, then)

        def open_table(kind: str) -> None:
            opening = self.add_velocities if kind == "velocities" else self.open_photometry
            opening(path, go_on)

        if path.suffix.lower() in (SESSION_SUFFIX, PACKED_SUFFIX):
            self.open_session(path, go_on)
        else:
            self.errands.run(f"opening {path.name}", lambda: _kind(path), open_table)

    def open_session(self, path: Path, then: Then | None = None) -> None:
        """Open a session file; a packed one is unpacked beside itself first."""
        if not self.may_leave():
            return
        agreed = self._desk.session

        def take(found: tuple[Session, Path]) -> None:
            session, place = found
            if self._desk.session is agreed or self.may_leave():
                self._desk.begin(session, place)
                self._remember(place)
                if place != path:
                    self.told.emit(f"Unpacked into {place.parent}.")
                if then is not None:
                    then()

        self.errands.run(f"opening {path.name}", lambda: _opened(path), take)

    def open_photometry(self, path: Path, then: Then | None = None) -> None:
        """Look into a table, ask how to read it, begin a session with it or add it to the present one."""
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
        wanted = replace(
            base,
            photometry_sources=(*base.photometry_sources, added),
            velocity_sources=(),
            velocities=None,
            exclusions=(),
        )

        def take(found: Session) -> None:
            self._take_light(found, path, adds=adds, agreed=session)
            if then is not None:
                then()

        self.errands.run(f"opening {path.name}", lambda: _read(wanted), take)

    def _take_light(self, found: Session, path: Path, *, adds: bool, agreed: Session) -> None:
        from shadowscale.session.tables import with_exclusions

        if not adds and self._desk.session is not agreed and not self.may_leave():
            return
        fresh = replace(
            self._desk.session if adds else Session(name=path.stem),
            photometry_sources=found.photometry_sources,
            photometry=found.photometry,
            system=None,
            solution=None,
            audit=(),
        )
        if adds:
            self._desk.apply(Change(f"Add {path.name}", with_exclusions(fresh)))
        else:
            self._desk.begin(fresh, saved=False)

    def add_velocities(self, path: Path, then: Then | None = None) -> None:
        """Look into a table of velocities, ask, and add it."""
        reading = self._ask(self._window, path, "velocities")
        if reading is None:
            return
        added = Source(str(path.absolute()), reading.columns)
        wanted = Session(velocity_sources=(*self._desk.session.velocity_sources, added))

        def take(found: Session) -> None:
            from shadowscale.session.tables import with_exclusions

            fresh = replace(
                self._desk.session,
                velocity_sources=found.velocity_sources,
                velocities=found.velocities,
            )
            self._desk.apply(Change(f"Add {path.name}", with_exclusions(fresh)))
            if then is not None:
                then()

        self.errands.run(f"opening {path.name}", lambda: _read(wanted), take)

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
            self._window, "Save session", start, "Session (*.json)"
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
            self._remember(path)

        self.errands.run(f"saving {path.name}", write, take)

    def ask_pack(self) -> None:
        """Ask where, and write the session with its data into one file."""
        start = str(Path(self._folder()) / f"{self._desk.session.name}{PACKED_SUFFIX}")
        path, _ = QFileDialog.getSaveFileName(
            self._window, "Pack session", start, "Packed session (*.zip)"
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

        return ask_target(self._window, self._desk.session, self._folder())

    def ask_compare(self, then: Callable[[Any], object]) -> None:
        """Ask for a session, a sheet or a typed table, and hand over the solutions in it."""
        path, _ = QFileDialog.getOpenFileName(
            self._window, "Compare with", self._folder(), "Sessions, sheets, tables (*.json *.csv *.txt);;All files (*)"
        )  # fmt: skip
        if path:
            self.errands.run(f"reading {Path(path).name}", lambda: _compared(Path(path)), then)

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
        if answer == buttons.Save:
            self.save()
            return self.errands.wait_until_idle() and not self._desk.unsaved
        return answer == buttons.Discard

    def recent(self) -> list[Path]:
        """Files that were opened or saved last and are still there, newest first."""
        stored = settings().value(RECENT, [])
        texts = stored if isinstance(stored, list) else [stored] if stored else []
        return [Path(str(text)) for text in texts if Path(str(text)).exists()]

    def _remember(self, path: Path) -> None:
        texts = [
            str(path.absolute()),
            *(str(each) for each in self.recent() if each != path.absolute()),
        ]
        settings().setValue(RECENT, texts[:MOST_RECENT])

    def _folder(self) -> str:
        recent = self.recent()
        return str(recent[0].parent) if recent else os.getcwd()


def _kind(path: Path) -> str:
    from shadowscale.data import sniff_kind

    return sniff_kind(path)


def _opened(path: Path) -> tuple[Session, Path]:
    from shadowscale.jobs.packing import is_packed, unpack_session
    from shadowscale.session.store import open_session
    from shadowscale.view.contacts import with_start_markers

    place = unpack_session(path) if is_packed(path) else path
    return with_start_markers(open_session(place)), place


def _packed(session: Session, path: Path) -> Path:
    from shadowscale.jobs.packing import pack_session

    return pack_session(session, path, overwrite=True)  # the file dialog has asked


def _compared(path: Path) -> object:
    from shadowscale.jobs.compare_inputs import read_compared

    return read_compared(path)


def _read(session: Session) -> Session:
    from shadowscale.session.tables import with_tables

    return with_tables(session)


def settings() -> QSettings:
    """The program's settings on this machine."""
    return QSettings(ORGANISATION, PROGRAM)


def sample_sessions() -> list[tuple[str, str, Path]]:
    """Title, words and file of each sample session."""
    from shadowscale_app.samples import samples

    return samples()
