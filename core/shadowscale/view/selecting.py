"""Points that a person drew round, and setting rows aside or taking them back."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints
from shadowscale.session.session import Exclusion, Session
from shadowscale.view.light_points import (
    LightPoints,
    band_shifts,
    light_over_phase,
    light_over_time,
)
from shadowscale.view.looks import Look
from shadowscale.view.velocity_points import velocities_over_phase

Corners = tuple[tuple[float, float], ...]
ONE_LINED = "left out by the observer: the pair is treated as one-lined"


def inside(x: Floats, y: Floats, corners: Corners) -> NDArray[np.bool_]:
    """(n,) bool: which points lie inside a polygon (even-odd rule)."""
    found = np.zeros(x.size, dtype=bool)
    for (x0, y0), (x1, y1) in zip(corners, (*corners[1:], corners[0]), strict=True):
        if y0 == y1:
            continue
        crosses = (y0 > y) != (y1 > y)
        found ^= crosses & (x < x0 + (y - y0) * (x1 - x0) / (y1 - y0))
    return found


def outlined_light(
    session: Session,
    corners: Corners,
    *,
    look: Look,
    residuals: bool = False,
    zero: float | None = None,
) -> Ints:
    """Rows of the photometry inside an outline drawn over phase, or over time less `zero`."""
    if zero is None:
        points = light_over_phase(session, magnitudes=look.magnitudes, residuals=residuals)
    else:
        points = light_over_time(
            session, zero=zero, magnitudes=look.magnitudes, residuals=residuals
        )
    shown = tuple(p for p in points if p.label not in look.hidden)
    shifts = (
        band_shifts(shown, magnitudes=look.magnitudes) if not residuals else (0.0,) * len(shown)
    )
    return _rows(shown, shifts, corners)


def light_set_aside(session: Session, rows: Ints, reason: str) -> Session:
    """The session with these rows of the photometry set aside for a reason, remembered by file and line."""
    photometry = session.photometry
    if photometry is None:
        return session
    chosen = np.zeros(photometry.time.size, dtype=bool)
    chosen[rows] = True
    chosen &= photometry.used
    exclusions = list(session.exclusions)
    for number, file in enumerate(photometry.files):
        lines = photometry.line[chosen & (photometry.file == number)]
        if lines.size:
            exclusions.append(
                Exclusion("light", file.path, tuple(int(line) for line in lines), reason)
            )
    return replace(
        session, photometry=photometry.excluded(chosen, reason), exclusions=tuple(exclusions)
    )


def light_taken_back(session: Session, rows: Ints) -> Session:
    """The session with these rows of the photometry taking part again, if a person had set them aside."""
    photometry = session.photometry
    if photometry is None:
        return session
    ours = {exclusion.reason for exclusion in session.exclusions if exclusion.table == "light"}
    codes = [code for code, reason in enumerate(photometry.reasons) if reason in ours]
    chosen = np.zeros(photometry.time.size, dtype=bool)
    chosen[rows] = True
    chosen &= np.isin(photometry.why, codes)
    back = {
        (photometry.files[file].path, int(line))
        for file, line in zip(photometry.file[chosen], photometry.line[chosen], strict=True)
    }
    exclusions = tuple(_without(exclusion, back, "light") for exclusion in session.exclusions)
    kept = tuple(exclusion for exclusion in exclusions if exclusion.lines)
    return replace(session, photometry=photometry.restored(chosen), exclusions=kept)


def outlined_velocities(
    session: Session, corners: Corners, *, residuals: bool = False
) -> dict[int, Ints]:
    """Rows of the velocities inside an outline drawn over phase, star by star."""
    found = {}
    for points in velocities_over_phase(session):
        rows = points.rows[inside(points.x, points.residual if residuals else points.y, corners)]
        if rows.size:
            found[points.star] = rows
    return found


def velocities_set_aside(session: Session, rows: Mapping[int, Ints], reason: str) -> Session:
    """The session with these rows of each star's velocities set aside for a reason."""
    table, exclusions = session.velocities, list(session.exclusions)
    if table is None:
        return session
    for star, chosen_rows in rows.items():
        chosen = np.zeros(table.time.size, dtype=bool)
        chosen[chosen_rows] = True
        chosen &= table.used1 if star == 1 else table.used2
        for number, file in enumerate(table.files):
            lines = table.line[chosen & (table.file == number)]
            if lines.size:
                numbers = tuple(int(line) for line in lines)
                exclusions.append(Exclusion(f"rv{star}", file.path, numbers, reason))
        table = table.excluded(star, chosen, reason)
    return replace(session, velocities=table, exclusions=tuple(exclusions))


def velocities_taken_back(session: Session, rows: Mapping[int, Ints]) -> Session:
    """The session with these rows of each star's velocities taking part again, if a person had set them aside."""
    table, exclusions = session.velocities, session.exclusions
    if table is None:
        return session
    for star, chosen_rows in rows.items():
        name = f"rv{star}"
        ours = {each.reason for each in session.exclusions if each.table == name}
        codes = [code for code, reason in enumerate(table.reasons) if reason in ours]
        chosen = np.zeros(table.time.size, dtype=bool)
        chosen[chosen_rows] = True
        chosen &= np.isin(table.why1 if star == 1 else table.why2, codes)
        back = {
            (table.files[file].path, int(line))
            for file, line in zip(table.file[chosen], table.line[chosen], strict=True)
        }
        exclusions = tuple(_without(each, back, name) for each in exclusions)
        table = table.restored(star, chosen)
    kept = tuple(each for each in exclusions if each.lines)
    return replace(session, velocities=table, exclusions=kept)


def is_one_lined(session: Session) -> bool:
    """Whether no velocity of star 2 takes part."""
    return session.velocities is not None and not session.velocities.used2.any()


def can_be_two_lined(session: Session) -> bool:
    """Whether there are velocities of star 2, taking part or not."""
    return session.velocities is not None and bool(np.isfinite(session.velocities.rv2).any())


def with_one_line(session: Session, only_first: bool) -> Session:
    """The session without the velocities of star 2, or with those that were left out like this again."""
    table = session.velocities
    if table is None:
        return session
    if only_first:
        return velocities_set_aside(session, {2: np.flatnonzero(table.used2)}, ONE_LINED)
    if ONE_LINED not in table.reasons:
        return session
    rows = np.flatnonzero(table.why2 == table.reasons.index(ONE_LINED))
    return velocities_taken_back(session, {2: rows})


def everything_taken_back(session: Session) -> Session:
    """The session with all rows that a person set aside taking part again."""
    session = light_taken_back(session, set_aside_rows(session))
    table = session.velocities
    if table is None:
        return session
    everything = np.arange(table.time.size)
    return velocities_taken_back(session, {1: everything, 2: everything})


def set_aside_rows(session: Session) -> Ints:
    """Rows of the photometry that a person set aside."""
    photometry = session.photometry
    if photometry is None:
        return np.zeros(0, dtype=np.int64)
    ours = {exclusion.reason for exclusion in session.exclusions if exclusion.table == "light"}
    codes = [code for code, reason in enumerate(photometry.reasons) if reason in ours]
    return np.flatnonzero(np.isin(photometry.why, codes))


def _rows(points: tuple[LightPoints, ...], shifts: tuple[float, ...], corners: Corners) -> Ints:
    found = [
        p.rows[inside(p.x, p.y + shift, corners)] for p, shift in zip(points, shifts, strict=True)
    ]
    return np.concatenate(found) if found else np.zeros(0, dtype=np.int64)


def _without(exclusion: Exclusion, back: set[tuple[str, int]], table: str) -> Exclusion:
    if exclusion.table != table:
        return exclusion
    lines = tuple(line for line in exclusion.lines if (exclusion.file, line) not in back)
    return replace(exclusion, lines=lines)
