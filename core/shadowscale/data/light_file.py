"""One file of photometry: which rows count, their light, band and quality, before levels are set."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import PurePath

import numpy as np

from shadowscale.data.bands import band_name
from shadowscale.data.columns import Chosen, Guess
from shadowscale.data.file_rows import FileRows, file_rows
from shadowscale.data.light_columns import photometry_columns
from shadowscale.data.photometry import Floats, Ints
from shadowscale.data.raw_table import RawTable
from shadowscale.data.rows import Bools, Reasons, middle
from shadowscale.errors import ColumnError, Problem, UnitError

MINIMUM_ROWS = 20
NO_BAND = "light"
MOST_BANDS = 40
MOST_FLAGS = 50  # different quality flags that get a reason of their own
NO_MEASUREMENT = 90.0  # [mag] numbers such as 99.999 stand for nothing (common practice)
_FACTORS = {"mmag": 1e-3, "millimag": 1e-3}
_AROUND_ZERO = {"ppm": 1e-6, "ppt": 1e-3, "%": 1e-2, "percent": 1e-2}
_IN_SECONDS = {"d": 86400.0, "day": 86400.0, "h": 3600.0, "hour": 3600.0, "min": 60.0, "m": 1e-3}
_FOREIGN = re.compile(r"^(k?m\s*/\s*s|km s-1|deg|rad|arcsec|d|days?|s|pix(els?)?|k|nm|m|h|min)$")
_NO_BAND_WORDS = frozenset({"", "none", "open", "c", "e", "m", "l", "white"})
_GOOD_WORDS = frozenset({"", "0", "ok", "good", "g", "a", "o", "true", "t", "none", "nan"})


@dataclass
class LightPart:
    """The rows of one file, with their light."""

    rows: FileRows
    value: Floats
    error: Floats
    linear: Floats  # magnitudes in mag, or flux around its level
    linear_error: Floats
    band: Ints
    bands: tuple[str, ...]
    why: Ints
    exposure: Floats
    airmass: Floats
    magnitudes: bool


def light_part(table: RawTable, columns: Chosen, band: str | None, reasons: Reasons) -> LightPart:
    """The rows of one file, with everything in its place but levels and estimated errors."""
    guesses = photometry_columns(table, columns)
    rows = file_rows(table, guesses, columns, numeric=("time", "mag", "flux", "error"))
    light = "flux" if "flux" in rows.roles else "mag"
    value, error = rows.numbers(light), rows.numbers("error")
    part = LightPart(
        rows=rows,
        value=value,
        error=error,
        linear=value,
        linear_error=error,
        band=np.zeros(rows.count, dtype=np.int64),
        bands=(NO_BAND,),
        why=np.zeros(rows.count, dtype=np.int64),
        exposure=rows.numbers("exposure") * _seconds(rows.roles.get("exposure")),
        airmass=rows.numbers("airmass"),
        magnitudes=light == "mag",
    )
    _set_units(part, rows.roles[light], str(columns.get("unit", "")))
    _set_bands(part, told=band)
    _set_aside(part, reasons)
    _set_quality(part, reasons)
    return part


def _seconds(exposure: Guess | None) -> float:
    """One unit of the column of exposures [s]."""
    word = "" if exposure is None else _plain_unit(exposure.unit).rstrip("s.")
    return _IN_SECONDS.get(word, 1.0)


def _set_units(part: LightPart, light: Guess, told: str) -> None:
    word = _plain_unit(told or light.unit)
    if _FOREIGN.match(word):
        found = told or light.unit
        raise UnitError(
            Problem(part.rows.path, "magnitudes or flux", f"the unit {found}", column=light.column)
        )
    if part.magnitudes:
        error = part.rows.roles.get("error")
        own = _plain_unit(error.unit) if error is not None and not told else ""
        factor = _FACTORS.get(word, 1.0)
        part.linear = part.value * factor
        part.linear_error = part.error * _FACTORS.get(own, factor)
        return
    around_zero = _AROUND_ZERO.get(word)
    if around_zero is not None and abs(middle(part.value)) * around_zero < 0.5:
        part.linear = 1.0 + part.value * around_zero
        part.linear_error = part.error * around_zero
        part.rows.note(f"flux in {word} around zero is taken as 1 + value")


def _plain_unit(unit: str) -> str:
    return unit.strip().lower()


def _set_bands(part: LightPart, *, told: str | None) -> None:
    rows = part.rows
    part.bands, codes, why = _bands(rows.table, rows.keep, roles=rows.roles, told=told)
    if codes is not None:
        part.band = codes
    if why:
        rows.note(f"band {part.bands[0]} {why}")


def bands_of_head(
    table: RawTable, keep: Bools, *, roles: Mapping[str, Guess], told: str | None
) -> tuple[str, ...]:
    """The bands of the rows `keep` (n, bool), for a table of which only the head was read."""
    bands, codes, _ = _bands(table, keep, roles=roles, told=told)
    return bands if codes is None else tuple(bands[code] for code in np.unique(codes))


def _bands(
    table: RawTable, keep: Bools, *, roles: Mapping[str, Guess], told: str | None
) -> tuple[tuple[str, ...], Ints | None, str]:
    """Names of bands, each row's place among them (None: one for all), what the one comes from."""
    if told is not None:
        return (told,), None, ""
    light = roles.get("flux") or roles["mag"]
    default, why = _band_of(table, light)
    if "band" not in roles:
        return (default,), None, why
    column = table.columns[roles["band"].index]
    labels, codes = column.words(keep)
    if len(labels) > MOST_BANDS:
        found = f"{len(labels)} different words"
        raise ColumnError(Problem(table.path, "the names of some bands", found, column=column.name))
    return tuple(label or default for label in labels), codes, ""


def _band_of(table: RawTable, light: Guess) -> tuple[str, str]:
    """The band of a whole file, and what says so."""
    for key in ("band", "filter", "passband", "filt"):
        if table.headers.get(key, "").strip():
            return _unquoted(table.headers[key]), f"by the comment {key!r}"
    for key in ("telescop", "mission", "instrume"):
        named = band_name(table.headers.get(key, "").strip(" '\""))
        if named in ("TESS", "Kepler", "CoRoT", "CHEOPS"):
            return named, f"by the header's {key.upper()}"
    if table.named:
        word = _band_word(light.column)
        if word:
            return word, f"by the column's name {light.column!r}"
    stem = PurePath(table.path).name.split(".")[0]
    last = stem.replace("-", "_").replace(" ", "_").split("_")
    if len(last) > 1 and band_name(last[-1]) is not None:
        return last[-1], "by the file's name"
    return NO_BAND, ""


def _unquoted(text: str) -> str:
    """Without the pair of quotes around it; a prime behind a name (r') stays."""
    text = text.strip()
    return text[1:-1] if len(text) > 2 and text[0] == text[-1] and text[0] in "'\"" else text


def _band_word(column: str) -> str:
    """The band in a column's name such as `V`, `Vmag`, `mag_V`, `flux (R)`."""
    words = [
        column.strip(),
        *column.replace("(", "_").replace(")", "").replace(" ", "_").split("_"),
    ]
    words += [words[0][:-3]] if words[0].lower().endswith("mag") else []
    for word in words:
        if word.lower() not in _NO_BAND_WORDS and band_name(word) is not None:
            return word
    return ""


def _set_aside(part: LightPart, reasons: Reasons) -> None:
    value = part.linear
    zero = value == 0 if not part.magnitudes else np.zeros(len(value), dtype=bool)
    sentinel = np.abs(value) >= NO_MEASUREMENT if part.magnitudes else np.zeros(len(value), bool)
    for rows, reason in (
        (np.isnan(value), "no measurement"),
        (np.isinf(value), "the value is not finite"),
        (sentinel, "the magnitude stands for no measurement"),
        (zero, "the flux is exactly zero"),
    ):
        _mark(part, rows, reason, reasons)


def _mark(part: LightPart, rows: Bools, reason: str, reasons: Reasons) -> None:
    rows = rows & (part.why == 0)
    if np.any(rows):
        part.why = np.where(rows, reasons.number(reason), part.why)


def _set_quality(part: LightPart, reasons: Reasons) -> None:
    if "quality" not in part.rows.roles:
        return
    column = part.rows.table.columns[part.rows.roles["quality"].index]
    labels, codes = column.words(part.rows.keep)
    good = np.isin(codes, [k for k, word in enumerate(labels) if word.lower() in _GOOD_WORDS])
    open_rows = part.why == 0
    left = np.count_nonzero(good & open_rows)
    if left < max(MINIMUM_ROWS, 0.1 * np.count_nonzero(open_rows)):
        part.rows.note(
            f"column {column.name!r} would set aside all but {left} rows, so it is not used"
        )
        return
    for code, _ in Counter(codes[~good].tolist()).most_common(MOST_FLAGS):
        _mark(part, codes == code, f"quality flag {labels[code]}", reasons)
    _mark(part, ~good, "a rare quality flag", reasons)
