"""A table as it stands in a file, before anyone says what its columns mean."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints, UnreadableRow


@dataclass(frozen=True, eq=False)
class Column:
    """One column: numbers, or words where most cells are no numbers.

    Attributes
    ----------
    name, unit : str
        As printed; unnamed columns are called `column 1`, `column 2` ...
    numbers : (n,) float64
        NaN where the cell is empty or holds no number.
    odd : mapping of row to str
        Cells of a column of numbers that hold something else.
    labels, codes : tuple of str and (n,) int64, or None
        The different words of a column of words, and which of them stands in each row.
    """

    name: str
    unit: str
    numbers: Floats
    odd: Mapping[int, str] = field(default_factory=dict)
    labels: tuple[str, ...] | None = None
    codes: Ints | None = None

    @property
    def is_text(self) -> bool:
        """Whether the column holds words."""
        return self.labels is not None

    def cell(self, row: int) -> str:
        """The cell as text."""
        if self.labels is not None and self.codes is not None:
            return self.labels[int(self.codes[row])]
        if row in self.odd:
            return self.odd[row]
        return written_cell(float(self.numbers[row]))

    def words(self, keep: NDArray[np.bool_]) -> tuple[tuple[str, ...], Ints]:
        """The different cells of the rows `keep` (n, bool), and which of them stands in each."""
        if self.labels is not None and self.codes is not None:
            return self.labels, self.codes[keep]
        if self.odd:
            return coded([self.cell(int(row)) for row in np.flatnonzero(keep)])
        different, codes = np.unique(self.numbers[keep], return_inverse=True)
        return tuple(written_cell(float(n)) for n in different), codes.astype(np.int64)


@dataclass(frozen=True, eq=False)
class RawTable:
    """All rows of one file.

    Attributes
    ----------
    form : str
        How the file was read, in words.
    line : (n,) int64
        Line (or row) number in the file, from 1.
    named : bool
        Whether the file names its columns.
    headers : mapping of lower-case key to value
        `# key: value` comments, or the cards of a FITS header.
    comments : tuple of str
        The other comments.
    unreadable : tuple of UnreadableRow
        Rows that could not be split into cells.
    estimated_rows : int or None
        For a table of which only the head was read.
    """

    path: str
    sha256: str
    form: str
    columns: tuple[Column, ...]
    line: Ints
    named: bool
    headers: Mapping[str, str] = field(default_factory=dict)
    comments: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    unreadable: tuple[UnreadableRow, ...] = ()
    estimated_rows: int | None = None

    @property
    def names(self) -> tuple[str, ...]:
        """The names of the columns."""
        return tuple(column.name for column in self.columns)

    @property
    def rows(self) -> int:
        """Rows of the file: those of the table and those that could not be read."""
        return len(self.line) + len(self.unreadable)


def written_cell(number: float) -> str:
    """A number as a cell, whole numbers without a point, nothing for NaN."""
    if np.isnan(number):
        return ""
    return str(int(number)) if number.is_integer() and abs(number) < 1e15 else repr(number)


def coded(words: list[str]) -> tuple[tuple[str, ...], Ints]:
    """Different words in the order of their appearance, and for each word its number."""
    numbers: dict[str, int] = {}
    codes = np.fromiter(
        (numbers.setdefault(word, len(numbers)) for word in words), np.int64, len(words)
    )
    return tuple(numbers), codes
