"""From files to the table of radial velocities: times restored, km/s, every row accounted for."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import PurePath

import numpy as np

from shadowscale.data.columns import NOTHING_CHOSEN, Chosen, Guess
from shadowscale.data.file_rows import (
    FileRows,
    Together,
    file_rows,
    joined_names,
    read_only,
    together,
    too_few,
)
from shadowscale.data.files import FilePath
from shadowscale.data.photometry import Floats, Ints
from shadowscale.data.raw_table import RawTable
from shadowscale.data.rows import Reasons, path_list, per_file, read_all
from shadowscale.data.velocities import NO_MEASUREMENT, Velocities
from shadowscale.data.velocity_columns import velocity_columns
from shadowscale.errors import Problem, UnitError

NUMERIC = ("time", "rv1", "rv1_err", "rv2", "rv2_err")
MINIMUM = 3  # velocities of either star
TOO_FAST = 3000.0  # [km/s] more must be m/s: detached stars move at some 100 km/s
_UNITS = {"km/s": 1.0, "kms-1": 1.0, "m/s": 1e-3, "ms-1": 1e-3}


@dataclass
class _Part:
    """The rows of one file; velocities in km/s, index 0 and 1 for stars 1 and 2."""

    rows: FileRows
    velocity: list[Floats]
    error: list[Floats]
    why: list[Ints]
    source: Ints
    sources: tuple[str, ...]
    from_scatter: bool = False


def read_velocities(
    paths: FilePath | Sequence[FilePath],
    *,
    columns: Chosen | Sequence[Chosen] = NOTHING_CHOSEN,
) -> Velocities:
    """Read radial velocities from one or several files.

    Parameters
    ----------
    paths : path or sequence of paths
        Text tables, FITS binary tables, ECSV or VOTable.
    columns : mapping of role to column, or one such mapping a file
        Roles `time rv1 rv1_err rv2 rv2_err source`; what is not named is guessed. Settings beside
        them: `time_system` and `unit` (`km/s` or `m/s`).

    Returns
    -------
    Velocities
        In time order, km/s. Without errors all have 1 km/s and `errors_from_scatter` is set: the
        fit then has to scale them.

    Raises
    ------
    TableError
        If a file is no table, or fewer than 3 velocities can be used.
    ColumnError, UnitError, TimeScaleError
        If the columns, their unit or the times cannot be understood.
    """
    names = path_list(paths)
    chosen = per_file(columns, len(names))
    tables = read_all(names, chosen)
    reasons = Reasons(["used", NO_MEASUREMENT])
    parts = [_part(table, columns, reasons) for table, columns in zip(tables, chosen)]
    return _joined(parts, reasons)


def _part(table: RawTable, columns: Chosen, reasons: Reasons) -> _Part:
    rows = file_rows(table, velocity_columns(table, columns), columns, numeric=NUMERIC)
    part = _Part(
        rows=rows,
        velocity=[rows.numbers("rv1"), rows.numbers("rv2")],
        error=[rows.numbers("rv1_err"), rows.numbers("rv2_err")],
        why=[np.zeros(rows.count, np.int64), np.zeros(rows.count, np.int64)],
        source=np.zeros(rows.count, np.int64),
        sources=(PurePath(table.path).name.split(".")[0] or "velocities",),
    )
    _set_units(part, str(columns.get("unit", "")))
    _set_sources(part)
    _set_aside(part, reasons)
    return part


def _set_units(part: _Part, told: str) -> None:
    """Everything in km/s; without a unit the size of the numbers of both stars decides."""
    fallback = told or part.rows.table.headers.get("unit", "")
    without = _guessed_factor(part) if _plain(fallback) not in _UNITS else _UNITS[_plain(fallback)]
    for star in (0, 1):
        guess = part.rows.roles.get(f"rv{star + 1}")
        if guess is None:
            continue
        factor = _factor(part, guess, told=told, without=without)
        error = part.rows.roles.get(f"rv{star + 1}_err")
        part.velocity[star] = part.velocity[star] * factor
        if error is not None:
            part.error[star] *= _factor(part, error, told=told, without=factor)


def _plain(unit: str) -> str:
    return re.sub(r"[\s*^]", "", unit).lower()


def _factor(part: _Part, guess: Guess, *, told: str, without: float) -> float:
    """From the printed unit to km/s, `without` where none is printed."""
    if re.search(r"[_ ](ms|mps)$", guess.column.lower()) and not told:
        return 1e-3
    unit = _plain(told or guess.unit)
    if unit in _UNITS:
        return _UNITS[unit]
    if told or _foreign(unit):
        found = told or guess.unit
        raise UnitError(Problem(part.rows.path, "km/s or m/s", found, column=guess.column))
    return without


def _guessed_factor(part: _Part) -> float:
    speeds = np.abs(np.concatenate(part.velocity))
    speeds = speeds[np.isfinite(speeds)]
    if not len(speeds) or float(np.max(speeds)) <= TOO_FAST:
        return 1.0
    if float(np.percentile(speeds, 90)) <= TOO_FAST:
        return 1.0  # a few wild numbers only
    part.rows.note("the numbers are too fast for km/s and taken as m/s")
    return 1e-3


def _foreign(unit: str) -> bool:
    return unit in {"cm/s", "km/h", "au/d", "pc/myr", "d", "mag", "km", "m", "s"}


def _set_sources(part: _Part) -> None:
    guess = part.rows.roles.get("source")
    if guess is not None:
        column = part.rows.table.columns[guess.index]
        labels, part.source = column.words(part.rows.keep)
        part.sources = tuple(label or part.sources[0] for label in labels)


def _set_aside(part: _Part, reasons: Reasons) -> None:
    no_errors = not any(np.any(error > 0) for error in part.error)
    if no_errors:
        part.from_scatter = True
        part.error = [np.ones(part.rows.count), np.ones(part.rows.count)]
        part.rows.note("no errors; all velocities are given 1 km/s")
    for star in (0, 1):
        velocity, error, why = part.velocity[star], part.error[star], part.why[star]
        missing = np.isnan(velocity)
        error[missing] = np.nan
        for rows, reason in (
            (missing, NO_MEASUREMENT),
            (np.isinf(velocity), "the velocity is not finite"),
            (~(np.isfinite(error) & (error > 0)), "the error is missing, zero or negative"),
        ):
            if np.any(rows & (why == 0)):
                why[rows & (why == 0)] = reasons.number(reason)


def _joined(parts: list[_Part], reasons: Reasons) -> Velocities:
    all_files = together([part.rows for part in parts])
    sources, source = joined_names([(part.sources, part.source) for part in parts])

    def ordered(name: str, star: int) -> Floats:
        return all_files.ordered([getattr(part, name)[star] for part in parts])

    why1, why2 = (ordered("why", star).astype(np.int64) for star in (0, 1))
    usable = int(np.count_nonzero(why1 == 0) + np.count_nonzero(why2 == 0))
    if usable < MINIMUM:
        raise too_few(all_files.files, f"at least {MINIMUM} velocities that can be used", usable)
    return read_only(
        Velocities(
            time=all_files.ordered([part.rows.time for part in parts]),
            rv1=ordered("velocity", 0),
            rv1_error=ordered("error", 0),
            rv2=ordered("velocity", 1),
            rv2_error=ordered("error", 1),
            source=source[all_files.order],
            file=all_files.file,
            line=all_files.ordered([part.rows.line for part in parts]),
            why1=why1,
            why2=why2,
            sources=sources,
            files=all_files.inputs((why1 == 0) | (why2 == 0)),
            time_scale=all_files.scale,
            errors_from_scatter=any(part.from_scatter for part in parts),
            reasons=tuple(reasons.known),
            unreadable=all_files.unreadable,
            notes=(*all_files.notes, *_set_aside_notes(all_files, (why1, why2), reasons)),
        )
    )


def _set_aside_notes(files: Together, why: tuple[Ints, Ints], reasons: Reasons) -> tuple[str, ...]:
    """What takes no part; a star that was not measured is no trouble."""
    missing = reasons.number(NO_MEASUREMENT)
    notes: list[str] = []
    for star, codes in enumerate(why, start=1):
        told = np.where(codes == missing, 0, codes)
        found = files.set_aside(
            told, reasons.known, of=(f"velocity of star {star}", f"velocities of star {star}")
        )
        notes += [note for note in found if note not in notes]
    return tuple(notes)
