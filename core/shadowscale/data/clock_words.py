"""What the words of a file say of its times: kind of Julian date, time scale, offsets taken off."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

MJD_ZERO = 2400000.5  # [d] Julian date of MJD 0 (IAU 1997 B1)
USER, NAME, UNIT, COMMENT = "the user", "the column's name", "the column's unit", "a comment"

_SCALES = r"TDB|UTC|TT|TAI|TCB|UT1"
KINDS: Mapping[str, tuple[str, str, float | None]] = {
    # printed name: kind, time scale that it implies, offset that it implies [d]
    "BTJD": ("BJD", "TDB", 2457000.0),  # TESS (from memory)
    "TBJD": ("BJD", "TDB", 2457000.0),
    "BKJD": ("BJD", "TDB", 2454833.0),  # Kepler (from memory)
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
_KIND = re.compile(rf"(?<![A-Z])({'|'.join(KINDS)})(?=$|[^A-Z]|{_SCALES})")
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
_NUMBER = r"24\d{5}(?:\.\d*)?"
_OFFSET = re.compile(rf"(?<![\d.])({_NUMBER})(?!\d)")
_TAKEN_OFF = re.compile(
    rf"(?i)(?:[-\N{{MINUS SIGN}}\N{{EN DASH}}]|minus|less|offset|subtract\w*|zero ?point|reference)\D{{0,25}}({_NUMBER})(?!\d)"
    rf"|({_NUMBER})\s*\+"
    rf"|({_NUMBER})\D{{0,12}}(?:subtracted|taken off|removed|added)"
)
_FROM_MJD = re.compile(r"(?i)MJD[ _]*[-\N{MINUS SIGN}][ _]*(\d{5}(?:\.\d*)?)(?!\d)")
_KEYS = re.compile(
    r"^(time|timesys|jdref\w*|.*(time|date).*(system|scale|unit|standard|zero|offset|ref).*|times?|dates?|.*\b[bhm]?jd\b.*)$"
)
_MOMENT = re.compile(r"^(m?jd|date|time|t)[-_ ]?(obs|beg|end|start|stop|mid|avg)")


@dataclass(frozen=True)
class Words:
    """A text that may speak of the time, and where it stands."""

    text: str
    where: str


@dataclass(frozen=True)
class ZeroPoint:
    """An offset [d] that is to be added to the numbers, and why; `implied` by a name, or printed."""

    offset: float
    reason: str
    implied: bool = False


def words_on_time(
    name: str,
    unit: str,
    *,
    headers: Mapping[str, str],
    comments: Sequence[str],
    told: str,
) -> tuple[Words, ...]:
    """Texts that may speak of the time, the most trusted first."""
    keyed = [
        Words(f"{key} {value}", f"the line {key!r} of the header")
        for key, value in headers.items()
        if _KEYS.match(key) and not _MOMENT.match(key)
    ]
    spoken = [
        Words(comment, COMMENT)
        for comment in comments
        if re.search(r"(?i)jd|julian|time|date", comment)
    ]
    first = [Words(told, USER), Words(name, NAME), Words(unit, UNIT)]
    # The zero point of space missions' times says by its name what kind of date it belongs to.
    zero = [Words("BJD", "BJDREF of the header")] if {"bjdref", "bjdrefi"} & set(headers) else []
    return tuple(words for words in [*first, *zero, *keyed, *spoken] if words.text)


def kind_said(words: Sequence[Words]) -> tuple[str, str]:
    """The printed kind (a key of `KINDS`, or nothing) and who says it.

    The first one counts; only a plain JD gives way to one that says where the clock stands.
    """
    kind, said = "", ""
    for one in words:
        here = _kind_in(one.text)
        if here and (not kind or (kind == "JD" and KINDS[here][0] != "JD" and said != USER)):
            kind, said = here, one.where
    return kind, said


def _kind_in(text: str) -> str:
    found = _KIND.search(text.upper().replace("_", " "))
    if found:
        return found[1]
    return next((kind for pattern, kind in _LONG_KINDS if pattern.search(text)), "")


def scale_said(words: Sequence[Words]) -> str:
    """The time scale (TDB, UTC ...), or nothing."""
    for one in words:
        pattern = _SPOKEN_SCALE if one.where == COMMENT else _SCALE
        found = pattern.search(re.sub(r"[_()]", " ", one.text.upper()))
        if found:
            return found[1] or found[2]
    return ""


def zero_points(words: Sequence[Words], headers: Mapping[str, str]) -> Iterator[ZeroPoint]:
    """Offsets that the file speaks of, the most trusted first."""
    told = [one for one in words if one.where == USER]
    rest = [one for one in words if one.where != USER]
    for one in told:
        yield from _zero_points_in(one)
    yield from _reference(headers)
    for one in rest:
        yield from _zero_points_in(one)


def _zero_points_in(words: Words) -> Iterator[ZeroPoint]:
    short = _FROM_MJD.search(words.text)
    if short:
        yield ZeroPoint(MJD_ZERO + float(short[1]), f"MJD less {short[1]} by {words.where}")
    found = (_TAKEN_OFF if words.where == COMMENT else _OFFSET).search(words.text)
    if found:
        number = float(next(group for group in found.groups() if group))
        if words.where in (USER, NAME) or (2 * number).is_integer():
            yield ZeroPoint(number, f"offset {number:.10g} by {words.where}")
    kind = _kind_in(words.text)
    implied = KINDS[kind][2] if kind else None
    if implied is not None:
        yield ZeroPoint(implied, f"{kind} means an offset of {implied:.10g}", implied=True)


def _reference(headers: Mapping[str, str]) -> Iterator[ZeroPoint]:
    """Reference dates as FITS headers give them, whole and fraction apart."""
    for kind, zero in (("bjdref", 0.0), ("jdref", 0.0), ("mjdref", MJD_ZERO)):
        whole = _number(headers, kind + "i")
        if whole is None:
            whole = _number(headers, kind)
        if whole is not None:
            offset = whole + (_number(headers, kind + "f") or 0.0) + zero
            yield ZeroPoint(offset, f"offset {offset:.10g} by {kind.upper()} of the header")


def _number(headers: Mapping[str, str], key: str) -> float | None:
    try:
        return float(headers[key])
    except (KeyError, ValueError):
        return None
