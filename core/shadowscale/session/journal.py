"""What is written every few seconds, so that a crash costs little: one file for each running window."""

from __future__ import annotations

import json
import os
import sys
import time
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from shadowscale.session.atomic import write_text
from shadowscale.session.session import Session
from shadowscale.session.store import restored, session_document

SUFFIX = ".journal.json"


@dataclass(frozen=True)
class Recoverable:
    """A journal whose window is gone.

    Attributes
    ----------
    file : Path
        The journal.
    name : str
        Name of its session.
    saved_at : float [s]
        Seconds since 1970.
    path : str
        Where the session had been saved before; empty if never.
    """

    file: Path
    name: str
    saved_at: float
    path: str


class Journal:
    """The journal of one window: `write` now and then, `close` when it ends well."""

    def __init__(self, folder: Path) -> None:
        self._file = folder / f"{os.getpid()}-{time.time_ns():x}{SUFFIX}"
        self._last: Session | None = None

    @property
    def file(self) -> Path:
        """Where it is written."""
        return self._file

    def write(self, session: Session, *, path: str = "") -> bool:
        """Write the session; whether anything had changed since the last time.

        Raises
        ------
        OSError
            If the folder cannot be written.
        """
        if session is self._last:
            return False
        head = {
            "pid": os.getpid(),
            "started": _start_mark(os.getpid()),
            "saved_at": time.time(),
            "path": path,
        }
        document = {"journal": head, "session": session_document(session, None)}
        write_text(self._file, json.dumps(document, allow_nan=False))
        self._last = session
        return True

    def close(self) -> None:
        """Remove the journal: the work was saved or given up on purpose."""
        self._file.unlink(missing_ok=True)
        self._last = None


def recoverable(folder: Path) -> tuple[Recoverable, ...]:
    """The journals in a folder whose windows are gone, newest first; damaged ones are left out."""
    found = []
    for file in sorted(folder.glob(f"*{SUFFIX}")):
        document = _read(file)
        if document is None or _alive(document["journal"]):
            continue
        head = document["journal"]
        name = str(document["session"].get("name", "untitled"))
        found.append(Recoverable(file, name, float(head["saved_at"]), str(head.get("path", ""))))
    return tuple(sorted(found, key=lambda item: -item.saved_at))


def recover(item: Recoverable) -> Session:
    """The session in a journal, with its tables read again; the journal stays until discarded.

    Raises
    ------
    SessionError
        If the journal cannot be understood or a file is missing.
    InputError
        If a table cannot be read.
    """
    document = _read(item.file)
    return restored({} if document is None else document["session"], item.file)


def discard(item: Recoverable) -> None:
    """Remove a journal that is not wanted any more."""
    item.file.unlink(missing_ok=True)


def _read(file: Path) -> dict[str, Any] | None:
    """The document of a journal; None if it is damaged."""
    try:
        document = json.loads(file.read_text(encoding="utf-8"))
        head, session = document["journal"], document["session"]
        usable = isinstance(session, dict) and isinstance(head["pid"], int)
        usable = usable and isinstance(head["saved_at"], float)
    except (OSError, ValueError, KeyError, TypeError):
        return None
    return document if usable else None


def _alive(head: dict[str, Any]) -> bool:
    """Whether the process that wrote a journal still runs (and is the same one)."""
    pid = head["pid"]
    if pid == os.getpid():
        return bool(head.get("started") == _start_mark(pid))
    return _runs(pid) and head.get("started") in (None, _start_mark(pid))


def _runs(pid: int) -> bool:
    if sys.platform == "win32":  # os.kill would end the process there
        return False
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    except (PermissionError, OverflowError):
        return True
    return pid > 0


def _start_mark(pid: int) -> str | None:
    """What tells a process from a later one of the same number: its start, where the system says it."""
    try:
        text = Path(f"/proc/{pid}/stat").read_text(encoding="utf-8", errors="replace")
    except OSError:
        return None
    return text.rsplit(")", 1)[-1].split()[19]
