"""The tables of a session: read from its files, with the rows that the user set aside."""

from __future__ import annotations

import hashlib
from dataclasses import replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import InputFile, Ints
from shadowscale.session.session import Exclusion, Session, Source

LIGHT, RV1, RV2 = "light", "rv1", "rv2"


def with_tables(session: Session) -> Session:
    """The same session with its tables read from the files of its sources.

    Raises
    ------
    InputError
        If a file cannot be read as what it should be, or the times of light and velocities lie
        centuries apart.
    """
    from shadowscale.data import check_zero_points, read_photometry, read_velocities

    photometry, velocities = None, None
    light, speed = session.photometry_sources, session.velocity_sources
    if light:
        photometry = read_photometry(
            [source.path for source in light],
            columns=[source.columns for source in light],
            band=[source.band or None for source in light],
        )
    if speed:
        velocities = read_velocities(
            [source.path for source in speed], columns=[source.columns for source in speed]
        )
    if photometry is not None and velocities is not None:
        check_zero_points(photometry, velocities)
    read = replace(session, photometry=photometry, velocities=velocities)
    return with_exclusions(_with_checksums(read))


def with_exclusions(session: Session) -> Session:
    """The same session with the rows of its exclusions set aside in its tables."""
    photometry, velocities = session.photometry, session.velocities
    for exclusion in session.exclusions:
        if exclusion.table == LIGHT and photometry is not None:
            rows = _rows(exclusion, photometry.files, file=photometry.file, line=photometry.line)
            photometry = photometry.excluded(rows, exclusion.reason)
        elif exclusion.table in (RV1, RV2) and velocities is not None:
            star = 1 if exclusion.table == RV1 else 2
            rows = _rows(exclusion, velocities.files, file=velocities.file, line=velocities.line)
            velocities = velocities.excluded(star, rows, reason=exclusion.reason)
    return replace(session, photometry=photometry, velocities=velocities)


def checksum(path: str | Path) -> str:
    """The SHA-256 of a file, as hexadecimal digits."""
    with Path(path).open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


def _with_checksums(session: Session) -> Session:
    """Sources that have no checksum yet get that of the file as it was read."""
    light = session.photometry.files if session.photometry is not None else ()
    speed = session.velocities.files if session.velocities is not None else ()
    return replace(
        session,
        photometry_sources=_summed(session.photometry_sources, light),
        velocity_sources=_summed(session.velocity_sources, speed),
    )


def _summed(sources: tuple[Source, ...], files: tuple[InputFile, ...]) -> tuple[Source, ...]:
    known = {file.path: file.sha256 for file in files}
    return tuple(
        replace(source, sha256=source.sha256 or known.get(source.path) or checksum(source.path))
        for source in sources
    )


def _rows(
    exclusion: Exclusion, files: tuple[InputFile, ...], *, file: Ints, line: Ints
) -> NDArray[np.bool_]:
    """Which rows an exclusion names; a file that moved is known by its name."""
    wanted = Path(exclusion.file)
    exact = [number for number, item in enumerate(files) if Path(item.path) == wanted]
    named = [number for number, item in enumerate(files) if Path(item.path).name == wanted.name]
    return np.isin(file, exact or named) & np.isin(line, exclusion.lines)
