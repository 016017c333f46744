"""From files to the table of radial velocities: times restored, km/s, every row accounted for."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import PurePath

import numpy as np

from shadowscale.data.clocks import Clock, common_scale
from shadowscale.data.columns import NOTHING_CHOSEN, Chosen, Guess
from shadowscale.data.files import FilePath
from shadowscale.data.photometry import Floats, Ints, UnreadableRow
from shadowscale.data.raw_table import RawTable
from shadowscale.data.rows import (
    Bools,
    Reasons,
    clock_of,
    input_file,
    notes_of,
    path_list,
    per_file,
    read_all,
    split_rows,
)
from shadowscale.data.velocities import NO_MEASUREMENT, Velocities
from shadowscale.data.velocity_columns import velocity_columns
from shadowscale.errors import Problem, TableError, UnitError

MINIMUM = 3  # velocities of either star
TOO_FAST = 3000.0  # [km/s] more must be m/s: detached stars move at some 100 km/s
_UNITS = {"km/s": 1.0, "kms-1": 1.0, "m/s": 1e-3, "ms-1": 1e-3}


@dataclass
class _Part:
    """The rows of one file; velocities in km/s, index 0 and 1 for stars 1 and 2."""

    table: RawTable
    guesses: tuple[Guess, ...]
    clock: Clock
    line: Ints
    time: Floats
    velocity: list[Floats]
    error: list[Floats]
    why: list[Ints]
    source: Ints
    sources: tuple[str, ...]
    unreadable: list[UnreadableRow]
    notes: list[str]
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
    guesses = velocity_columns(table, columns)
    roles = {guess.role: guess for guess in guesses}
    numeric = [guess for guess in guesses if guess.role != "source"]
    clock = clock_of(table, roles["time"], columns)
    keep, bad = split_rows(table, numeric, time=roles["time"], clock=clock)
    count = int(np.count_nonzero(keep))

    def numbers(role: str) -> Floats:
        if role not in roles:
            return np.full(count, np.nan)
        return np.asarray(table.columns[roles[role].index].numbers[keep])

    part = _Part(
        table=table,
        guesses=guesses,
        clock=clock,
        line=table.line[keep],
        time=clock.full(numbers("time")),
        velocity=[numbers("rv1"), numbers("rv2")],
        error=[numbers("rv1_err"), numbers("rv2_err")],
        why=[np.zeros(count, np.int64), np.zeros(count, np.int64)],
        source=np.zeros(count, np.int64),
        sources=(PurePath(table.path).name.split(".")[0] or "velocities",),
        unreadable=[*table.unreadable, *bad],
        notes=notes_of(table, clock),
    )
    _set_units(part, roles, str(columns.get("unit", "")))
    _set_sources(part, roles.get("source"), keep)
    _set_aside(part, reasons)
    return part


def _set_units(part: _Part, roles: dict[str, Guess], told: str) -> None:
    """Everything in km/s; without a unit the size of the numbers of both stars decides."""
    fallback = told or part.table.headers.get("unit", "")
    without = _guessed_factor(part) if _plain(fallback) not in _UNITS else _UNITS[_plain(fallback)]
    for star in (0, 1):
        guess = roles.get(f"rv{star + 1}")
        if guess is None:
            continue
        factor = _factor(part, guess, told=told, without=without)
        error = roles.get(f"rv{star + 1}_err")
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
        raise UnitError(Problem(part.table.path, "km/s or m/s", found, column=guess.column))
    return without


def _guessed_factor(part: _Part) -> float:
    speeds = np.abs(np.concatenate(part.velocity))
    speeds = speeds[np.isfinite(speeds)]
    if not len(speeds) or float(np.max(speeds)) <= TOO_FAST:
        return 1.0
    if float(np.percentile(speeds, 90)) <= TOO_FAST:
        return 1.0  # a few wild numbers only
    part.notes.append(f"{part.table.path}: the numbers are too fast for km/s and taken as m/s")
    return 1e-3


def _foreign(unit: str) -> bool:
    return unit in {"cm/s", "km/h", "au/d", "pc/myr", "d", "mag", "km", "m", "s"}


def _set_sources(part: _Part, guess: Guess | None, keep: Bools) -> None:
    if guess is not None:
        column = part.table.columns[guess.index]
        labels, part.source = column.words(keep)
        part.sources = tuple(label or part.sources[0] for label in labels)


def _set_aside(part: _Part, reasons: Reasons) -> None:
    no_errors = not any(np.any(error > 0) for error in part.error)
    if no_errors:
        part.from_scatter = True
        part.error = [np.ones(len(part.time)), np.ones(len(part.time))]
        part.notes.append(f"{part.table.path}: no errors; all velocities are given 1 km/s")
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
    time = np.concatenate([part.time for part in parts])
    order = np.argsort(time, kind="stable")
    file = np.repeat(np.arange(len(parts)), [len(part.time) for part in parts])[order]
    sources, source = _all_sources(parts)

    def ordered(name: str, star: int) -> np.ndarray:
        return np.asarray(np.concatenate([getattr(part, name)[star] for part in parts])[order])

    why = [ordered("why", star) for star in (0, 1)]
    _require_rows(parts, why)
    scale, more = common_scale(
        [
            (part.table.path, part.clock, float(np.median(part.time)))
            for part in parts
            if len(part.time)
        ]
    )
    taking_part = (why[0] == 0) | (why[1] == 0)
    used = [int(np.count_nonzero(taking_part & (file == k))) for k in range(len(parts))]
    velocities = Velocities(
        time=time[order],
        rv1=ordered("velocity", 0),
        rv1_error=ordered("error", 0),
        rv2=ordered("velocity", 1),
        rv2_error=ordered("error", 1),
        source=source[order],
        file=file.astype(np.int64),
        line=np.concatenate([part.line for part in parts])[order],
        why1=why[0],
        why2=why[1],
        sources=sources,
        files=tuple(
            input_file(part.table, part.guesses, part.clock, count)
            for part, count in zip(parts, used)
        ),
        time_scale=scale,
        errors_from_scatter=any(part.from_scatter for part in parts),
        reasons=tuple(reasons.known),
        unreadable=tuple(row for part in parts for row in part.unreadable),
        notes=(*(note for part in parts for note in part.notes), *more),
    )
    for value in vars(velocities).values():
        if isinstance(value, np.ndarray):
            value.setflags(write=False)
    return velocities


def _all_sources(parts: list[_Part]) -> tuple[tuple[str, ...], Ints]:
    names: list[str] = []
    rows = []
    for part in parts:
        present = [name for k, name in enumerate(part.sources) if np.any(part.source == k)]
        names += [name for name in present if name not in names]
        places = np.array([names.index(n) if n in names else 0 for n in part.sources], np.int64)
        rows.append(places[part.source] if len(part.source) else part.source)
    return tuple(names), np.concatenate(rows)


def _require_rows(parts: list[_Part], why: list[np.ndarray]) -> None:
    usable = int(sum(np.count_nonzero(codes == 0) for codes in why))
    if usable >= MINIMUM:
        return
    unreadable = [row for part in parts for row in part.unreadable]
    found = f"{usable} in {sum(part.table.rows for part in parts)} rows"
    if unreadable:
        first = unreadable[0]
        found += f" ({len(unreadable)} unreadable, first in line {first.line}: {first.reason})"
    path = ", ".join(part.table.path for part in parts)
    raise TableError(Problem(path, f"at least {MINIMUM} velocities that can be used", found))
