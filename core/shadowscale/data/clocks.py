"""What a column of times counts: the kind of Julian date, its time scale, the offset taken off.

The zero point is restored, so that tables hold full Julian dates. What the file does not say is not
invented: then the numbers stay as they are and the scale is `unknown`.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.errors import Problem, TimeScaleError

UNKNOWN = "unknown"
MJD_ZERO = 2400000.5  # [d] Julian date of MJD 0 (IAU 1997 B1)
REACH = (
    40_000.0  # [d] files of one star lie closer together than this (about a century of photometry)
)

_SCALES = r"TDB|UTC|TT|TAI|TCB|UT1"
_KINDS: Mapping[str, tuple[str, str, float | None]] = {
    # printed name: kind, time scale that it implies, offset that it implies
    "BTJD": ("BJD", "TDB", 2457000.0),
    "TBJD": ("BJD", "TDB", 2457000.0),
    "BKJD": ("BJD", "TDB", 2454833.0),
    "BMJD": ("BJD", "", MJD_ZERO),
    "MBJD": ("BJD", "", MJD_ZERO),
    "HMJD": ("HJD", "", MJD_ZERO),
    "MHJD": ("HJD", "", MJD_ZERO),
    "MJD": ("JD", "", MJD_ZERO),
    "BRJD": ("BJD", "", 2400000.0),
    "RBJD": ("BJD", "", 2400000.0),
    "HRJD": ("HJD", "", 2400000.0),
    "RHJD": ("HJD", "", 2400000.0),
    "RJD": ("JD", "", 2400000.0),
    "TJD": ("JD", "", 2440000.5),
    "BJD": ("BJD", "", None),
    "HJD": ("HJD", "", None),
    "JD": ("JD", "", None),
}
_KIND = re.compile(rf"(?<![A-Z])({'|'.join(_KINDS)})(?=$|[^A-Z]|{_SCALES})")
_LONG_KINDS = (
    (re.compile(r"(?i)barycentric julian"), "BJD"),
    (re.compile(r"(?i)heliocentric julian"), "HJD"),
    (re.compile(r"(?i)modified julian"), "MJD"),
    (re.compile(r"(?i)\bjulian da(te|y)"), "JD"),
)
_SCALE = re.compile(rf"(?<![A-Z])({_SCALES})(?![A-Z])|(?<=JD)({_SCALES})(?![A-Z])")
_SPOKEN_SCALE = re.compile(  # TT alone may be part of a star's name
    rf"(?<![A-Z])(TDB|UTC)(?![A-Z])|(?:JD|IN|SCALE|SYSTEM|STANDARD)[\W_]{{0,3}}({_SCALES})(?![A-Z])"
)
_OFFSET = re.compile(r"(?<![\d.])(24\d{5}(?:\.\d*)?)(?![\d])")
_TAKEN_OFF = re.compile(
    r"(?i)(?:[-\N{MINUS SIGN}\N{EN DASH}]|minus|less|offset|subtract\w*|zero ?point|reference)\D{0,25}(24\d{5}(?:\.\d*)?)(?!\d)"
    r"|(24\d{5}(?:\.\d*)?)\s*\+"
    r"|(24\d{5}(?:\.\d*)?)\D{0,12}(?:subtracted|taken off|removed|added)"
)
_KEYS = re.compile(
    r"^(time|timesys|jdref\w*|.*(time|date).*(system|scale|unit|standard|zero|offset|ref).*|times?|dates?|.*\b[bhm]?jd\b.*)$"
)
_MOMENT = re.compile(r"^(m?jd|date|time|t)[-_ ]?(obs|beg|end|start|stop|mid|avg)")
_SECONDS = re.compile(r"(?i)^(s|secs?|seconds?)$")
_NO_KIND = (
    "the file does not say whether its Julian dates are barycentric, heliocentric or geocentric"
)
_NO_SCALE = "in which time scale (TDB or UTC: about 69 s apart)"


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
        What the user says (`BJD_TDB - 2457000`); goes before everything else.
    """
    finite = numbers[np.isfinite(numbers)]
    factor = 1.0 / 86400.0 if _SECONDS.match(unit.strip()) else 1.0
    middle = float(np.median(finite)) * factor if len(finite) else np.nan
    sources = _sources(name, unit, headers, comments, told)
    kind, scale, implied, said = _kind(sources)
    printed = _printed_offset(sources, headers)
    offset, reason, doubt = _offset(middle, kind=kind, implied=implied, printed=printed)
    if offset is None:
        return Clock(UNKNOWN, 0.0, reason, doubt, factor)
    full = _KINDS[kind][0] if kind else ""
    scale = scale or (_KINDS[kind][1] if kind else "")
    if not full:
        doubt = doubt or _NO_KIND
        return Clock(UNKNOWN, offset, reason, doubt, factor)
    if not scale:
        doubt = doubt or f"the file says {full} but not {_NO_SCALE}"
    name = f"{full}_{scale}" if scale else full
    return Clock(name, offset, f"{full} by {said}; {reason}", doubt, factor)


def _sources(
    name: str, unit: str, headers: Mapping[str, str], comments: Sequence[str], told: str
) -> list[tuple[str, str]]:
    """Texts that may speak of the time, the most trusted first, each with where it stands."""
    keyed = [
        (f"{key} {value}", f"the line {key!r} of the header")
        for key, value in headers.items()
        if _KEYS.match(key) and not _MOMENT.match(key)
    ]
    spoken = [
        (comment, "a comment")
        for comment in comments
        if re.search(r"(?i)jd|julian|time|date", comment)
    ]
    first = [(told, "the user"), (name, "the column's name"), (unit, "the column's unit")]
    return [pair for pair in [*first, *keyed, *spoken] if pair[0]]


def _kind(sources: list[tuple[str, str]]) -> tuple[str, str, float | None, str]:
    """Printed kind, scale, implied offset, and who says the kind."""
    kind, scale, implied, said = "", "", None, ""
    for text, where in sources:
        upper = text.upper().replace("_", " ").replace("JD-UTC", "JD UTC")
        found = _KIND.search(upper)
        here = found[1] if found else _long_kind(text)
        if here and _better(here, kind):
            kind, said = here, where
            implied = _KINDS[here][2] if implied is None else implied
        pattern = _SPOKEN_SCALE if where == "a comment" else _SCALE
        found = pattern.search(upper.replace("(", " ").replace(")", " "))
        scale = scale or ((found[1] or found[2]) if found else "")
    return kind, scale, implied, said


def _long_kind(text: str) -> str:
    return next((kind for pattern, kind in _LONG_KINDS if pattern.search(text)), "")


def _better(here: str, kind: str) -> bool:
    """The first kind counts; only a plain JD gives way to one that says where the clock stands."""
    return not kind or (_KINDS[kind][0] == "JD" and kind == "JD" and here in ("BJD", "HJD"))


def _printed_offset(
    sources: list[tuple[str, str]], headers: Mapping[str, str]
) -> tuple[float, str] | None:
    for kind, zero in (("bjdref", 0.0), ("jdref", 0.0), ("mjdref", MJD_ZERO)):
        whole = _number(headers, kind + "i")
        if whole is None:
            whole = _number(headers, kind)
        if whole is not None:
            part = _number(headers, kind + "f") or 0.0
            return whole + part + zero, f"{kind.upper()} of the header"
    for text, where in sources:
        pattern = _TAKEN_OFF if where == "a comment" else _OFFSET
        found = pattern.search(text)
        if found:
            number = float(next(group for group in found.groups() if group))
            if where in ("the user", "the column's name") or (2 * number).is_integer():
                return number, where
    return None


def _number(headers: Mapping[str, str], key: str) -> float | None:
    try:
        return float(headers[key])
    except (KeyError, ValueError):
        return None


def _offset(
    middle: float, *, kind: str, implied: float | None, printed: tuple[float, str] | None
) -> tuple[float | None, str, str]:
    """Offset, reason, doubt; an offset of None means that it is not settled."""
    if _full(middle):
        doubt = ""
        if printed is not None and printed[0] > 0:
            doubt = f"{printed[1]} speaks of an offset {printed[0]:.10g}, but the times are full Julian dates"
        return 0.0, "the numbers are full Julian dates", doubt
    if printed is not None:
        if _full(middle + printed[0]):
            return printed[0], f"offset {printed[0]:.10g} by {printed[1]}", ""
        doubt = f"the printed offset {printed[0]:.10g} does not turn times around {middle:.6g} into Julian dates"
        return None, "the printed offset does not fit", doubt
    if implied is not None and _full(middle + implied):
        return implied, f"{kind} means an offset of {implied:.10g}", ""
    if kind in ("JD", "HJD", "BJD") and 15_000 < middle < 100_000:
        doubt = f"times around {middle:.6g} under the name {kind} are taken as {kind} - 2400000"
        return 2400000.0, doubt, doubt + " (not MJD, which would be half a day later)"
    doubt = f"times around {middle:.6g} have no offset printed; they are kept as they are"
    return None, "no offset is printed", doubt


def _full(middle: float) -> bool:
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
            help = "convert one of them, or say the time system of each file (time_system)"
            found = f"{clock.scale} ({clock.reason})"
            raise TimeScaleError(
                Problem(path, f"times in {scale}, as in {first_path}", found, help=help)
            )
        notes.append(f"{path}: times in {clock.scale} are put together with times in {scale}")
        scale = shared
    return scale, tuple(notes)


def _far_apart(path: str, middle: float, other: str, other_middle: float) -> Problem:
    expected = f"times near {other_middle:.6g}, as in {other}"
    help = "one of the files may count from another zero point (MJD or JD); give its time_system"
    return Problem(path, expected, f"times near {middle:.6g}", help=help)


def _shared(one: str, other: str) -> str | None:
    """What two unequal scales have in common: nothing if they contradict each other."""
    if UNKNOWN in (one, other):
        return UNKNOWN
    short, long = sorted((one, other), key=len)
    return short if long.startswith(short + "_") else None
