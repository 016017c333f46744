"""Session files as commands take them: plain, or packed with their data."""

from __future__ import annotations

from pathlib import Path

ENDINGS = (".json", ".zip")


def is_session(name: str) -> bool:
    """Whether an argument names a session."""
    return name.lower().endswith(ENDINGS)


def session_path(name: str, folder: Path, *, overwrite: bool) -> Path:
    """The session file; a packed one is unpacked into the results' folder first, under its own name."""
    from shadowscale.jobs.packing import is_packed, unpack_session

    path = Path(name)
    if not is_packed(path):
        return path
    return unpack_session(path, folder / path.stem, overwrite=overwrite)
