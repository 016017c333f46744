"""A look into a file before it is read: the first rows, and how its columns are understood."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from shadowscale.data.clocks import Clock
from shadowscale.data.columns import NOTHING_CHOSEN, Chosen, Guess
from shadowscale.data.files import READERS, FilePath, file_bytes, reader_for
from shadowscale.data.light_columns import photometry_columns
from shadowscale.data.light_file import bands_of_head
from shadowscale.data.light_reading import photometry_of
from shadowscale.data.looks import velocities_by_look
from shadowscale.data.photometry import UnreadableRow
from shadowscale.data.raw_table import RawTable
from shadowscale.data.rows import Bools, clock_of, split_rows
from shadowscale.data.velocity_columns import velocity_columns
from shadowscale.errors import InputError, Problem, UsageError

HEAD = 262_144  # bytes read of a long file
SHOWN_ROWS = 50
CUT_ROWS = 5000  # about as many as are in the head of a text table
PHOTOMETRY, VELOCITIES = "photometry", "velocities"
KINDS = (PHOTOMETRY, VELOCITIES)


@dataclass(frozen=True)
class Preview:
    """What a file seems to hold.

    Attributes
    ----------
    form : str
        How the file was read, in words.
    columns, units : tuple of str
        All columns of the file.
    rows : tuple of tuples of str
        The first rows as text.
    guesses : tuple of Guess
        Which column plays which role, and why; empty where that cannot be said (see `problems`).
    clock : Clock or None
        Time scale and offset.
    bands : tuple of str
        Of the rows looked at; empty for velocities.
    row_count : int
        Rows of the file.
    estimated : bool
        True where only the head was read, so that `row_count` is a guess.
    unreadable : tuple of UnreadableRow
        Among the rows looked at.
    set_aside : tuple of UnreadableRow
        Readable rows of photometry, among those looked at, that will take no part.
    problems : tuple of Problem
        Why the file cannot be read like this.
    """

    path: str
    kind: str
    form: str
    columns: tuple[str, ...]
    units: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    guesses: tuple[Guess, ...]
    clock: Clock | None
    bands: tuple[str, ...]
    row_count: int
    estimated: bool
    unreadable: tuple[UnreadableRow, ...]
    set_aside: tuple[UnreadableRow, ...]
    notes: tuple[str, ...]
    problems: tuple[Problem, ...]

    @property
    def time_scale(self) -> str:
        """The time scale, `unknown` where it is not settled."""
        return "unknown" if self.clock is None else self.clock.scale


def preview(
    path: FilePath,
    kind: str = PHOTOMETRY,
    *,
    columns: Chosen = NOTHING_CHOSEN,
    band: str | None = None,
) -> Preview:
    """Look into a file; of a long one only the head is read.

    Parameters
    ----------
    path : path
    kind : str
        `photometry` or `velocities`.
    columns : mapping of role to column
        As for `read_photometry` and `read_velocities`.

    Raises
    ------
    TableError
        If the file is no table. Columns that cannot be understood are no error here: they are `problems`.
    """
    return preview_of(head_of(path), kind, columns=columns, band=band)


def preview_of(
    table: RawTable,
    kind: str = PHOTOMETRY,
    *,
    columns: Chosen = NOTHING_CHOSEN,
    band: str | None = None,
) -> Preview:
    """As `preview`, of a head that was read before: that is quick, whatever the file."""
    if kind not in KINDS:
        raise ValueError(f"kind: {kind!r} is none of {', '.join(KINDS)}")
    guesses, problems = _guesses(table, kind, columns)
    roles = {guess.role: guess for guess in guesses}
    clock: Clock | None = None
    bands: tuple[str, ...] = ()
    unreadable = table.unreadable
    aside: tuple[UnreadableRow, ...] = ()
    if guesses:
        clock = clock_of(table, roles["time"], columns)
        keep, bad, problems = _split(table, roles, clock)
        unreadable = (*unreadable, *bad)
        if kind == PHOTOMETRY:
            bands = _bands(table, keep, roles, band)
            aside = _set_aside(table, columns, band)
    count = table.rows if table.estimated_rows is None else table.estimated_rows
    return Preview(
        path=table.path,
        kind=kind,
        form=table.form,
        columns=table.names,
        units=tuple(column.unit for column in table.columns),
        rows=_first_rows(table),
        guesses=guesses,
        clock=clock,
        bands=bands,
        row_count=count,
        estimated=table.estimated_rows is not None,
        unreadable=unreadable,
        set_aside=aside,
        notes=(*table.notes, *([clock.note] if clock and clock.note else [])),
        problems=problems,
    )


def head_of(path: FilePath) -> RawTable:
    """The table's first rows (all rows of a short file)."""
    file = file_bytes(path, HEAD)
    reader = reader_for(file)
    if file.partial and reader is READERS["votable"]:
        return _cut(reader.read(file_bytes(path)))  # XML cannot be cut, but what came of it can
    return reader.read(file)


def _cut(table: RawTable) -> RawTable:
    """The first rows of a table that had to be read whole."""
    if len(table.line) <= CUT_ROWS:
        return table
    columns = tuple(
        replace(
            column,
            numbers=column.numbers[:CUT_ROWS],
            codes=None if column.codes is None else column.codes[:CUT_ROWS],
        )
        for column in table.columns
    )
    return replace(
        table, columns=columns, line=table.line[:CUT_ROWS], estimated_rows=len(table.line)
    )


def kind_of(table: RawTable) -> str:
    """`photometry` or `velocities`, by the names of the columns or the look of the numbers."""
    if table.named:
        light, _ = _guesses(table, PHOTOMETRY, {})
        velocities, _ = _guesses(table, VELOCITIES, {})
        if bool(light) != bool(velocities):
            return PHOTOMETRY if light else VELOCITIES
        if velocities and "star" in next(g.reason for g in velocities if g.role.startswith("rv")):
            return VELOCITIES
        return PHOTOMETRY
    light, _ = _guesses(table, PHOTOMETRY, {})
    value = next((g for g in light if g.role in ("mag", "flux")), None)
    if value is not None and velocities_by_look(table.columns[value.index].numbers):
        return VELOCITIES
    return PHOTOMETRY


def _guesses(
    table: RawTable, kind: str, columns: Chosen
) -> tuple[tuple[Guess, ...], tuple[Problem, ...]]:
    find = photometry_columns if kind == PHOTOMETRY else velocity_columns
    try:
        return find(table, columns), ()
    except InputError as error:
        return (), error.problems
    except UsageError as error:
        return (), (Problem(table.path, "a known role", str(error)),)


def _split(
    table: RawTable, roles: Mapping[str, Guess], clock: Clock
) -> tuple[Bools, list[UnreadableRow], tuple[Problem, ...]]:
    words = ("band", "source", "quality", "airmass", "exposure")
    numeric = [guess for role, guess in roles.items() if role not in words]
    try:
        return *split_rows(table, numeric, time=roles["time"], clock=clock), ()
    except InputError as error:
        return np.ones(len(table.line), dtype=bool), [], error.problems


def _bands(
    table: RawTable, keep: Bools, roles: Mapping[str, Guess], band: str | None
) -> tuple[str, ...]:
    try:
        return bands_of_head(table, keep, roles=roles, told=band)
    except InputError:
        return ()


def _set_aside(table: RawTable, columns: Chosen, band: str | None) -> tuple[UnreadableRow, ...]:
    """Rows without a measurement, flagged ones, and the like, as a reading of these rows has it."""
    try:
        read = photometry_of([table], [columns], [band])
    except (InputError, UsageError):
        return ()
    return tuple(
        UnreadableRow(table.path, int(read.line[row]), read.reasons[read.why[row]])
        for row in np.flatnonzero(read.why).tolist()
    )


def _first_rows(table: RawTable) -> tuple[tuple[str, ...], ...]:
    return tuple(
        tuple(column.cell(row) for column in table.columns)
        for row in range(min(SHOWN_ROWS, len(np.asarray(table.line))))
    )
