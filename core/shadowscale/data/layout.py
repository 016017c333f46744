"""How a text table is laid out: its separator and decimal mark, found from a sample of its lines."""

from __future__ import annotations

import csv
import re
from collections import Counter
from dataclasses import dataclass

from shadowscale.data.cells import is_missing, is_number

BLANKS, MIXED = "blanks", "mixed"
NAMES = {
    "\t": "tabs",
    ";": "semicolons",
    ",": "commas",
    "|": "bars",
    BLANKS: "blanks",
    MIXED: "mixed separators",
}
_WORD = re.compile(r"\s*[A-Za-z][\w' +-]*$")  # a band or a source, as a cell of its own
_MIXED = re.compile(r"[\s,;|]+")


@dataclass(frozen=True)
class Layout:
    """Separator, decimal mark, and number of columns of a text table."""

    separator: str
    decimal_comma: bool
    columns: int

    @property
    def words(self) -> str:
        """The layout in words."""
        comma = ", decimal commas" if self.decimal_comma else ""
        return f"text separated by {NAMES[self.separator]}{comma}"

    def cells(self, line: str) -> list[str]:
        """The cells of one line, trailing empty cells beyond the table's columns left out."""
        cells = split(line, self.separator)
        while len(cells) > self.columns and not cells[-1].strip():
            cells.pop()
        return cells


def split(line: str, separator: str) -> list[str]:
    """Cut a line into cells; quoted cells stay whole."""
    if separator == MIXED:
        return [cell for cell in _MIXED.split(line.replace('"', "")) if cell]
    if '"' in line:
        return _split_quoted(line, separator)
    return line.split() if separator == BLANKS else line.split(separator)


def _split_quoted(line: str, separator: str) -> list[str]:
    blanks = separator == BLANKS
    text = re.sub(r"\s+", " ", line.strip()) if blanks else line
    try:
        delimiter = " " if blanks else separator
        return next(csv.reader([text], delimiter=delimiter, skipinitialspace=True), [])
    except csv.Error:
        return line.split() if blanks else line.split(separator)


def looks_like_data(cells: list[str], decimal_comma: bool) -> bool:
    """Whether a line holds at least two numbers: a time and a value."""
    return sum(is_number(cell, decimal_comma) for cell in cells) >= 2


def found_layout(sample: list[str]) -> Layout | None:
    """The layout that turns most cells of the sample into numbers and words; None if no line has two numbers.

    Decimal commas are tried with every separator but the comma itself. Among equals the
    order of the candidates decides: explicit separators come before blanks.
    """
    candidates = [
        (separator, decimal_comma)
        for separator in ("\t", ";", ",", "|", BLANKS)
        for decimal_comma in (False, True)
        if not (separator == "," and decimal_comma)
    ]
    scored = [_score(sample, *candidate) for candidate in [*candidates, (MIXED, False)]]
    best = max(scored, key=lambda pair: pair[0])
    return best[1] if best[0] > 0 else None


def _score(sample: list[str], separator: str, decimal_comma: bool) -> tuple[float, Layout | None]:
    """Mean over the lines of the share of cells that are numbers, words or empty, ragged lines nought."""
    rows = [split(line, separator) for line in sample]
    looks = [looks_like_data(cells, decimal_comma) for cells in rows]
    data = [cells for cells, is_data in zip(rows, looks) if is_data]
    if not data:
        return 0.0, None
    columns = Counter(map(len, data)).most_common(1)[0][0]
    data = [cells for cells in data if len(cells) == columns]
    others = [cells for cells, is_data in zip(rows, looks) if not is_data]
    score = sum(_share(cells, decimal_comma, words=separator != MIXED) for cells in data)
    score *= 1.0 if separator != MIXED else 0.9
    needed = not decimal_comma or any("," in cell for cells in data for cell in cells)
    columns -= _ends_with_separator(data, others)
    return (score / len(sample) if needed else 0.0), Layout(separator, decimal_comma, columns)


def _ends_with_separator(data: list[list[str]], others: list[list[str]]) -> bool:
    """Whether the lines end with a separator behind the last column, and not with an empty cell."""
    columns = len(data[0])
    named = any(len(cells) == columns and cells[-1].strip() for cells in others)
    return columns > 2 and not named and all(not cells[-1].strip() for cells in data)


def _share(cells: list[str], decimal_comma: bool, *, words: bool) -> float:
    """Share of cells that make sense; where any separator may cut, `words` may be pieces of remarks."""
    good = sum(
        is_number(cell, decimal_comma) or is_missing(cell) or (words and bool(_WORD.match(cell)))
        for cell in cells
    )
    return good / len(cells)
