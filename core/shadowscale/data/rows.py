"""What both readers of measurements share: files in order, usable cells, reasons, times."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from os import PathLike, fspath

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.clocks import REACH, Clock, recognised_clock
from shadowscale.data.columns import Chosen, Guess
from shadowscale.data.files import FilePath, read_table
from shadowscale.data.photometry import Floats, InputFile, UnreadableRow
from shadowscale.data.raw_table import RawTable
from shadowscale.errors import InputError, Problem, TableError, TimeScaleError

Bools = NDArray[np.bool_]
LARGEST_OFFSET = 2.6e6  # [d] between two zero points in use


@dataclass
class Reasons:
    """Reasons for setting rows aside, each with its number."""

    known: list[str] = field(default_factory=lambda: ["used"])

    def number(self, reason: str) -> int:
        """The number of a reason, new or known."""
        if reason not in self.known:
            self.known.append(reason)
        return self.known.index(reason)


def path_list(paths: FilePath | Sequence[FilePath]) -> tuple[str, ...]:
    """The paths as text; one path alone is a list of one."""
    several = [paths] if isinstance(paths, str | PathLike) else list(paths)
    if not several:
        raise ValueError("paths: at least one file is needed")
    return tuple(fspath(path) for path in several)


def per_file(columns: Chosen | Sequence[Chosen], number: int) -> tuple[Chosen, ...]:
    """The user's columns for each file: one mapping for all, or one a file."""
    if isinstance(columns, Mapping):
        return (columns,) * number
    if len(columns) != number:
        raise ValueError(f"columns: {number} files but {len(columns)} mappings of columns")
    return tuple(columns)


def read_all(paths: tuple[str, ...], chosen: tuple[Chosen, ...]) -> list[RawTable]:
    """All files; the problems of all are gathered.

    A file given twice is one of them, unless other columns are wanted from it.
    """
    tables: list[RawTable] = []
    problems: list[Problem] = []
    seen: dict[tuple[str, tuple[tuple[str, str | int], ...]], str] = {}
    for path, columns in zip(paths, chosen):
        try:
            table = read_table(path)
        except InputError as error:
            problems.extend(error.problems)
            continue
        key = (table.sha256, tuple(sorted(columns.items())))
        if key in seen:
            found = f"the same content as in {seen[key]}"
            problems.append(Problem(path, "a file of its own", found, help="name it once"))
        seen.setdefault(key, path)
        tables.append(table)
    if problems:
        raise TableError(*problems)
    return tables


def odd_rows(table: RawTable, guesses: Sequence[Guess]) -> dict[int, str]:
    """Rows with words where a number is needed, and the reason."""
    found: dict[int, str] = {}
    for guess in guesses:
        column = table.columns[guess.index]
        if column.labels is not None and column.codes is not None:
            for row in range(len(table.line)):
                found.setdefault(row, _expected_number(column.name, column.cell(row)))
            continue
        for row, cell in column.odd.items():
            found.setdefault(row, _expected_number(column.name, cell))
    return found


def _expected_number(column: str, cell: str) -> str:
    reason = f"column {column!r}: expected a number, found {cell[:40]!r}"
    if cell.count(",") == 1 and cell.replace(",", "").strip("+-").isdigit():
        reason += "; is the comma a decimal mark?"
    elif cell.startswith(("<", ">")):
        reason += ", a limit"
    return reason


def clock_of(table: RawTable, time: Guess, columns: Chosen) -> Clock:
    """The clock of a table's times."""
    column = table.columns[time.index]
    return recognised_clock(
        column.numbers,
        name=column.name if table.named else "",
        unit=time.unit,
        headers=table.headers,
        comments=table.comments,
        told=str(columns.get("time_system", "")),
    )


def split_rows(
    table: RawTable, numeric: Sequence[Guess], *, time: Guess, clock: Clock
) -> tuple[Bools, list[UnreadableRow]]:
    """Which rows have a time and no words among their numbers, and the others with their reason.

    Raises
    ------
    TimeScaleError
        If two kinds of Julian dates are mixed in the file.
    """
    times = clock.full(table.columns[time.index].numbers)
    reasons = odd_rows(table, numeric)
    for row in np.flatnonzero(~np.isfinite(times)):
        reasons.setdefault(int(row), f"column {time.column!r}: no time")
    for row in np.flatnonzero(_far_rows(table, times)):
        reasons.setdefault(int(row), f"column {time.column!r}: the time is far from all others")
    keep = np.ones(len(table.line), dtype=bool)
    keep[list(reasons)] = False
    bad = [
        UnreadableRow(table.path, int(table.line[row]), reason, _row_text(table, row))
        for row, reason in sorted(reasons.items())
    ]
    return keep, bad


def _far_rows(table: RawTable, times: Floats) -> Bools:
    """Rows whose time is far from all others; many of them, an offset away, mean two clocks."""
    finite = times[np.isfinite(times)]
    if not len(finite):
        return np.zeros(len(times), dtype=bool)
    distance = np.abs(times - np.median(finite))
    far = np.isfinite(times) & (distance > REACH)
    mixed = far & (distance < LARGEST_OFFSET)
    if np.count_nonzero(mixed) > max(2, 0.05 * len(finite)):
        row = int(np.flatnonzero(mixed)[0])
        expected = f"times near {np.median(finite):.6g}, as in other rows"
        help = "two kinds of Julian dates (MJD, JD) may be mixed"
        line = int(table.line[row])
        raise TimeScaleError(
            Problem(table.path, expected, f"{times[row]:.6g}", line=line, help=help)
        )
    return far


def _row_text(table: RawTable, row: int) -> str:
    return " ".join(column.cell(row) for column in table.columns[:20])[:200]


def input_file(table: RawTable, guesses: Sequence[Guess], clock: Clock, used: int) -> InputFile:
    """How the file was read."""
    columns = [(g.role, f"{g.column}: {g.reason}") for g in guesses]
    columns.append(("time_system", f"{clock.scale}: {clock.reason}"))
    return InputFile(table.path, table.sha256, table.rows, used, tuple(columns))


def notes_of(table: RawTable, clock: Clock) -> list[str]:
    """What is to be said of one file."""
    notes = [*table.notes, *([clock.note] if clock.note else [])]
    return [f"{table.path}: {note}" for note in notes]


def middle(values: Floats) -> float:
    """Median of the finite numbers, 0 if there are none."""
    finite = values[np.isfinite(values)]
    return float(np.median(finite)) if len(finite) else 0.0
