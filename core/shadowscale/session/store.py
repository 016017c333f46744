"""Sessions as files: `session.json`, schema 1, described by `session.schema.json`.

A session names its input files by path (relative to its own folder) and checksum; it does not hold
them. Everything else comes back bit for bit, so that a window opens at the very state that was
saved. A file that changed since then makes the solution stale: the session opens without it and
says so, or refuses where nothing but the same numbers will do.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import replace
from importlib.resources import files
from pathlib import Path
from typing import Any

from shadowscale._version import __version__
from shadowscale.errors import Problem, SessionError
from shadowscale.session.atomic import write_text
from shadowscale.session.places import found_paths, stored_paths
from shadowscale.session.plain import PlainError, from_plain, to_plain
from shadowscale.session.sense import check_sense
from shadowscale.session.session import Session, Source
from shadowscale.session.tables import checksum, with_tables
from shadowscale.versions import library_versions

SCHEMA = 1
PROGRAM = f"shadowscale {__version__}"
SOURCES = ("photometry_sources", "velocity_sources")
NOT_SAVED = ("photometry", "velocities", "notes")
MAX_BYTES = 1 << 30


def save_session(session: Session, path: Path) -> None:
    """Write a session; what is at `path` is replaced at once or not at all.

    Raises
    ------
    OSError
        If the file cannot be written.
    """
    write_text(path, written_document(session_document(session, path.parent)))


def open_session(path: Path, *, same_files: bool = False) -> Session:
    """Read a session and the tables it names.

    Parameters
    ----------
    path : Path
    same_files : bool
        Refuse when an input file is not the one that the session was saved with; otherwise the
        session opens without its solutions and `Session.notes` says why.

    Raises
    ------
    SessionError
        If the file cannot be understood, or a file it names is missing or (on request) changed.
    InputError
        If a table cannot be read.
    """
    return restored(_read(path), path, same_files=same_files)


def restored(document: Mapping[str, Any], path: Path, *, same_files: bool = False) -> Session:
    """The session of a document read from `path`, with its tables; as `open_session`."""
    session = from_document(document, path)
    changed = _changed(session)
    if changed and same_files:
        raise SessionError(*(_changed_problem(source) for source in changed))
    if changed:
        session = _without_solutions(session, changed)
    return _fitting(with_tables(session))


def schema() -> dict[str, Any]:
    """The JSON schema that session files follow."""
    text = files("shadowscale.session").joinpath("session.schema.json").read_text(encoding="utf-8")
    found: dict[str, Any] = json.loads(text)
    return found


def session_document(session: Session, folder: Path | None) -> dict[str, Any]:
    """A session as plain dictionaries and lists; paths relative to `folder`, absolute without one."""
    return plain_document(stored_paths(session, folder))


def plain_document(session: Session) -> dict[str, Any]:
    """A session as plain dictionaries and lists, with its paths as they are."""
    versions = {} if session.solution is None else session.versions or library_versions()
    bare = replace(session, photometry=None, velocities=None, notes=(), versions=versions)
    plain: dict[str, Any] = to_plain(bare)
    return {"schema": SCHEMA, "program": PROGRAM, **plain}


def written_document(document: Mapping[str, Any]) -> str:
    """The text of a session file."""
    return json.dumps(document, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def from_document(document: Mapping[str, Any], path: Path) -> Session:
    """The session of a document read from `path`, without its tables.

    Raises
    ------
    SessionError
        Naming the place that does not fit, or a file that is not there.
    """
    version = document.get("schema")
    if version != SCHEMA:
        raise SessionError(
            Problem(
                str(path), f"session schema {SCHEMA}", f"{version!r}", help=_version_help(version)
            )
        )
    body = {name: item for name, item in document.items() if name not in ("schema", "program")}
    for name in NOT_SAVED:
        if name in body:
            raise SessionError(Problem(str(path), "no such entry in a session", repr(name)))
    try:
        session = from_plain(Session, body)
        check_sense(session)
    except PlainError as error:
        problem = Problem(str(path), error.expected, error.found, column=error.where)
        raise SessionError(problem) from error
    return found_paths(session, path)


def _version_help(version: object) -> str:
    newer = isinstance(version, int) and version > SCHEMA
    return "it was saved by a newer version of the program" if newer else ""


def _read(path: Path) -> dict[str, Any]:
    """The JSON object in a file."""
    try:
        if path.stat().st_size > MAX_BYTES:
            raise SessionError(Problem(str(path), "a session below 1 GB", "a larger file"))
        document = json.loads(path.read_text(encoding="utf-8"), parse_constant=_no_constant)
    except FileNotFoundError as error:
        raise SessionError(Problem(str(path), "a session file", "no such file")) from error
    except OSError as error:
        raise SessionError(Problem(str(path), "a session file", str(error.strerror))) from error
    except json.JSONDecodeError as error:
        raise SessionError(
            Problem(str(path), "JSON", error.msg, line=error.lineno, column=str(error.colno))
        ) from error
    except (UnicodeDecodeError, RecursionError, ValueError) as error:
        raise SessionError(Problem(str(path), "JSON text in UTF-8", str(error))) from error
    if not isinstance(document, dict):
        raise SessionError(Problem(str(path), "a JSON object", type(document).__name__))
    return document


def _no_constant(text: str) -> float:
    raise ValueError(f"{text} is not JSON")


def _changed(session: Session) -> list[Source]:
    """The sources whose files are not what they were."""
    sources = session.photometry_sources + session.velocity_sources
    return [
        source for source in sources if source.sha256 and checksum(source.path) != source.sha256
    ]


def _changed_problem(source: Source) -> Problem:
    expected = f"the file that the session was saved with (sha256 {source.sha256[:12]}...)"
    return Problem(source.path, expected, "another content")


def _without_solutions(session: Session, changed: list[Source]) -> Session:
    """A session whose files changed: its wishes stay, its numbers go."""
    names = ", ".join(Path(source.path).name for source in changed)
    note = f"{names} changed since the session was saved; its solution was set aside, solve again"
    cleared = tuple(replace(source, sha256="") for source in changed)

    def renewed(sources: tuple[Source, ...]) -> tuple[Source, ...]:
        return tuple(
            cleared[changed.index(source)] if source in changed else source for source in sources
        )

    return replace(
        session,
        photometry_sources=renewed(session.photometry_sources),
        velocity_sources=renewed(session.velocity_sources),
        solution=None,
        audit=(),
        kept=(),
        notes=(*session.notes, note),
    )


def _fitting(session: Session) -> Session:
    """Solutions whose rows are not the tables' rows (read otherwise than before) are set aside."""
    rows = 0 if session.photometry is None else session.photometry.time.size
    kept = tuple(item for item in session.kept if item.solution.light.model.size == rows)
    stale = session.solution is not None and session.solution.light.model.size != rows
    if not stale and len(kept) == len(session.kept):
        return session
    note = "the tables are read otherwise than when the session was saved; solve again"
    solution = None if stale else session.solution
    audit = () if stale else session.audit
    return replace(session, solution=solution, audit=audit, kept=kept, notes=(*session.notes, note))
