"""Files that are there whole or not at all."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import IO


def write_text(path: Path, text: str) -> None:
    """Write text as UTF-8 (bytes of a file name that are no text as JSON escapes), see `write_bytes`."""
    write_bytes(path, text.encode("utf-8", "backslashreplace"))


def write_bytes(path: Path, content: bytes) -> None:
    """Write bytes, see `writing`."""
    with writing(path) as stream:
        stream.write(content)


@contextmanager
def writing(path: Path) -> Iterator[IO[bytes]]:
    """A stream beside the place, made sure to be on disk, then renamed; an old file stays until then.

    Raises
    ------
    OSError
        If the folder cannot be written; the old file is untouched.
    """
    path.parent.mkdir(parents=True, exist_ok=True)
    handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.", suffix=".part")
    try:
        with os.fdopen(handle, "wb") as stream:
            yield stream
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(temporary, _mode(path))
        os.replace(temporary, path)
    except BaseException:
        os.unlink(temporary)
        raise


def _mode(path: Path) -> int:
    """The rights of the old file, or what a new one would ordinarily get."""
    if path.exists():
        return path.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask
