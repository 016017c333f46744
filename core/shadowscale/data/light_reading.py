"""From files to the table of photometry: times restored, light linear, every row accounted for."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from shadowscale.data.columns import NOTHING_CHOSEN, Chosen
from shadowscale.data.file_rows import Together, joined_names, read_only, together, too_few
from shadowscale.data.files import FilePath
from shadowscale.data.levels import night_numbers, scaled, with_errors
from shadowscale.data.light_file import MINIMUM_ROWS, LightPart, light_part
from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.data.raw_table import RawTable
from shadowscale.data.rows import Bools, Reasons, path_list, per_file, read_all


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
    return photometry_of(tables, chosen, bands)


def photometry_of(
    tables: Sequence[RawTable], columns: Sequence[Chosen], bands: Sequence[str | None]
) -> Photometry:
    """As `read_photometry`, of tables that were read before; columns and band of each."""
    reasons = Reasons()
    parts = [
        light_part(table, chosen, band, reasons)
        for table, chosen, band in zip(tables, columns, bands, strict=True)
    ]
    return _joined(parts, reasons)


def _joined(parts: list[LightPart], reasons: Reasons) -> Photometry:
    all_files = together([part.rows for part in parts])
    bands, band = joined_names([(part.bands, part.band) for part in parts])

    def ordered(name: str) -> Floats:
        return all_files.ordered([getattr(part, name) for part in parts])

    rows = _Rows(
        time=all_files.ordered([part.rows.time for part in parts]),
        linear=ordered("linear"),
        linear_error=ordered("linear_error"),
        band=band[all_files.order],
        file=all_files.file,
        why=ordered("why").astype(np.int64),
        bands=bands,
    )
    _require_rows(all_files, rows.why, reasons)
    level_notes = _set_levels(rows, parts, reasons)
    _require_rows(all_files, rows.why, reasons)
    repeats = _duplicates(rows.time, rows.band, ordered("value"))
    return read_only(
        Photometry(
            time=rows.time,
            flux=rows.flux,
            flux_error=rows.flux_error,
            band=rows.band,
            night=rows.night,
            file=rows.file,
            line=all_files.ordered([part.rows.line for part in parts]).astype(np.int64),
            value=ordered("value"),
            value_error=ordered("error"),
            why=rows.why,
            bands=bands,
            files=all_files.inputs(rows.why == 0),
            time_scale=all_files.scale,
            magnitudes=all(part.magnitudes for part in parts),
            errors_from_scatter=rows.estimated,
            reasons=tuple(reasons.known),
            unreadable=all_files.unreadable,
            notes=(
                *all_files.notes,
                *all_files.set_aside(rows.why, reasons.known),
                *level_notes,
                *repeats,
            ),
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
        paths=tuple(part.rows.path for part in parts),
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


def _require_rows(files: Together, why: Ints, reasons: Reasons) -> None:
    usable = int(np.count_nonzero(why == 0))
    if usable < MINIMUM_ROWS:
        set_aside = [
            f"{np.count_nonzero(why == code)}: {reasons.known[code]}"
            for code in np.unique(why[why > 0])
        ]
        expected = f"at least {MINIMUM_ROWS} rows that can be used"
        raise too_few(files.files, expected, usable, set_aside=set_aside)


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
