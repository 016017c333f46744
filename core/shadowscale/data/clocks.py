"""What a column of times counts: the kind of Julian date, its time scale, the offset taken off.

The zero point is restored, so that tables hold full Julian dates. What the file does not say is not
invented: then the numbers stay as they are and the scale is `unknown`.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from shadowscale.data.clock_words import (
    KINDS,
    ZeroPoint,
    kind_said,
    scale_said,
    words_on_time,
    zero_points,
)
from shadowscale.data.photometry import Floats, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.errors import Problem, TimeScaleError

UNKNOWN = "unknown"
REACH = (
    40_000.0  # [d] files of one star lie closer together than this (about a century of photometry)
)

_SECONDS = re.compile(r"(?i)^(s|secs?|seconds?)$")
_NO_KIND = (
    "the file does not say whether its Julian dates are barycentric, heliocentric or geocentric"
)
_NO_SCALE = "in which time scale (TDB or UTC: about 69 s apart)"
_SAY_IT = "say it in a comment at its top, such as '# time: BJD_TDB - 2457000'"
_ALIKE = frozenset({"TDB", "TT"})  # less than 2 ms apart


@dataclass(frozen=True)
class Clock:
    """How a file's times are to be read.

    Attributes
    ----------
    scale : str
        Such as `BJD_TDB`, `HJD_UTC`, `JD`; `unknown` where the file does not settle it.
    offset : float [d]
        To be added to the numbers for full Julian dates.
    reason : str
        Why it is thought so.
    note : str
        What stays in doubt; empty if nothing.
    factor : float [d]
        One unit of the printed numbers.
    """

    scale: str
    offset: float
    reason: str
    note: str = ""
    factor: float = 1.0

    def full(self, numbers: Floats) -> Floats:
        """Full Julian dates (n,) [d] from the printed numbers (n,)."""
        return numbers * self.factor + self.offset if self.factor != 1.0 else numbers + self.offset


def recognised_clock(
    numbers: Floats,
    *,
    name: str = "",
    unit: str = "",
    headers: Mapping[str, str] = {},
    comments: Sequence[str] = (),
    told: str = "",
) -> Clock:
    """Kind, scale and offset of a column of times.

    Parameters
    ----------
    numbers : (n,) float64 [d]
        Their size has the last word on the offset.
    name, unit : str
        Of the column.
    headers, comments
        Of the file.
    told : str
        What the user says (`BJD_TDB - 2457000`; `unknown`); goes before everything else.
    """
    finite = numbers[np.isfinite(numbers)]
    factor = 1.0 / 86400.0 if _SECONDS.match(unit.strip()) else 1.0
    middle = float(np.median(finite)) * factor if len(finite) else np.nan
    words = words_on_time(name, unit, headers=headers, comments=comments, told=told)
    kind, said = kind_said(words)
    offset, reason, doubt = _offset(middle, list(zero_points(words, headers)), kind=kind)
    if offset is None:
        return Clock(UNKNOWN, 0.0, reason, doubt, factor)
    if told.strip().lower() == UNKNOWN:
        return Clock(UNKNOWN, offset, f"unknown by the user; {reason}", doubt, factor)
    if not kind:
        return Clock(UNKNOWN, offset, reason, doubt or _NO_KIND, factor)
    full, implied_scale, _ = KINDS[kind]
    scale = scale_said(words) or implied_scale
    if not scale:
        doubt = doubt or f"the file says {full} but not {_NO_SCALE}"
    name = f"{full}_{scale}" if scale else full
    return Clock(name, offset, f"{full} by {said}; {reason}", doubt, factor)


def _offset(middle: float, zeros: list[ZeroPoint], *, kind: str) -> tuple[float | None, str, str]:
    """Offset, reason, doubt; an offset of None means that it is not settled."""
    printed = [zero for zero in zeros if not zero.implied and zero.offset > 0]
    if _is_full(middle):
        doubt = f"{printed[0].reason}, but the times are full Julian dates" if printed else ""
        return 0.0, "the numbers are full Julian dates", doubt
    for zero in zeros:
        if _is_full(middle + zero.offset):
            return zero.offset, zero.reason, ""
    if printed:
        doubt = (
            f"{printed[0].reason}, which does not turn times around {middle:.6g} into Julian dates"
        )
        return None, "the printed offset does not fit", doubt
    if kind in ("JD", "HJD", "BJD") and 15_000 < middle < 100_000:
        reason = f"times around {middle:.6g} under the name {kind} are taken as {kind} - 2400000"
        return 2400000.0, reason, reason + " (not MJD, which would be half a day later)"
    doubt = f"times around {middle:.6g} have no offset printed; they are kept as they are"
    return None, "no offset is printed", doubt


def _is_full(middle: float) -> bool:
    return 2.25e6 < middle < 2.65e6


def common_scale(clocks: Sequence[tuple[str, Clock, float]]) -> tuple[str, tuple[str, ...]]:
    """The scale of several files together, and notes.

    Parameters
    ----------
    clocks : sequence of (path, Clock, float [d])
        The number is the middle of the file's restored times.

    Raises
    ------
    TimeScaleError
        If two files have different scales, or times so far apart that one has another zero point.
    """
    first_path, first, first_middle = clocks[0]
    scale, notes = first.scale, []
    for path, clock, middle in clocks[1:]:
        if abs(middle - first_middle) > REACH:
            raise TimeScaleError(_far_apart(path, middle, first_path, first_middle))
        if clock.scale == scale:
            continue
        shared = _shared(scale, clock.scale)
        if shared is None:
            help = f"convert one of them; if the file is wrong about it, {_SAY_IT}"
            found = f"{clock.scale} ({clock.reason})"
            raise TimeScaleError(
                Problem(path, f"times in {scale}, as in {first_path}", found, help=help)
            )
        notes.append(f"{path}: times in {clock.scale} are put together with times in {scale}")
        scale = shared
    return scale, tuple(notes)


def check_zero_points(photometry: Photometry, velocities: Velocities) -> None:
    """TimeScaleError where velocities lie so far from the photometry that one has another zero point.

    An orbit would fit all the same: over a million cycles the period can take up any phase.
    """
    light, speed = float(np.median(photometry.time)), float(np.median(velocities.time))
    if abs(light - speed) > REACH:
        first, second = (", ".join(f.path for f in t.files) for t in (photometry, velocities))
        raise TimeScaleError(_far_apart(second, speed, first, light))


def _far_apart(path: str, middle: float, other: str, other_middle: float) -> Problem:
    expected = f"times near {other_middle:.6g}, as in {other}"
    help = f"one of the files may count from another zero point (MJD or JD); {_SAY_IT}"
    return Problem(path, expected, f"times near {middle:.6g}", help=help)


def _shared(one: str, other: str) -> str | None:
    """What two unequal scales have in common: nothing if they contradict each other."""
    if UNKNOWN in (one, other):
        return UNKNOWN
    (kind1, _, scale1), (kind2, _, scale2) = one.partition("_"), other.partition("_")
    if kind1 != kind2:
        return None
    if not scale1 or not scale2:
        return kind1
    return f"{kind1}_TDB" if {scale1, scale2} <= _ALIKE else None
