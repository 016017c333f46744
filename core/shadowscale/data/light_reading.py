"""From files to the table of photometry: times restored, light linear, every row accounted for."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import PurePath

import numpy as np

from shadowscale.data.bands import band_name
from shadowscale.data.clocks import Clock, common_scale
from shadowscale.data.columns import Guess, photometry_columns
from shadowscale.data.levels import night_numbers, scaled, with_errors
from shadowscale.data.photometry import Floats, InputFile, Ints, Photometry, UnreadableRow
from shadowscale.data.raw_table import RawTable, coded
from shadowscale.data.rows import (
    Chosen,
    Path,
    Reasons,
    clock_of,
    far_rows,
    input_file,
    notes_of,
    path_list,
    per_file,
    read_all,
    split_rows,
)
from shadowscale.errors import ColumnError, Problem, TableError

MINIMUM_ROWS = 20
NO_BAND = "light"
MOST_BANDS = 40
MOST_FLAGS = 50  # different quality flags that get a reason of their own
NO_MEASUREMENT = 90.0  # [mag] numbers such as 99.999 stand for nothing (common practice)
_FACTORS = {"mmag": 1e-3, "millimag": 1e-3}
_AROUND_ZERO = {"ppm": 1e-6, "ppt": 1e-3, "%": 1e-2, "percent": 1e-2}
_GOOD_WORDS = frozenset({"", "0", "ok", "good", "g", "a", "o", "true", "t", "none", "nan"})


@dataclass
class _Part:
    """The rows of one file."""

    table: RawTable
    guesses: tuple[Guess, ...]
    clock: Clock
    line: Ints
    time: Floats
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
    unreadable: list[UnreadableRow]
    notes: list[str]


def read_photometry(
    paths: Path | Sequence[Path],
    *,
    columns: Chosen | Sequence[Chosen] = {},  # noqa: B006
    band: str | Sequence[str | None] | None = None,
) -> Photometry:
    """Read photometry from one or several files.

    Parameters
    ----------
    paths : path or sequence of paths
        Text tables, FITS binary tables, ECSV or VOTable; each with one band or a column of bands.
    columns : mapping of role to column, or one such mapping a file
        What is not named is guessed (`shadowscale.data.columns`). Columns by name, or by number
        from 1; an empty name means: no such column. Two settings beside the roles: `time_system`
        (`BJD_TDB - 2457000`) and `unit` of the light (`mmag`, `ppm`).
    band : str, or one a file
        The band's name; else from a column, a comment `# band: V`, the light column's name, or the
        file's name (`star_V.csv`).

    Returns
    -------
    Photometry
        In time order; each band scaled to a median of 1; a gap of more than 0.3 d or 20 times the
        usual spacing, whichever is longer, starts a new night.

    Raises
    ------
    TableError
        If a file is no table, or fewer than 20 rows can be used.
    ColumnError
        If a needed column is missing or two could be meant.
    TimeScaleError
        If the files' times do not go together.
    """
    names = path_list(paths)
    tables = read_all(names)
    chosen = per_file(columns, len(names))
    bands = (band,) * len(names) if band is None or isinstance(band, str) else tuple(band)
    if len(bands) != len(names):
        raise ValueError(f"band: {len(names)} files but {len(bands)} bands")
    reasons = Reasons()
    parts = [
        _part(table, columns, band, reasons) for table, columns, band in zip(tables, chosen, bands)
    ]
    return _joined(parts, reasons)


def _part(table: RawTable, columns: Chosen, band: str | None, reasons: Reasons) -> _Part:
    guesses = photometry_columns(table, columns)
    roles = {guess.role: guess for guess in guesses}
    light = roles.get("flux") or roles["mag"]
    numeric = [roles[role] for role in ("time", light.role, "error") if role in roles]
    keep, bad = split_rows(table, numeric, roles["time"])
    clock = clock_of(table, roles["time"], columns)

    def numbers(role: str) -> Floats:
        if role not in roles:
            return np.full(np.count_nonzero(keep), np.nan)
        return table.columns[roles[role].index].numbers[keep]

    part = _Part(
        table=table,
        guesses=guesses,
        clock=clock,
        line=table.line[keep],
        time=numbers("time") + clock.offset,
        value=numbers(light.role),
        error=numbers("error"),
        linear=numbers(light.role),
        linear_error=numbers("error"),
        band=np.zeros(np.count_nonzero(keep), dtype=np.int64),
        bands=(NO_BAND,),
        why=np.zeros(np.count_nonzero(keep), dtype=np.int64),
        exposure=numbers("exposure"),
        airmass=numbers("airmass"),
        magnitudes=light.role == "mag",
        unreadable=[*table.unreadable, *bad],
        notes=notes_of(table, clock),
    )
    _set_units(part, str(columns.get("unit", light.unit)))
    _set_bands(part, roles.get("band"), keep, band, light)
    _set_aside(part, reasons)
    _set_quality(part, roles.get("quality"), keep, reasons)
    return part


def _set_units(part: _Part, unit: str) -> None:
    word = unit.strip().lower()
    if part.magnitudes:
        part.linear = part.value * _FACTORS.get(word, 1.0)
        part.linear_error = part.error * _FACTORS.get(word, 1.0)
        return
    factor = _AROUND_ZERO.get(word)
    if factor is not None and abs(_median(part.value)) * factor < 0.5:
        part.linear = 1.0 + part.value * factor
        part.linear_error = part.error * factor
        part.notes.append(f"{part.table.path}: flux in {word} around zero is taken as 1 + value")


def _median(values: Floats) -> float:
    finite = values[np.isfinite(values)]
    return float(np.median(finite)) if len(finite) else 0.0


def _set_bands(
    part: _Part, guess: Guess | None, keep: np.ndarray, band: str | None, light: Guess
) -> None:
    default, why = (band, "by the user") if band is not None else _band_of(part.table, light)
    part.bands = (default,)
    if band is None and guess is not None:
        column = part.table.columns[guess.index]
        words = [column.cell(int(row)) or default for row in np.flatnonzero(keep)]
        part.bands, part.band = coded(words)
        if len(part.bands) > MOST_BANDS:
            found = f"{len(part.bands)} different words"
            raise ColumnError(
                Problem(part.table.path, "the names of some bands", found, column=column.name)
            )
    elif why:
        part.notes.append(f"{part.table.path}: band {default} {why}")


def _band_of(table: RawTable, light: Guess) -> tuple[str, str]:
    """The band of a whole file, and what says so."""
    for key in ("band", "filter", "passband", "filt"):
        if table.headers.get(key, "").strip():
            return table.headers[key].strip(" '\""), f"by the comment {key!r}"
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


def _band_word(column: str) -> str:
    """The band in a column's name such as `V`, `Vmag`, `mag_V`, `flux (R)`."""
    words = [
        column.strip(),
        *column.replace("(", "_").replace(")", "").replace(" ", "_").split("_"),
    ]
    words += [words[0][:-3]] if words[0].lower().endswith("mag") else []
    for word in words:
        if (
            word
            and word.lower()
            not in (
                "none",
                "open",
                "c",
                "e",
                "flux",
                "mag",
                "m",
                "l",
                "white",
            )
            and band_name(word) is not None
        ):
            return word
    return ""


def _set_aside(part: _Part, reasons: Reasons) -> None:
    value = part.linear
    far = far_rows(part.table.path, part.time, part.line)
    zero = value == 0 if not part.magnitudes else np.zeros(len(value), dtype=bool)
    sentinel = np.abs(value) >= NO_MEASUREMENT if part.magnitudes else np.zeros(len(value), bool)
    for rows, reason in (
        (np.isnan(value), "no measurement"),
        (np.isinf(value), "the value is not finite"),
        (sentinel, "the magnitude stands for no measurement"),
        (zero, "the flux is exactly zero"),
        (far, "the time is far from all others"),
    ):
        _mark(part, rows, reason, reasons)


def _mark(part: _Part, rows: np.ndarray, reason: str, reasons: Reasons) -> None:
    if np.any(rows):
        part.why = np.where(rows & (part.why == 0), reasons.number(reason), part.why)


def _set_quality(part: _Part, guess: Guess | None, keep: np.ndarray, reasons: Reasons) -> None:
    if guess is None:
        return
    column = part.table.columns[guess.index]
    words = [_flag(column.cell(int(row))) for row in np.flatnonzero(keep)]
    labels, codes = coded(words)
    good = np.isin(codes, [k for k, word in enumerate(labels) if word.lower() in _GOOD_WORDS])
    open_rows = part.why == 0
    left = np.count_nonzero(good & open_rows)
    if left < max(MINIMUM_ROWS, 0.1 * np.count_nonzero(open_rows)):
        part.notes.append(
            f"{part.table.path}: column {column.name!r} would set aside all but {left} rows, so it is not used"
        )
        return
    common = dict(Counter(word for word in words).most_common(MOST_FLAGS))
    for code, word in enumerate(labels):
        if word.lower() not in _GOOD_WORDS and word in common:
            _mark(part, codes == code, f"quality flag {word}", reasons)
    _mark(part, ~good, "quality flag, one of many", reasons)


def _flag(cell: str) -> str:
    try:
        number = float(cell)
    except ValueError:
        return cell
    return str(int(number)) if number.is_integer() else cell


def _joined(parts: list[_Part], reasons: Reasons) -> Photometry:
    time = np.concatenate([part.time for part in parts])
    order = np.argsort(time, kind="stable")
    bands, band = _all_bands(parts)
    file = np.repeat(np.arange(len(parts)), [len(part.time) for part in parts])

    def ordered(name: str) -> Floats:
        return np.asarray(np.concatenate([getattr(part, name) for part in parts])[order])

    time, band, file = time[order], band[order], file[order]
    why = ordered("why").astype(np.int64)
    _require_rows(parts, why, reasons)
    magnitudes = np.array([part.magnitudes for part in parts])
    flux, error, notes = scaled(
        ordered("linear"),
        ordered("linear_error"),
        band=band,
        file=file,
        used=why == 0,
        bands=bands,
        magnitudes=magnitudes,
        paths=tuple(part.table.path for part in parts),
    )
    not_finite = (why == 0) & ~np.isfinite(flux)
    if np.any(not_finite):
        why[not_finite] = reasons.number("the value is not finite")
    night = night_numbers(time, band)
    estimate = with_errors(flux, error, night=night, band=band, file=file, used=why == 0)
    lacking = (why == 0) & ~estimate.usable
    if np.any(lacking):
        why[lacking] = reasons.number("the error is missing, zero or negative")
    _require_rows(parts, why, reasons)
    scale, more = common_scale(
        [(part.table.path, part.clock, _median(part.time)) for part in parts]
    )
    used = [np.count_nonzero((why == 0) & (file == k)) for k in range(len(parts))]
    estimated = tuple(bool(estimate.estimated[k]) for k in range(len(bands)))
    notes = [*(note for part in parts for note in part.notes), *more, *notes]
    notes += [f"band {b}: errors are missing and estimated from the scatter" for b, e in zip(bands, estimated) if e]  # fmt: skip
    notes += _duplicates(time, band, ordered("value"))
    return _read_only(
        Photometry(
            time=time,
            flux=flux,
            flux_error=estimate.error,
            band=band,
            night=night,
            file=file.astype(np.int64),
            line=ordered("line").astype(np.int64),
            value=ordered("value"),
            value_error=ordered("error"),
            why=why,
            bands=bands,
            files=_files(parts, used),
            time_scale=scale,
            magnitudes=bool(np.all(magnitudes)),
            errors_from_scatter=estimated,
            reasons=tuple(reasons.known),
            unreadable=tuple(row for part in parts for row in part.unreadable),
            notes=tuple(notes),
            exposure=ordered("exposure"),
            airmass=ordered("airmass"),
        )
    )


def _files(parts: list[_Part], used: list[int]) -> tuple[InputFile, ...]:
    return tuple(
        input_file(part.table, part.guesses, part.clock, count) for part, count in zip(parts, used)
    )


def _read_only(photometry: Photometry) -> Photometry:
    for value in vars(photometry).values():
        if isinstance(value, np.ndarray):
            value.setflags(write=False)
    return photometry


def _all_bands(parts: list[_Part]) -> tuple[tuple[str, ...], Ints]:
    """Bands of all files, those with rows, and each row's band in them."""
    names: list[str] = []
    rows = []
    for part in parts:
        present = [name for k, name in enumerate(part.bands) if np.any(part.band == k)]
        names += [name for name in present if name not in names]
        places = np.array([names.index(n) if n in names else 0 for n in part.bands], np.int64)
        rows.append(places[part.band] if len(part.band) else part.band)
    return tuple(names), np.concatenate(rows)


def _require_rows(parts: list[_Part], why: Ints, reasons: Reasons) -> None:
    usable = np.count_nonzero(why == 0)
    if usable >= MINIMUM_ROWS:
        return
    total = sum(part.table.rows for part in parts)
    what = [
        f"{np.count_nonzero(why == code)}: {reasons.known[code]}"
        for code in np.unique(why[why > 0])
    ]
    unreadable = [row for part in parts for row in part.unreadable]
    if unreadable:
        what.append(
            f"{len(unreadable)} unreadable, first in line {unreadable[0].line}: {unreadable[0].reason}"
        )
    found = f"{usable} of {total}" + (f" ({'; '.join(what)})" if what else "")
    path = ", ".join(part.table.path for part in parts)
    raise TableError(Problem(path, f"at least {MINIMUM_ROWS} rows that can be used", found))


def _duplicates(time: Floats, band: Ints, value: Floats) -> list[str]:
    """A note on rows that repeat time, band and value of another."""
    order = np.lexsort((value, band, time))
    same = np.ones(max(len(time) - 1, 0), dtype=bool)
    for column in (time, band, value):
        same &= np.diff(column[order]) == 0
    number = int(np.count_nonzero(same))
    if not number:
        return []
    return [f"{number} rows repeat the time, band and value of another row; all are used"]
