"""A session with its data in one zip file, to be sent to a colleague, and the way back.

session.json         with the paths below
data/...             the files it needs
checksums.sha256     of all of them, in the form that `sha256sum -c` reads
README.txt           how to open it
"""

from __future__ import annotations

import hashlib
import json
import os
import re
import stat
import zlib
from collections.abc import Iterator, Mapping
from pathlib import Path
from zipfile import ZIP_DEFLATED, BadZipFile, ZipFile, ZipInfo, is_zipfile

from shadowscale._version import __version__
from shadowscale.errors import Problem, SessionError
from shadowscale.jobs.results import ODD, check_paths, not_writable
from shadowscale.session.atomic import writing
from shadowscale.session.places import files_of, with_paths
from shadowscale.session.session import Session
from shadowscale.session.store import plain_document, written_document
from shadowscale.session.tables import checksum

SUFFIX = ".zip"
SESSION_FILE, SUMS_FILE, README_FILE = "session.json", "checksums.sha256", "README.txt"
DATA = "data"
MOST_BYTES = 4 << 30  # unpacked
BLOCK = 1 << 20
DATE = (1980, 1, 1, 0, 0, 0)  # the same session gives the same bytes
EXPECTED = "a session packed by shadowscale"
README = f"""\
A piece of work on an eclipsing binary, packed by shadowscale {__version__}.

Open it as it is:           shadowscale THIS.zip
Do the solution again:      shadowscale replay THIS.zip --out results
Or unpack it, and open session.json. The measurements are in data/.
"""
_NOT_EVERYWHERE = re.compile(r"[\\/:*?\"<>|\x00-\x1f\ud800-\udfff]")
_NAME = re.compile(rf"(?:{DATA}/)?[^/\\:\x00-\x1f]+")


def is_packed(path: str | Path) -> bool:
    """Whether a path names a packed session, by its ending."""
    return str(path).lower().endswith(SUFFIX)


def pack_session(session: Session, target: Path, *, overwrite: bool = False) -> Path:
    """Write a session and all files it needs into one zip file, at once or not at all.

    Parameters
    ----------
    session : Session
        With paths that can be opened.
    target : Path
        Ends in `.zip`.
    overwrite : bool
        Replace a file that is there; an input file never is.

    Returns
    -------
    Path
        The target.

    Raises
    ------
    UsageError
        The target is there already or cannot be written.
    SessionError
        A file is missing, or is not the one that the session was solved with.
    """
    files = files_of(session)
    check_paths([target], inputs=map(Path, files), overwrite=overwrite, option="FILE")
    names = _names(files)
    sums = _checked(session, names)
    packed = with_paths(session, lambda file: names[file], lambda file: _excluded(file, names))
    text = written_document(plain_document(packed)).encode("utf-8", ODD)
    sums[SESSION_FILE] = hashlib.sha256(text).hexdigest()
    listing = "".join(f"{digest}  {name}\n" for name, digest in sums.items())
    try:
        with writing(target) as stream, ZipFile(stream, "w", ZIP_DEFLATED) as archive:
            for name, content in ((README_FILE, README.encode()), (SESSION_FILE, text)):
                archive.writestr(_entry(name), content)
            archive.writestr(_entry(SUMS_FILE), listing)
            for file, name in names.items():
                _add(archive, Path(file), name)
    except OSError as error:
        raise not_writable(target, error) from error
    return target


def unpack_session(packed: Path, folder: Path | None = None, *, overwrite: bool = False) -> Path:
    """Write the files of a packed session into a folder; the path of the session there.

    Parameters
    ----------
    packed : Path
    folder : Path or None
        Where they go; None: beside the packed file, under its name.
    overwrite : bool
        Replace files there that differ. Those that are the same already are left alone.

    Raises
    ------
    SessionError
        It is no packed session, damaged, or has paths that lead out of the folder.
    UsageError
        Another file is in the way, or the folder cannot be written.
    """
    target = packed.with_suffix("") if folder is None else folder
    if not packed.is_file() or not is_zipfile(packed):
        found = "another file" if packed.exists() else "no such file"
        raise SessionError(Problem(str(packed), EXPECTED, found))
    try:
        with ZipFile(packed) as archive:
            sums = _contents(archive, packed)
            new = {
                name: target / name
                for name, digest in sums.items()
                if not ((target / name).is_file() and checksum(target / name) == digest)
            }
            check_paths(new.values(), inputs=[packed], overwrite=overwrite, option="FOLDER")
            for name, path in new.items():
                _extract(archive, name, path, sums[name], packed=packed)
    except (BadZipFile, zlib.error, EOFError, NotImplementedError, RuntimeError) as error:
        raise SessionError(Problem(str(packed), EXPECTED, f"a damaged one ({error})")) from error
    except OSError as error:
        raise not_writable(target, error) from error
    return target / SESSION_FILE


def _names(files: tuple[str, ...]) -> dict[str, str]:
    """Each file's place in the zip, fit for every system; a number before names that come twice."""
    found: dict[str, str] = {}
    for file in files:
        plain = _NOT_EVERYWHERE.sub("_", Path(file).name)
        name, number = f"{DATA}/{plain}", 1
        while name.lower() in (other.lower() for other in found.values()):
            number += 1
            name = f"{DATA}/{number}_{plain}"
        found[file] = name
    return found


def _checked(session: Session, names: Mapping[str, str]) -> dict[str, str]:
    """Checksums by name in the zip; SessionError where a file is missing or another than it was."""
    known = {
        each.path: each.sha256 for each in session.photometry_sources + session.velocity_sources
    }
    problems, sums = [], {}
    for file, name in names.items():
        try:
            sums[name] = checksum(file)
        except OSError as error:
            problems.append(Problem(file, "a file of the session", error.strerror or "trouble"))
            continue
        if known.get(file) and known[file] != sums[name]:
            wanted = f"the file that the session was made with (sha256 {known[file][:12]}...)"
            help = "solve it again with the present file, then pack it"
            problems.append(Problem(file, wanted, "another content", help=help))
    if problems:
        raise SessionError(*problems)
    return sums


def _excluded(file: str, names: Mapping[str, str]) -> str:
    """The name in the zip of a file whose rows are set aside; a file that moved is known by its own."""
    same = (
        name for each, name in names.items() if os.path.normpath(each) == os.path.normpath(file)
    )
    return next(same, f"{DATA}/{Path(file).name}")


def _entry(name: str) -> ZipInfo:
    entry = ZipInfo(name, DATE)
    entry.compress_type = ZIP_DEFLATED
    entry.external_attr = (stat.S_IFREG | 0o644) << 16
    return entry


def _add(archive: ZipFile, file: Path, name: str) -> None:
    with file.open("rb") as source, archive.open(_entry(name), "w", force_zip64=True) as into:
        while block := source.read(BLOCK):
            into.write(block)


def _contents(archive: ZipFile, packed: Path) -> dict[str, str]:
    """Checksums of the files of a packed session by name; SessionError for whatever is not safe."""
    infos = {info.filename: info for info in archive.infolist()}
    for name, info in infos.items():
        plain = _NAME.fullmatch(name) and not set(name.split("/")) & {".", ".."}
        if not plain or stat.S_ISLNK(info.external_attr >> 16):
            raise _wrong(packed, f"files in {DATA}/", repr(name))
    if sum(info.file_size for info in infos.values()) > MOST_BYTES:
        raise _wrong(packed, "files below 4 GB", "more")
    if not {SESSION_FILE, SUMS_FILE} <= set(infos):
        raise _wrong(packed, EXPECTED, "another zip file")
    lines = archive.read(SUMS_FILE).decode("utf-8", "replace").splitlines()
    pairs = [line.split("  ", 1) for line in lines]
    sums = {pair[1]: pair[0] for pair in pairs if len(pair) == 2}
    data = {name for name in infos if name.startswith(f"{DATA}/")}
    if set(sums) != data | {SESSION_FILE}:
        raise _wrong(packed, "a checksum for every file", "other names")
    for path in _stored(archive.read(SESSION_FILE), packed):
        if path not in data:
            raise _wrong(packed, f"a session with files in {DATA}/", repr(path))
    return sums


def _stored(content: bytes, packed: Path) -> Iterator[str]:
    """The paths in the text of a session file."""
    try:
        document = json.loads(content)
        sources = document.get("photometry_sources", []) + document.get("velocity_sources", [])
        plans = [document.get("plan", {})] + [kept["plan"] for kept in document.get("kept", [])]
        paths = [each["path"] for each in sources]
        paths += [plan["limb_table"] for plan in plans if plan.get("limb_table")]
    except (ValueError, AttributeError, KeyError, TypeError) as error:
        raise _wrong(packed, EXPECTED, f"a damaged one ({error})") from error
    yield from map(str, paths)


def _extract(archive: ZipFile, name: str, path: Path, digest: str, *, packed: Path) -> None:
    """One file, whole and with the right checksum, or none."""
    found = hashlib.sha256()
    with archive.open(name) as source, writing(path) as into:
        while block := source.read(BLOCK):
            found.update(block)
            into.write(block)
        if found.hexdigest() != digest:
            raise _wrong(packed, f"{name} as it was packed (sha256 {digest[:12]}...)", "another")


def _wrong(packed: Path, expected: str, found: str) -> SessionError:
    return SessionError(Problem(str(packed), expected, found))
