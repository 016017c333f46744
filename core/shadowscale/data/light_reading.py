"""From files to the table of photometry: times restored, light linear, every row accounted for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from shadowscale.data.clocks import common_scale
from shadowscale.data.columns import NOTHING_CHOSEN, Chosen
from shadowscale.data.files import FilePath
from shadowscale.data.levels import night_numbers, scaled, with_errors
from shadowscale.data.light_file import MINIMUM_ROWS, LightPart, light_part
from shadowscale.data.photometry import Floats, InputFile, Ints, Photometry
from shadowscale.data.rows import (
    Bools,
    Reasons,
    input_file,
    middle,
    path_list,
    per_file,
    read_all,
)
from shadowscale.errors import Problem, TableError


def read_photometry(
    paths: FilePath | Sequence[FilePath],
    *,
    columns: Chosen | Sequence[Chosen] = NOTHING_CHOSEN,
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
    chosen = per_file(columns, len(names))
    tables = read_all(names, chosen)
    bands = (band,) * len(names) if band is None or isinstance(band, str) else tuple(band)
    if len(bands) != len(names):
        raise ValueError(f"band: {len(names)} files but {len(bands)} bands")
    reasons = Reasons()
    parts = [
        light_part(table, columns, band, reasons)
        for table, columns, band in zip(tables, chosen, bands)
    ]
    return _joined(parts, reasons)


def _joined(parts: list[LightPart], reasons: Reasons) -> Photometry:
    order = np.argsort(np.concatenate([part.time for part in parts]), kind="stable")
    file = np.repeat(np.arange(len(parts)), [len(part.time) for part in parts])[order]
    bands, band = _all_bands(parts)

    def ordered(name: str) -> Floats:
        return np.asarray(np.concatenate([getattr(part, name) for part in parts])[order])

    rows = _Rows(
        time=ordered("time"),
        linear=ordered("linear"),
        linear_error=ordered("linear_error"),
        band=band[order],
        file=file.astype(np.int64),
        why=ordered("why").astype(np.int64),
        bands=bands,
    )
    _require_rows(parts, rows.why, reasons)
    level_notes = _set_levels(rows, parts, reasons)
    _require_rows(parts, rows.why, reasons)
    scale, scale_notes = common_scale(
        [(part.table.path, part.clock, middle(part.time)) for part in parts]
    )
    notes = [note for part in parts for note in part.notes]
    notes += [*scale_notes, *level_notes, *_duplicates(rows.time, rows.band, ordered("value"))]
    return _read_only(
        Photometry(
            time=rows.time,
            flux=rows.flux,
            flux_error=rows.flux_error,
            band=rows.band,
            night=rows.night,
            file=rows.file,
            line=ordered("line").astype(np.int64),
            value=ordered("value"),
            value_error=ordered("error"),
            why=rows.why,
            bands=bands,
            files=_files(parts, rows),
            time_scale=scale,
            magnitudes=all(part.magnitudes for part in parts),
            errors_from_scatter=rows.estimated,
            reasons=tuple(reasons.known),
            unreadable=tuple(row for part in parts for row in part.unreadable),
            notes=tuple(notes),
            exposure=ordered("exposure"),
            airmass=ordered("airmass"),
        )
    )


@dataclass
class _Rows:
    """The rows of all files in time order, while levels and errors are being set."""

    time: Floats
    linear: Floats
    linear_error: Floats
    band: Ints
    file: Ints
    why: Ints
    bands: tuple[str, ...]
    flux: Floats = field(default_factory=lambda: np.empty(0))
    flux_error: Floats = field(default_factory=lambda: np.empty(0))
    night: Ints = field(default_factory=lambda: np.empty(0, np.int64))
    estimated: tuple[bool, ...] = ()


def _set_levels(rows: _Rows, parts: list[LightPart], reasons: Reasons) -> list[str]:
    """Flux with each band near 1, nights, and errors where the files have none; notes on all that."""
    rows.flux, error, notes = scaled(
        rows.linear,
        rows.linear_error,
        band=rows.band,
        file=rows.file,
        used=rows.why == 0,
        bands=rows.bands,
        magnitudes=np.array([part.magnitudes for part in parts]),
        paths=tuple(part.table.path for part in parts),
    )
    _set_aside(rows, ~np.isfinite(rows.flux), "the value is not finite", reasons)
    rows.night = night_numbers(rows.time, rows.band)
    used = rows.why == 0
    found = with_errors(
        rows.flux, error, night=rows.night, band=rows.band, file=rows.file, used=used
    )
    rows.flux_error = found.error
    _set_aside(rows, ~found.usable, "the error is missing, zero or negative", reasons)
    rows.estimated = tuple(found.estimated[k] for k in range(len(rows.bands)))
    return notes + [
        f"band {band}: errors are missing and estimated from the scatter"
        for band, estimated in zip(rows.bands, rows.estimated)
        if estimated
    ]


def _set_aside(rows: _Rows, which: Bools, reason: str, reasons: Reasons) -> None:
    which = which & (rows.why == 0)
    if np.any(which):
        rows.why[which] = reasons.number(reason)


def _files(parts: list[LightPart], rows: _Rows) -> tuple[InputFile, ...]:
    used = [int(np.count_nonzero((rows.why == 0) & (rows.file == k))) for k in range(len(parts))]
    return tuple(
        input_file(part.table, part.guesses, part.clock, count) for part, count in zip(parts, used)
    )


def _read_only(photometry: Photometry) -> Photometry:
    for value in vars(photometry).values():
        if isinstance(value, np.ndarray):
            value.setflags(write=False)
    return photometry


def _all_bands(parts: list[LightPart]) -> tuple[tuple[str, ...], Ints]:
    """Bands of all files, those with rows, and each row's band in them."""
    names: list[str] = []
    rows = []
    for part in parts:
        present = [name for k, name in enumerate(part.bands) if np.any(part.band == k)]
        names += [name for name in present if name not in names]
        places = np.array([names.index(n) if n in names else 0 for n in part.bands], np.int64)
        rows.append(places[part.band] if len(part.band) else part.band)
    return tuple(names), np.concatenate(rows)


def _require_rows(parts: list[LightPart], why: Ints, reasons: Reasons) -> None:
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
    together = np.flatnonzero(np.diff(time) == 0)
    near = np.union1d(together, together + 1)
    order = near[np.lexsort((value[near], band[near], time[near]))]
    same = np.ones(max(len(order) - 1, 0), dtype=bool)
    for column in (time, band, value):
        same &= np.diff(column[order]) == 0
    number = int(np.count_nonzero(same))
    if not number:
        return []
    return [f"{number} rows repeat the time, band and value of another row; all are used"]
