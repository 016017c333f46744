"""A report as sections of blocks; a page in HTML and pages in PDF are drawn from the same blocks.

Words may hold symbols, see `shadowscale.sheet.symbols`.
"""

from __future__ import annotations

from dataclasses import dataclass

LEFT, RIGHT = "left", "right"


@dataclass(frozen=True)
class Paragraph:
    """Running text; `quiet` words are set smaller."""

    words: str
    quiet: bool = False


@dataclass(frozen=True)
class Code:
    """Text that is to be copied as it stands."""

    text: str


@dataclass(frozen=True)
class Column:
    """A column of a table: its heading, its share of the width, its side; `small` for secondary words."""

    heading: str
    share: float
    side: str = LEFT
    small: bool = False


@dataclass(frozen=True)
class Table:
    """Rows in groups, each group under its title (empty for none)."""

    columns: tuple[Column, ...]
    groups: tuple[tuple[str, tuple[tuple[str, ...], ...]], ...]


@dataclass(frozen=True)
class Picture:
    """A figure by its name, and its caption."""

    name: str
    caption: str


@dataclass(frozen=True)
class Verdict:
    """A line of the audit; kind is `pass`, `warn` or `fail`."""

    kind: str
    title: str
    words: str
    numbers: str
    source: str


@dataclass(frozen=True)
class Verdicts:
    """Lines of the audit, one below the other."""

    items: tuple[Verdict, ...]


@dataclass(frozen=True)
class Result:
    """A main result: what, value, error, unit."""

    symbol: str
    value: str
    error: str
    unit: str
    meaning: str


@dataclass(frozen=True)
class Results:
    """Main results, large; a row a star, or a row of what there is."""

    rows: tuple[tuple[str, tuple[Result, ...]], ...]


Block = Paragraph | Code | Table | Picture | Verdicts | Results


@dataclass(frozen=True)
class Section:
    """A titled part of the report."""

    name: str
    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True)
class Document:
    """A whole report."""

    title: str
    subtitle: str
    sections: tuple[Section, ...]
