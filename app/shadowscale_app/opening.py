"""Opening sessions and tables, by menu, command line or drop: looked into, asked about, then read."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from shadowscale.data import RawTable
from shadowscale.session.session import Session, Source
from shadowscale_app.desk import Change, Desk
from shadowscale_app.dialogs.reading import Reading, ask_reading
from shadowscale_app.files import PACKED_SUFFIX, SESSION_SUFFIX, Files
from shadowscale_app.samples import is_sample

Then = Callable[[], object]


def _nothing() -> None:
    """Nothing more to do."""


@dataclass(frozen=True, eq=False)
class Looked:
    """A table that was looked into: what it seems to hold, and its first rows."""

    path: Path
    kind: str
    table: RawTable


class Opening(QObject):
    """What the bench does with files that are given to it. All reading happens beside the window.

    `ask` is the dialog that shows how a table is understood. Signal `told(words)`.
    """

    told = Signal(str)

    def __init__(
        self, desk: Desk, files: Files, *, ask: Callable[..., Reading | None] = ask_reading
    ) -> None:
        super().__init__(files)
        self.ask = ask
        self._desk, self._files, self._errands = desk, files, files.errands
        self._errands.given_up.connect(
            lambda doing: self.told.emit(f"Given up: {doing}. The session is as it was.")
        )

    def ask_open(self) -> None:
        """Ask which files, and open them."""
        self.open_paths(self._files.ask_tables("Open", several=True))

    def ask_velocities(self) -> None:
        """Ask for a table of velocities."""

        def take(looked: Looked) -> None:
            self._add_velocities(looked, _nothing)

        for path in self._files.ask_tables("Add velocities"):
            self._errands.read(f"reading {path.name}", partial(_looked, path), take)

    def open_paths(self, paths: Sequence[Path], then: Then = _nothing) -> None:
        """Open sessions, then photometry, then velocities: they are told by their columns; then go on."""
        sessions = [
            path for path in paths if path.suffix.lower() in (SESSION_SUFFIX, PACKED_SUFFIX)
        ]
        tables = [path for path in paths if path not in sessions]

        def take(looked: list[Looked]) -> None:
            self._open_tables(sorted(looked, key=lambda each: each.kind), then)

        def look() -> None:
            if not tables:
                then()
                return
            names = ", ".join(path.name for path in tables)
            self._errands.read(f"reading {names}", lambda: [_looked(path) for path in tables], take)

        self._open_sessions(sessions, look)

    def _open_sessions(self, paths: list[Path], then: Then) -> None:
        if not paths:
            then()
            return
        self.open_session(paths[0], lambda: self._open_sessions(paths[1:], then))

    def _open_tables(self, looked: list[Looked], then: Then, *, adds: bool = False) -> None:
        if not looked:
            then()
            return
        first, rest = looked[0], looked[1:]

        def go_on() -> None:
            self._open_tables(rest, then, adds=True)

        if first.kind == "velocities":
            self._add_velocities(first, go_on)
        else:
            self._open_photometry(first, go_on, adds=adds)

    def open_session(self, path: Path, then: Then = _nothing) -> None:
        """Open a session file; a packed one is unpacked beside itself first."""
        if not self._files.may_leave():
            return
        agreed = self._desk.session

        def take(found: tuple[Session, Path]) -> None:
            session, place = found
            if self._desk.session is agreed or self._files.may_leave():
                sample = is_sample(place)  # saving it asks where
                self._desk.begin(session, None if sample else place)
                if not sample:
                    self._files.remember(place)
                if place != path:
                    self.told.emit(f"Unpacked into {place.parent}.")
                then()

        self._errands.read(f"opening {path.name}", lambda: _opened(path), take)

    def _open_photometry(self, looked: Looked, then: Then, *, adds: bool) -> None:
        """Ask how to read a table, begin a session with it or add it to the present one."""
        session, path = self._desk.session, looked.path
        reading = self.ask(
            self._files.window,
            looked.table,
            "photometry",
            may_add=session.photometry is not None,
            adds=adds,
        )
        if reading is None:
            return
        adds = session.photometry is not None and reading.adds
        if not adds and not self._files.may_leave():
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
            self._files.remember(path)
            then()

        self._errands.read(f"opening {path.name}", lambda: _read(wanted), take)

    def _take_light(self, found: Session, path: Path, *, adds: bool, agreed: Session) -> None:
        from shadowscale.session.tables import with_exclusions

        if adds and not self._is_same_work(agreed, path):
            return
        if not adds and self._desk.session is not agreed and not self._files.may_leave():
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

    def _add_velocities(self, looked: Looked, then: Then) -> None:
        """Ask how to read a table of velocities, and add it."""
        reading = self.ask(self._files.window, looked.table, "velocities")
        if reading is None:
            return
        path, agreed = looked.path, self._desk.session
        added = Source(str(path.absolute()), reading.columns)
        wanted = Session(velocity_sources=(*agreed.velocity_sources, added))

        def take(found: Session) -> None:
            from shadowscale.session.tables import with_exclusions

            if not self._is_same_work(agreed, path):
                return
            fresh = replace(
                self._desk.session,
                velocity_sources=found.velocity_sources,
                velocities=found.velocities,
            )
            self._desk.apply(Change(f"Add {path.name}", with_exclusions(fresh)))
            self._files.remember(path)
            then()

        self._errands.read(f"opening {path.name}", lambda: _read(wanted), take)

    def _is_same_work(self, agreed: Session, path: Path) -> bool:
        """Whether the desk has the tables that one was to be added to; says so where it has others."""
        now = self._desk.session
        same = (now.photometry_sources, now.velocity_sources) == (
            agreed.photometry_sources,
            agreed.velocity_sources,
        )
        if not same:
            self.told.emit(f"{path.name} is not added: other tables were opened meanwhile.")
        return same


def _looked(path: Path) -> Looked:
    from shadowscale.data import head_of, kind_of

    table = head_of(path)
    return Looked(path, kind_of(table), table)


def _opened(path: Path) -> tuple[Session, Path]:
    from shadowscale.jobs.packing import is_packed, unpack_session
    from shadowscale.session.store import open_session
    from shadowscale.view.contacts import with_start_markers

    place = unpack_session(path) if is_packed(path) else path
    return with_start_markers(open_session(place)), place


def _read(session: Session) -> Session:
    from shadowscale.session.tables import with_tables

    return with_tables(session)
