"""The rows of a text table: lines to cells to columns, fast where they are clean, each bad line named."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from shadowscale.data.cells import number_in
from shadowscale.data.layout import BLANKS, MIXED, Layout
from shadowscale.data.photometry import Floats, UnreadableRow
from shadowscale.data.raw_table import Column, coded

SAMPLE = 200  # lines from which the layout is found
CHUNK = 20_000  # lines turned into numbers at once
SHOWN_TEXT = 200  # characters of a bad line that are kept
ABOVE = "text above the table"
_MARK = "\x00"  # between lines; no text file holds it

Cells = Sequence[Sequence[str]]


@dataclass
class Lines:
    """The lines of a file, sorted by what they are."""

    content: list[str] = field(default_factory=list)
    numbers: list[int] = field(default_factory=list)
    comments: list[tuple[int, str]] = field(default_factory=list)


@dataclass(frozen=True)
class Head:
    """What stands above the data: names and units, if any, and the lines that are neither.

    `first` and `other` index the content lines; `commented` is the line number of a commented header.
    """

    names: tuple[str, ...] = ()
    units: tuple[str, ...] = ()
    first: int = 0
    commented: int | None = None
    other: tuple[int, ...] = ()


def parsed_rows(
    path: str, lines: Lines, *, layout: Layout, head: Head
) -> tuple[tuple[Column, ...], list[int], list[UnreadableRow]]:
    """Columns, the line number of each row, and the lines that are no rows."""
    bad = [
        UnreadableRow(path, lines.numbers[index], ABOVE, _shown(lines, index))
        for index in head.other
    ]
    good: list[int] = []
    words = _word_columns(lines, layout, head)
    parts = [_Part(k in words) for k in range(layout.columns)]
    for start in range(head.first, len(lines.content), CHUNK):
        chunk = lines.content[start : start + CHUNK]
        numbers = lines.numbers[start : start + CHUNK]
        block = None if words else _clean_block(chunk, layout)
        if block is not None:
            for part, column in zip(parts, block.T):
                part.numbers.append(column)
        else:
            cells, numbers = _cells(path, chunk, numbers, layout=layout, bad=bad)
            for part, column_cells in zip(parts, cells):
                part.add(column_cells, layout.decimal_comma, len(good))
        good.extend(numbers)
    names = [name or f"column {k + 1}" for k, name in enumerate(head.names or [""] * len(parts))]
    units = head.units or ("",) * layout.columns
    columns = tuple(part.column(*pair) for part, pair in zip(parts, zip(names, units)))
    return columns, good, bad


def _shown(lines: Lines, index: int) -> str:
    return lines.content[index].strip()[:SHOWN_TEXT]


def _word_columns(lines: Lines, layout: Layout, head: Head) -> set[int]:
    """Columns of which most cells in the sample are something else than numbers."""
    sample = [layout.cells(line) for line in lines.content[head.first : head.first + SAMPLE]]
    columns = list(zip(*(cells for cells in sample if len(cells) == layout.columns)))
    odd = [sum(number_in(c, layout.decimal_comma) is None for c in cells) for cells in columns]
    filled = [sum(bool(cell.strip()) for cell in cells) for cells in columns]
    return {k for k in range(len(columns)) if odd[k] > 0.5 * filled[k]}


def _clean_block(chunk: list[str], layout: Layout) -> Floats | None:
    """All numbers of clean lines at once, (lines, columns); None where a closer look is needed."""
    if layout.decimal_comma or layout.separator == MIXED:
        return None
    delimiter = None if layout.separator == BLANKS else layout.separator
    try:
        block = np.loadtxt(chunk, delimiter=delimiter, comments=None, ndmin=2)
    except ValueError:
        return None
    return block if block.shape == (len(chunk), layout.columns) else None


def _cells(
    path: str, chunk: list[str], numbers: list[int], *, layout: Layout, bad: list[UnreadableRow]
) -> tuple[Cells, list[int]]:
    """Columns of cells, and the line numbers of the rows kept."""
    even = _even_cells(chunk, layout)
    if even is not None:
        return even, numbers
    rows = _rows(chunk, layout)
    if set(map(len, rows)) != {layout.columns}:
        rows, numbers = _squared(path, rows, numbers, layout=layout, bad=bad)
    return list(zip(*rows)), numbers


def _rows(chunk: list[str], layout: Layout) -> list[list[str]]:
    """The cells of each line; quoted ones in one go where that gives a row a line."""
    if layout.separator not in (BLANKS, MIXED) and any('"' in line for line in chunk):
        try:
            rows = list(csv.reader(chunk, delimiter=layout.separator, skipinitialspace=True))
        except csv.Error:
            rows = []
        if len(rows) == len(chunk) and set(map(len, rows)) == {layout.columns}:
            return rows
    return [layout.cells(line) for line in chunk]


def _even_cells(chunk: list[str], layout: Layout) -> Cells | None:
    """Columns of cells where every line has as many as the table has columns, without a list a line."""
    if layout.separator == MIXED:
        return None
    separator = " " if layout.separator == BLANKS else layout.separator
    text = f"{separator}{_MARK}{separator}".join(chunk)
    if '"' in text:
        return None
    flat = text.split() if layout.separator == BLANKS else text.split(separator)
    step = layout.columns + 1
    if len(flat) != len(chunk) * step - 1 or set(flat[layout.columns :: step]) - {_MARK}:
        return None
    return [flat[k::step] for k in range(layout.columns)]


def _squared(
    path: str,
    rows: list[list[str]],
    numbers: list[int],
    *,
    layout: Layout,
    bad: list[UnreadableRow],
) -> tuple[list[list[str]], list[int]]:
    """Rows of the right length; short ones are filled up where the separator is unmistakable."""
    kept, kept_numbers = [], []
    for cells, number in zip(rows, numbers):
        if 2 <= len(cells) < layout.columns and layout.separator in "\t;,|":
            cells = cells + [""] * (layout.columns - len(cells))
        if len(cells) == layout.columns:
            kept.append(cells)
            kept_numbers.append(number)
        else:
            reason = f"expected {layout.columns} cells, found {len(cells)}"
            bad.append(UnreadableRow(path, number, reason, " ".join(cells)[:SHOWN_TEXT]))
    return kept, kept_numbers


class _Part:
    """A column under construction."""

    def __init__(self, is_text: bool) -> None:
        self.is_text = is_text
        self.numbers: list[Floats] = []
        self.odd: dict[int, str] = {}
        self.words: list[str] = []

    def add(self, cells: Sequence[str], decimal_comma: bool, row: int) -> None:
        """Take the cells of a chunk whose first row is `row`."""
        if self.is_text:
            self.words.extend(map(str.strip, cells))
            return
        fast = _fast_numbers(cells, decimal_comma)
        self.numbers.append(self._slow(cells, decimal_comma, row) if fast is None else fast)

    def _slow(self, cells: Sequence[str], decimal_comma: bool, row: int) -> Floats:
        numbers = np.full(len(cells), np.nan)
        for index, cell in enumerate(cells):
            number = number_in(cell, decimal_comma)
            if number is None:
                self.odd[row + index] = cell.strip()
            else:
                numbers[index] = number
        return numbers

    def column(self, name: str, unit: str) -> Column:
        """The finished column."""
        unit = unit.strip("[]() ")
        if self.is_text:
            labels, codes = coded(self.words)
            return Column(name, unit, np.full(len(codes), np.nan), labels=labels, codes=codes)
        numbers = np.concatenate(self.numbers) if self.numbers else np.empty(0)
        return Column(name, unit, numbers, self.odd)


def _fast_numbers(cells: Sequence[str], decimal_comma: bool) -> Floats | None:
    """All cells as numbers at once, or None if one of them needs a closer look."""
    joined = "".join(cells)
    if "_" in joined or (decimal_comma and "." in joined):  # float() takes 1_000
        return None
    source = [cell.replace(",", ".") for cell in cells] if decimal_comma else cells
    for filled in (source, [cell or "nan" for cell in source]):
        try:
            return np.fromiter(map(float, filled), np.float64, len(cells))
        except ValueError:
            continue
    return None
