"""Where the files of a session are: as stored in its file, and as they can be opened."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

from shadowscale.errors import Problem, SessionError
from shadowscale.fit.plan import Plan
from shadowscale.session.session import Session, Source


def stored_paths(session: Session, folder: Path | None) -> Session:
    """The session with paths relative to `folder`; absolute without one."""
    return with_paths(session, lambda file: _place(file, folder))


def with_paths(
    session: Session, data: Callable[[str], str], excluded: Callable[[str], str] | None = None
) -> Session:
    """The session with other paths of its files, and of those in which it sets rows aside (else the same)."""
    rows = excluded or data

    def sources(of: tuple[Source, ...]) -> tuple[Source, ...]:
        return tuple(replace(source, path=data(source.path)) for source in of)

    def plan(of: Plan) -> Plan:
        return of if of.limb_table is None else replace(of, limb_table=data(of.limb_table))

    return replace(
        session,
        photometry_sources=sources(session.photometry_sources),
        velocity_sources=sources(session.velocity_sources),
        exclusions=tuple(replace(item, file=rows(item.file)) for item in session.exclusions),
        plan=plan(session.plan),
        kept=tuple(replace(kept, plan=plan(kept.plan)) for kept in session.kept),
    )


def files_of(session: Session) -> tuple[str, ...]:
    """The paths of all files that a session needs, each once."""
    sources = session.photometry_sources + session.velocity_sources
    plans = (session.plan, *(kept.plan for kept in session.kept))
    tables = (plan.limb_table for plan in plans if plan.limb_table is not None)
    return tuple(dict.fromkeys([*(source.path for source in sources), *tables]))


def found_paths(session: Session, path: Path) -> Session:
    """The session read from `path` with paths that can be opened.

    Raises
    ------
    SessionError
        Telling all files that are missing, and where they were looked for.
    """
    missing: list[Problem] = []

    def found(stored: str) -> str:
        places = [path.parent / stored, path.parent / Path(stored).name]
        for place in places:
            if place.is_file():
                return _tidy(place)
        looked = " and ".join(dict.fromkeys(os.path.normpath(place) for place in places))
        missing.append(Problem(str(path), f"the file {stored!r}", f"none at {looked}"))
        return stored

    located = with_paths(session, found, lambda file: os.path.normpath(path.parent / file))
    if missing:
        raise SessionError(*dict.fromkeys(missing))
    return located


def _tidy(place: Path) -> str:
    """The path without `..`, unless a link on the way makes that another file."""
    short = os.path.normpath(place)
    same = os.path.exists(short) and os.path.samefile(short, place)
    return short if same else str(place)


def _place(file: str, folder: Path | None) -> str:
    """A path as it is stored."""
    if folder is None:
        return Path(os.path.abspath(file)).as_posix()
    try:
        return Path(os.path.relpath(_real(file), os.path.realpath(folder))).as_posix()
    except ValueError:  # another drive
        return Path(os.path.abspath(file)).as_posix()


def _real(file: str) -> str:
    """The file in its real folder; a link that is the file itself stays a link."""
    path = Path(file)
    return os.path.join(os.path.realpath(path.parent), path.name)
