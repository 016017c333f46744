"""Text tables: separators, header, comments, decimal commas; every line is accounted for."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

import numpy as np

from shadowscale.data.cells import is_number, number_in
from shadowscale.data.files import FileBytes
from shadowscale.data.layout import BLANKS, Layout, found_layout, looks_like_data, split
from shadowscale.data.photometry import Floats, UnreadableRow
from shadowscale.data.raw_table import Column, RawTable, coded
from shadowscale.errors import Problem, TableError

SAMPLE = 200  # lines from which the layout is found
CHUNK = 20_000  # lines turned into numbers at once
SHOWN_TEXT = 200  # characters of a bad line that are kept
_INLINE = re.compile(r"(?:^|(?<=\s))#")
_KEY = re.compile(r"^([A-Za-z][\w .()/-]{0,40}?)\s*[:=]\s*(\S.*)$")
_UNITS = re.compile(r"^\[.*\]$|^\(.*\)$|^(d|days?|s|sec|jd|bjd|hjd|mjd|m?mag|km/?s|m/s|km s-1|e-/s|ppm|-|)$", re.I)  # fmt: skip


@dataclass
class _Lines:
    """The lines of a file, sorted by what they are."""

    content: list[str] = field(default_factory=list)
    numbers: list[int] = field(default_factory=list)
    comments: list[tuple[int, str]] = field(default_factory=list)


@dataclass(frozen=True)
class _Head:
    """What stands above the data: names and units, if any, and the lines that are neither."""

    names: tuple[str, ...] = ()
    units: tuple[str, ...] = ()
    first: int = 0  # index of the first line of data among the content lines
    commented: int | None = None  # line number of a commented header
    other: tuple[int, ...] = ()


def read_text(file: FileBytes) -> RawTable:
    """Read a text table.

    Parameters
    ----------
    file : FileBytes
        If only the head was read, its last line, which may be cut, is left out.

    Raises
    ------
    TableError
        If the file is binary, or holds no line with two numbers.
    """
    text, notes = _decoded(file)
    lines = _sorted_lines(text, cut=file.partial)
    layout = found_layout(lines.content[:SAMPLE]) or _late_layout(lines.content)
    if layout is None:
        raise TableError(_no_rows(file.path, lines))
    head = _head(lines, layout)
    columns, good, bad = _parsed(file.path, lines, layout, head)
    headers, comments = _keys(lines.comments, head.commented)
    if layout.decimal_comma:
        notes.append("commas are read as decimal marks")
    return RawTable(
        path=file.path,
        sha256=file.sha256,
        form=layout.words,
        columns=columns,
        line=np.asarray(good, dtype=np.int64),
        named=bool(head.names),
        headers=headers,
        comments=comments,
        notes=tuple(notes),
        unreadable=tuple(bad),
        estimated_rows=_estimated_rows(file, len(good) + len(bad)),
    )


def _decoded(file: FileBytes) -> tuple[str, list[str]]:
    content = file.content
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        return content.decode("utf-16", errors="replace"), []
    if _is_binary(content):
        help = "save the table as text (csv), FITS, ECSV or VOTable"
        raise TableError(Problem(file.path, "a table", "a binary file", help=help))
    try:
        return content.decode("utf-8-sig"), []
    except UnicodeDecodeError as error:
        if file.partial and error.start > len(content) - 4:
            return content[: error.start].decode("utf-8-sig"), []
        return content.decode("latin-1"), ["the text is not UTF-8; it is read as Latin-1"]


def _is_binary(content: bytes) -> bool:
    head = content[:65536]
    control = sum(head.count(code) for code in range(32) if code not in (9, 10, 11, 12, 13))
    return b"\0" in content or control > 0.05 * len(head)


def _sorted_lines(text: str, *, cut: bool) -> _Lines:
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    every = text.split("\n")
    if cut:
        every.pop()
    lines = _Lines()
    for number, line in enumerate(every, start=1):
        if "#" in line:
            line, comment = _INLINE.split(line, 1) if _INLINE.search(line) else (line, "")
            if not line.strip():
                lines.comments.append((number, comment.strip()))
        if line and not line.isspace():
            lines.content.append(line)
            lines.numbers.append(number)
    return lines


def _late_layout(content: list[str]) -> Layout | None:
    """A layout from further down, for files with a long preamble."""
    for start in range(SAMPLE, min(len(content), 20 * SAMPLE), SAMPLE):
        layout = found_layout(content[start : start + SAMPLE])
        if layout is not None:
            return layout
    return None


def _no_rows(path: str, lines: _Lines) -> Problem:
    if not lines.content:
        found = f"{len(lines.comments)} lines of comments" if lines.comments else "blank lines"
    elif len(lines.content) == 1:
        found = f"a header only ({lines.content[0].strip()[:60]!r})"
    else:
        found = f"{len(lines.content)} lines without two numbers (the first: {lines.content[0].strip()[:60]!r})"
    return Problem(path, "rows of numbers (a time and a value)", found)


def _head(lines: _Lines, layout: Layout) -> _Head:
    first = next(
        index
        for index, line in enumerate(lines.content)
        if looks_like_data(layout.cells(line), layout.decimal_comma)
    )
    above = [_names(lines.content[index], layout) for index in range(first)]
    if first >= 2 and above[-1] and above[-2] and all(_UNITS.match(cell) for cell in above[-1]):
        return _Head(above[-2], above[-1], first, other=tuple(range(first - 2)))
    if first and above[-1]:
        return _Head(above[-1], (), first, other=tuple(range(first - 1)))
    return _commented_head(lines, layout, first)


def _names(line: str, layout: Layout) -> tuple[str, ...]:
    """The cells of a line that can be names of all columns, else nothing."""
    for cells in (layout.cells(line), split(line, ","), split(line, "\t"), split(line, BLANKS)):
        names = tuple(cell.strip().strip("'\"") for cell in cells)
        if len(names) == layout.columns and not any(map(is_number, names)) and any(names):
            return names
    return ()


def _commented_head(lines: _Lines, layout: Layout, first: int) -> _Head:
    """Names from the comment just above the data, if it has as many words as there are columns."""
    above = [pair for pair in lines.comments if pair[0] < lines.numbers[first]]
    other = tuple(range(first))
    if above:
        number, comment = above[-1]
        names = _names(comment.lstrip("# "), layout)
        if names and number > lines.numbers[first] - 4:
            return _Head(names, (), first, commented=number, other=other)
    return _Head((), (), first, other=other)


def _keys(
    comments: list[tuple[int, str]], header: int | None
) -> tuple[Mapping[str, str], tuple[str, ...]]:
    keys: dict[str, str] = {}
    others = []
    for number, comment in comments:
        found = _KEY.match(comment.strip("# "))
        if number == header:
            continue
        if found:
            keys.setdefault(found[1].strip().lower(), found[2].strip())
        elif comment:
            others.append(comment)
    return keys, tuple(others)


def _parsed(
    path: str, lines: _Lines, layout: Layout, head: _Head
) -> tuple[tuple[Column, ...], list[int], list[UnreadableRow]]:
    bad = [
        UnreadableRow(path, lines.numbers[index], "text above the table", _shown(lines, index))
        for index in head.other
    ]
    good: list[int] = []
    words = _word_columns(lines, layout, head)
    parts: list[_Parts] = [_Parts(k in words) for k in range(layout.columns)]
    for start in range(head.first, len(lines.content), CHUNK):
        stop = min(start + CHUNK, len(lines.content))
        rows = [layout.cells(line) for line in lines.content[start:stop]]
        numbers = lines.numbers[start:stop]
        if set(map(len, rows)) != {layout.columns}:
            rows, numbers = _squared(path, rows, numbers, layout, bad)
        for part, cells in zip(parts, zip(*rows) if rows else ()):
            part.add(cells, layout.decimal_comma, len(good))
        good.extend(numbers)
    names = head.names or tuple(f"column {k + 1}" for k in range(layout.columns))
    units = head.units or ("",) * layout.columns
    columns = tuple(part.column(*pair) for part, pair in zip(parts, zip(names, units)))
    return columns, good, bad


def _shown(lines: _Lines, index: int) -> str:
    return lines.content[index].strip()[:SHOWN_TEXT]


def _word_columns(lines: _Lines, layout: Layout, head: _Head) -> set[int]:
    """Columns of which most cells in the sample are something else than numbers."""
    sample = [layout.cells(line) for line in lines.content[head.first : head.first + SAMPLE]]
    sample = [cells for cells in sample if len(cells) == layout.columns]
    odd = [
        sum(number_in(cells[k], layout.decimal_comma) is None for cells in sample)
        for k in range(layout.columns)
    ]
    filled = [sum(bool(cells[k].strip()) for cells in sample) for k in range(layout.columns)]
    return {k for k in range(layout.columns) if odd[k] > 0.5 * filled[k]}


def _squared(
    path: str,
    rows: list[list[str]],
    numbers: list[int],
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


class _Parts:
    """A column under construction."""

    def __init__(self, is_text: bool) -> None:
        self.is_text = is_text
        self.numbers: list[Floats] = []
        self.odd: dict[int, str] = {}
        self.words: list[str] = []

    def add(self, cells: tuple[str, ...], decimal_comma: bool, row: int) -> None:
        """Take the cells of a chunk whose first row is `row`."""
        if self.is_text:
            self.words.extend(cell.strip() for cell in cells)
            return
        fast = _fast_numbers(cells, decimal_comma)
        self.numbers.append(self._slow(cells, decimal_comma, row) if fast is None else fast)

    def _slow(self, cells: tuple[str, ...], decimal_comma: bool, row: int) -> Floats:
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


def _fast_numbers(cells: tuple[str, ...], decimal_comma: bool) -> Floats | None:
    """All cells as numbers at once, or None if one of them needs a closer look."""
    try:
        source: Iterator[str] | tuple[str, ...] = cells
        if decimal_comma:
            source = (cell.replace(",", ".") for cell in cells)
        numbers = np.fromiter(map(float, source), np.float64, len(cells))
    except ValueError:
        return None
    return None if "_" in "".join(cells) else numbers  # float() takes 1_000


def _estimated_rows(file: FileBytes, rows: int) -> int | None:
    if not file.partial or file.size is None:
        return None
    return round(rows * file.size / max(len(file.content), 1))
