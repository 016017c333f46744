"""The rows of one file that can be read, and how the rows of several files become one table."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from typing import Any, TypeVar

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.clocks import Clock, common_scale
from shadowscale.data.columns import Chosen, Guess
from shadowscale.data.photometry import Floats, InputFile, Ints, UnreadableRow
from shadowscale.data.raw_table import RawTable
from shadowscale.data.rows import Bools, clock_of, input_file, middle, notes_of, split_rows
from shadowscale.errors import Problem, TableError

Table = TypeVar("Table")
SHOWN_ROWS = 5  # unreadable ones in a complaint


@dataclass
class FileRows:
    """The rows of one file that have a time, and numbers where numbers are needed.

    `keep` (rows of the file, bool) says which; `line` and `time` are theirs; the others are `unreadable`.
    """

    table: RawTable
    roles: dict[str, Guess]
    clock: Clock
    keep: Bools
    line: Ints
    time: Floats
    unreadable: list[UnreadableRow]
    notes: list[str]

    @property
    def path(self) -> str:
        """Where the file is."""
        return self.table.path

    @property
    def count(self) -> int:
        """How many rows there are."""
        return len(self.line)

    def numbers(self, role: str) -> Floats:
        """The numbers of a role (n,), NaN where no column has it."""
        if role not in self.roles:
            return np.full(self.count, np.nan)
        return np.asarray(self.table.columns[self.roles[role].index].numbers[self.keep])

    def note(self, words: str) -> None:
        """Something to be said of this file."""
        self.notes.append(f"{self.path}: {words}")


def file_rows(
    table: RawTable, guesses: Sequence[Guess], columns: Chosen, *, numeric: Collection[str]
) -> FileRows:
    """The rows of a file; those with words in a column whose role is among `numeric` are unreadable.

    Raises
    ------
    TimeScaleError
        If two kinds of Julian dates are mixed in the file.
    """
    roles = {guess.role: guess for guess in guesses}
    clock = clock_of(table, roles["time"], columns)
    needed = [guess for guess in guesses if guess.role in numeric]
    keep, bad = split_rows(table, needed, time=roles["time"], clock=clock)
    return FileRows(
        table=table,
        roles=roles,
        clock=clock,
        keep=keep,
        line=table.line[keep],
        time=clock.full(table.columns[roles["time"].index].numbers[keep]),
        unreadable=[*table.unreadable, *bad],
        notes=notes_of(table, clock),
    )


@dataclass(frozen=True)
class Together:
    """The rows of several files in time order: where each stands, from which file, on which clock.

    `notes` are those of all files.
    """

    files: tuple[FileRows, ...]
    order: Ints
    file: Ints
    scale: str
    notes: tuple[str, ...]

    def ordered(self, columns: Sequence[NDArray[Any]]) -> NDArray[Any]:
        """One column, given file by file, put in time order."""
        return np.asarray(np.concatenate(columns)[self.order])

    def inputs(self, used: Bools) -> tuple[InputFile, ...]:
        """How each file was read, and how many of its rows are `used` (n, bool)."""
        counts = [int(np.count_nonzero(used & (self.file == k))) for k in range(len(self.files))]
        return tuple(
            input_file(rows.table, tuple(rows.roles.values()), rows.clock, count)
            for rows, count in zip(self.files, counts)
        )

    def set_aside(
        self, why: Ints, reasons: Sequence[str], *, of: tuple[str, str] = ("row", "rows")
    ) -> tuple[str, ...]:
        """What takes no part, a note a file and reason, with the first line numbers.

        Parameters
        ----------
        why : (n,) int64
            In time order: 0 for a row that takes part, else an index into `reasons`.
        reasons : sequence of str
        of : (str, str)
            What is set aside, one and several, for the words.
        """
        line = self.ordered([rows.line for rows in self.files])
        found = []
        for number, rows in enumerate(self.files):
            found += _listed_rows(rows)
            here = self.file == number
            for code in np.unique(why[here & (why > 0)]):
                lines = np.sort(line[here & (why == code)])
                found.append(
                    f"{rows.path}: {len(lines)} {of[len(lines) > 1]} set aside ({reasons[code]}; {_lines(lines)})"
                )
        return tuple(found)

    @property
    def unreadable(self) -> tuple[UnreadableRow, ...]:
        """Of all files."""
        return tuple(row for rows in self.files for row in rows.unreadable)


def together(files: Sequence[FileRows]) -> Together:
    """The rows of several files in time order.

    Raises
    ------
    TimeScaleError
        If the files' times do not go together.
    """
    order = np.argsort(np.concatenate([rows.time for rows in files]), kind="stable")
    file = np.repeat(np.arange(len(files)), [rows.count for rows in files])[order]
    clocks = [(rows.path, rows.clock, middle(rows.time)) for rows in files if rows.count]
    scale, notes = common_scale(clocks) if clocks else ("unknown", ())
    every_note = (*(note for rows in files for note in rows.notes), *notes)
    return Together(tuple(files), order, file.astype(np.int64), scale, every_note)


def _listed_rows(rows: FileRows) -> list[str]:
    """A note on the lines that could not be read, the first ones with their reasons."""
    if not rows.unreadable:
        return []
    first = [f"line {row.line}: {row.reason}" for row in rows.unreadable[:SHOWN_ROWS]]
    more = "; ..." if len(rows.unreadable) > SHOWN_ROWS else ""
    return [f"{rows.path}: {len(rows.unreadable)} unreadable ({'; '.join(first)}{more})"]


def _lines(numbers: Ints) -> str:
    """The first line numbers as text."""
    shown = ", ".join(str(number) for number in numbers[: 2 * SHOWN_ROWS])
    more = ", ..." if len(numbers) > 2 * SHOWN_ROWS else ""
    return f"line{'s' if len(numbers) > 1 else ''} {shown}{more}"


def joined_names(parts: Sequence[tuple[tuple[str, ...], Ints]]) -> tuple[tuple[str, ...], Ints]:
    """Names (of bands, of sources) of all files, those with rows, and each row's place among them.

    Parameters
    ----------
    parts : sequence of (names, (n,) int64)
        The names of a file, and each of its rows' place among them.
    """
    names: list[str] = []
    places = []
    for own, codes in parts:
        present = [name for k, name in enumerate(own) if np.any(codes == k)]
        names += [name for name in present if name not in names]
        place = np.array([names.index(name) if name in names else 0 for name in own], np.int64)
        places.append(place[codes] if len(codes) else codes)
    return tuple(names), np.concatenate(places)


def too_few(
    files: Sequence[FileRows], expected: str, usable: int, *, set_aside: Sequence[str] = ()
) -> TableError:
    """The complaint that there is not enough to work with; the first unreadable rows stand below it.

    Parameters
    ----------
    files : sequence of FileRows
    expected : str
    usable : int
        What was found of it.
    set_aside : sequence of str
        Reasons for which readable rows take no part, each with its number.
    """
    unreadable = [row for rows in files for row in rows.unreadable]
    what = list(set_aside)
    if unreadable:
        what.append(f"{len(unreadable)} unreadable, first in line {unreadable[0].line}")
    total = sum(rows.table.rows for rows in files)
    found = f"{usable} in {total} rows" + (f" ({'; '.join(what)})" if what else "")
    rows_shown = [
        Problem(row.file, "a row of the table", f"{row.text[:60]!r} ({row.reason})", line=row.line)
        for row in unreadable[:SHOWN_ROWS]
    ]
    path = ", ".join(rows.path for rows in files)
    return TableError(Problem(path, expected, found), *rows_shown)


def read_only(table: Table) -> Table:
    """The same table, its arrays locked, so that threads may share them."""
    for value in vars(table).values():
        if isinstance(value, np.ndarray):
            value.setflags(write=False)
    return table
