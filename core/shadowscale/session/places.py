"""Where the files of a session are: as stored in its file, and as they can be opened."""

from __future__ import annotations

import os
from dataclasses import replace
from pathlib import Path

from shadowscale.errors import Problem, SessionError
from shadowscale.fit.plan import Plan
from shadowscale.session.session import Session, Source


def stored_paths(session: Session, folder: Path | None) -> Session:
    """The session with paths relative to `folder`; absolute without one."""
    return replace(
        session,
        photometry_sources=_placed(session.photometry_sources, folder),
        velocity_sources=_placed(session.velocity_sources, folder),
        exclusions=tuple(
            replace(exclusion, file=_place(exclusion.file, folder))
            for exclusion in session.exclusions
        ),
        plan=_placed_plan(session.plan, folder),
        kept=tuple(replace(kept, plan=_placed_plan(kept.plan, folder)) for kept in session.kept),
    )


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

    def sources(of: tuple[Source, ...]) -> tuple[Source, ...]:
        return tuple(replace(source, path=found(source.path)) for source in of)

    def plan(of: Plan) -> Plan:
        return of if of.limb_table is None else replace(of, limb_table=found(of.limb_table))

    located = replace(
        session,
        photometry_sources=sources(session.photometry_sources),
        velocity_sources=sources(session.velocity_sources),
        exclusions=tuple(
            replace(item, file=os.path.normpath(path.parent / item.file))
            for item in session.exclusions
        ),
        plan=plan(session.plan),
        kept=tuple(replace(kept, plan=plan(kept.plan)) for kept in session.kept),
    )
    if missing:
        raise SessionError(*missing)
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


def _placed(sources: tuple[Source, ...], folder: Path | None) -> tuple[Source, ...]:
    return tuple(replace(source, path=_place(source.path, folder)) for source in sources)


def _placed_plan(plan: Plan, folder: Path | None) -> Plan:
    return (
        plan
        if plan.limb_table is None
        else replace(plan, limb_table=_place(plan.limb_table, folder))
    )
