"""Text tables: separators, header, comments, decimal commas; every line is accounted for."""

from __future__ import annotations

import re
from collections.abc import Mapping

import numpy as np

from shadowscale.data.cells import is_number
from shadowscale.data.files import FileBytes
from shadowscale.data.layout import BLANKS, Layout, found_layout, looks_like_data, split
from shadowscale.data.raw_table import RawTable
from shadowscale.data.text_rows import ABOVE, SAMPLE, Head, Lines, parsed_rows
from shadowscale.errors import Problem, TableError

_INLINE = re.compile(r"(?:^|(?<=\s))#")
_COLUMNS = re.compile(r"(?i)^(columns?|fields?|format)\s*[:=]\s*")
_KEY = re.compile(r"^([A-Za-z][\w .()/-]{0,40}?)\s*[:=]\s*(\S.*)$")
_DATE = re.compile(
    r"(?<!\d)\d{4}[-/.]\d{1,2}[-/.]\d{1,2}(?!\d)|(?<!\d)\d{1,2}[-/.]\d{1,2}[-/.]\d{4}(?!\d)"
)
_UNITS = re.compile(r"^\[.*\]$|^\(.*\)$|^(d|days?|s|sec|jd|bjd|hjd|mjd|m?mag|km/?s|m/s|km s-1|e-/s|ppm|-|)$", re.I)  # fmt: skip


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
    columns, good, bad = parsed_rows(file.path, lines, layout=layout, head=head)
    headers, comments = _keys(lines.comments, head.commented)
    comments += tuple(row.text for row in bad if row.reason == ABOVE)
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
        return content.decode("cp1252", errors="replace"), [
            "the text is not UTF-8; it is read as Windows-1252, of which Latin-1 is a part"
        ]


def _is_binary(content: bytes) -> bool:
    head = content[:65536]
    control = sum(head.count(code) for code in range(32) if code not in (9, 10, 11, 12, 13))
    return b"\0" in content or control > 0.05 * len(head)


def _sorted_lines(text: str, *, cut: bool) -> Lines:
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    every = text.split("\n")
    if cut:
        every.pop()
    lines = Lines()
    last = text.count("\n", 0, text.rfind("#") + 1) + 1 if "#" in text else 0
    for number, line in enumerate(every[:last], start=1):
        if "#" in line and _INLINE.search(line):
            line, comment = _INLINE.split(line, 1)
            if not line.strip():
                lines.comments.append((number, comment.strip()))
        if line and not line.isspace():
            lines.content.append(line)
            lines.numbers.append(number)
    rest = [number for number in range(last, len(every)) if every[number].strip()]
    lines.content.extend(every[number] for number in rest)
    lines.numbers.extend(number + 1 for number in rest)
    return lines


def _late_layout(content: list[str]) -> Layout | None:
    """A layout from further down, for files with a long preamble."""
    for start in range(SAMPLE, min(len(content), 20 * SAMPLE), SAMPLE):
        layout = found_layout(content[start : start + SAMPLE])
        if layout is not None:
            return layout
    return None


def _no_rows(path: str, lines: Lines) -> Problem:
    expected = "rows of numbers (a time and a value)"
    if not lines.content:
        found = f"{len(lines.comments)} lines of comments" if lines.comments else "blank lines"
        return Problem(path, expected, found)
    first = lines.content[0].strip()[:60]
    if len(lines.content) == 1:
        return Problem(path, expected, f"a header only ({first!r})", line=lines.numbers[0])
    found = f"{len(lines.content)} lines without two numbers (the first: {first!r})"
    dates = any(_DATE.search(line) for line in lines.content[:SAMPLE])
    help = "turn calendar dates into Julian dates first" if dates else ""
    return Problem(path, expected, found, line=lines.numbers[0], help=help)


def _head(lines: Lines, layout: Layout) -> Head:
    first = next(
        index
        for index, line in enumerate(lines.content)
        if looks_like_data(layout.cells(line), layout.decimal_comma)
    )
    for index in reversed(range(first)):
        names = _names(lines.content[index], layout)
        if not names:
            continue
        above = _names(lines.content[index - 1], layout) if index else ()
        if above and all(_UNITS.match(cell) for cell in names):
            return Head(above, names, index + 1, other=tuple(range(index - 1)))
        return Head(names, (), index + 1, other=tuple(range(index)))
    return _commented_head(lines, layout, first)


def _names(line: str, layout: Layout) -> tuple[str, ...]:
    """The cells of a line that can be names of all columns, else nothing."""
    for cells in (layout.cells(line), split(line, ","), split(line, "\t"), split(line, BLANKS)):
        names = tuple(cell.strip().strip("'\"") for cell in cells)
        if len(names) == layout.columns and not any(map(is_number, names)) and any(names):
            return names
    return ()


def _commented_head(lines: Lines, layout: Layout, first: int) -> Head:
    """Names from the comment just above the data, if it has as many words as there are columns."""
    above = [pair for pair in lines.comments if pair[0] < lines.numbers[first]]
    other = tuple(range(first))
    if above:
        number, comment = above[-1]
        names = _names(_COLUMNS.sub("", comment.lstrip("# ")), layout)
        if names and number > lines.numbers[first] - 4:
            return Head(names, (), first, commented=number, other=other)
    return Head((), (), first, other=other)


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


def _estimated_rows(file: FileBytes, rows: int) -> int | None:
    if not file.partial:
        return None
    return round(rows * file.size / max(len(file.content), 1))
