"""Opening a file: its bytes, checksum and format, and the reader that turns it into a raw table."""

from __future__ import annotations

import gzip
import zlib
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from hashlib import sha256
from os import PathLike, fspath
from pathlib import Path
from types import MappingProxyType

from shadowscale.data.raw_table import RawTable
from shadowscale.errors import Problem, TableError

FilePath = str | PathLike[str]
WHOLE = -1
_FOREIGN = {
    b"PK\x03\x04": "a zip archive or spreadsheet workbook",
    b"%PDF": "a PDF document",
    b"\x89PNG": "a picture",
    b"\xff\xd8\xff": "a picture",
    b"\x89HDF": "an HDF5 file",
    b"\xd0\xcf\x11\xe0": "an old spreadsheet workbook",
}


@dataclass(frozen=True)
class FileBytes:
    """The content of a file, decompressed, with the checksum of the file itself.

    `size` is that of the whole content: more than is in `content` where only the head was read,
    and then an estimate for compressed files. The checksum is empty where only the head was read.
    """

    path: str
    content: bytes
    sha256: str
    size: int

    @property
    def partial(self) -> bool:
        """Whether only the head was read."""
        return self.size > len(self.content)


@dataclass(frozen=True)
class Reader:
    """One format: how it is recognised by its first bytes, and what reads it."""

    name: str
    recognises: Callable[[bytes], bool]
    read: Callable[[FileBytes], RawTable]


def _is_fits(head: bytes) -> bool:
    return head.startswith(b"SIMPLE  =")


def _is_votable(head: bytes) -> bool:
    start = head.lstrip(b"\xef\xbb\xbf \t\r\n")[:2000]
    return start.startswith(b"<") and b"VOTABLE" in start


def _is_ecsv(head: bytes) -> bool:
    return head.lstrip(b"\xef\xbb\xbf").startswith(b"# %ECSV")


def _read_fits(file: FileBytes) -> RawTable:
    from shadowscale.data.fits import read_fits

    return read_fits(file)


def _read_votable(file: FileBytes) -> RawTable:
    from shadowscale.data.tables import read_votable

    return read_votable(file)


def _read_ecsv(file: FileBytes) -> RawTable:
    from shadowscale.data.tables import read_ecsv

    return read_ecsv(file)


def _read_text(file: FileBytes) -> RawTable:
    from shadowscale.data.text import read_text

    return read_text(file)


READERS: Mapping[str, Reader] = MappingProxyType(
    {
        "fits": Reader("FITS binary table", _is_fits, _read_fits),
        "votable": Reader("VOTable", _is_votable, _read_votable),
        "ecsv": Reader("ECSV", _is_ecsv, _read_ecsv),
        "text": Reader("text table", lambda head: True, _read_text),
    }
)


def file_bytes(path: FilePath, limit: int = WHOLE) -> FileBytes:
    """Read a file, or its first `limit` bytes.

    Raises
    ------
    TableError
        If it is missing, a directory, empty, not readable, or a broken archive.
    """
    name = fspath(path)
    raw = _raw_bytes(name, limit)
    if not raw:
        raise TableError(Problem(name, "a table", "an empty file"))
    size = max(_size(name), len(raw))
    whole = len(raw) == size
    packed = raw.startswith(b"\x1f\x8b")
    content = _unpacked(name, raw, partial=not whole) if packed else raw
    return FileBytes(
        path=name,
        content=content,
        sha256=sha256(raw).hexdigest() if whole else "",
        size=len(content) if whole else max(len(content) * size // len(raw), len(content) + 1),
    )


def read_table(path: FilePath) -> RawTable:
    """Read a file of any known format.

    Raises
    ------
    TableError
        If it cannot be opened, or holds no table.
    """
    file = file_bytes(path)
    return reader_for(file).read(file)


def reader_for(file: FileBytes) -> Reader:
    """The reader whose format the file's first bytes show."""
    for start, what in _FOREIGN.items():
        if file.content.startswith(start):
            help = "save the table as text (csv), FITS, ECSV or VOTable"
            raise TableError(Problem(file.path, "a table", what, help=help))
    return next(reader for reader in READERS.values() if reader.recognises(file.content[:4096]))


def _size(name: str) -> int:
    try:
        return Path(name).stat().st_size
    except OSError:
        return 0


def _raw_bytes(name: str, limit: int) -> bytes:
    try:
        with open(name, "rb") as stream:
            return stream.read(limit)
    except FileNotFoundError:
        found, help = "no such file", _near_files(name)
    except IsADirectoryError:
        found, help = "a directory", "name the files in it"
    except PermissionError:
        found, help = "a file that may not be read", "check its permissions"
    except (OSError, ValueError) as error:
        found, help = f"a file that cannot be read ({error})", ""
    raise TableError(Problem(name, "a table", found, help=help))


def _near_files(name: str) -> str:
    from difflib import get_close_matches

    try:
        others = [entry.name for entry in Path(name).parent.iterdir()][:2000]
    except (OSError, ValueError):
        return ""
    near = get_close_matches(Path(name).name, others, n=1)
    return f"did you mean {near[0]!r}?" if near else ""


def _unpacked(name: str, raw: bytes, *, partial: bool) -> bytes:
    try:
        if partial:
            return zlib.decompressobj(wbits=31).decompress(raw)
        return gzip.decompress(raw)
    except (OSError, EOFError, zlib.error) as error:
        problem = Problem(name, "a complete gzip file", f"a broken one ({error})")
        raise TableError(problem) from error
