"""The report as pages of A4: the blocks of the document set below one another.

Lengths are in points (1/72 inch), heights from the top of the page.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from shadowscale.sheet.document import (
    RIGHT,
    Block,
    Code,
    Document,
    Paragraph,
    Picture,
    Results,
    Section,
    Table,
    Verdict,
    Verdicts,
)
from shadowscale.sheet.figure_frame import FAINT, INK
from shadowscale.sheet.report_pages import (
    PAPER,
    QUIET,
    SIDE,
    SMALL,
    WIDTH,
    Bookmark,
    Figures,
    Page,
    WithoutFigures,
    draw_pages,
    heights_of,
    mark_colour,
    with_figures,
)
from shadowscale.sheet.report_text import Face, Line, Piece, lines_of, text_width
from shadowscale.sheet.symbols import flat

TOP, FOOT = 56.0, 58.0
LEADING = 1.28
BODY = Face(9.5)
CELL, CELL_SMALL, HEADING = Face(8.5), Face(7.5, colour=QUIET), Face(8.5, bold=True)
TITLE, SECTION, GROUP = Face(20, bold=True), Face(13, bold=True), Face(8.5, italic=True)
CODE = Face(6.5, fixed=True)
CELL_GAP = 7.0


@dataclass(eq=False)
class Setter:
    """The hand that sets blocks on pages; `y` is how far down the present page is full.

    heights : of the figures, by name
    """

    heights: Mapping[str, float]
    pages: list[Page] = field(default_factory=lambda: [Page()])
    bookmarks: list[Bookmark] = field(default_factory=list)
    y: float = TOP

    @property
    def page(self) -> Page:
        return self.pages[-1]

    def room(self, height: float) -> bool:
        """Whether so much fits on what is left; begins a page where not."""
        if self.y + height <= PAPER[1] - FOOT:
            return True
        self.pages.append(Page())
        self.y = TOP
        return False

    def put(self, line: Line, x: float, foot: float) -> None:
        """A line with its foot at a height from the top."""
        self.page.pieces += [
            Piece(each.text, each.face, x + each.x, foot - each.y) for each in line.pieces
        ]

    def rule(self, width: float, *, colour: str = INK) -> None:
        """A line across the page where it is full to."""
        self.page.rules.append((SIDE, SIDE + WIDTH, self.y, width, colour))

    def text(
        self, words: str, face: Face, *, x: float = 0.0, width: float = WIDTH, after: float = 5.0
    ) -> None:
        """A paragraph, over the page's end where it must."""
        step = face.size * LEADING
        for line in lines_of(words, face, width):
            self.room(step)
            self.put(line, SIDE + x, self.y + face.size)
            self.y += step
        self.y += after


def as_pdf(document: Document, figures: Figures) -> bytes:
    """The report as a PDF file; the same solution gives the same bytes.

    Parameters
    ----------
    document : Document
    figures : mapping of name and format to content
        Every picture in the document, as `pdf` at least.
    """
    return with_figures(text_pages(document, heights_of(figures)), figures)


def text_pages(document: Document, heights: Mapping[str, float]) -> WithoutFigures:
    """The pages with room for figures of known heights."""
    setter = set_document(document, heights)
    return draw_pages(setter.pages, document, setter.bookmarks)


def set_document(document: Document, heights: Mapping[str, float]) -> Setter:
    """The document set on pages."""
    setter = Setter(heights)
    _head(setter, document)
    for section in document.sections:
        _section(setter, section)
    return setter


def _head(setter: Setter, document: Document) -> None:
    setter.text(document.title, TITLE, after=2)
    setter.text(document.subtitle, SMALL, after=4)


def _section(setter: Setter, section: Section) -> None:
    first = _least_height(setter, section.blocks[0]) if section.blocks else 0.0
    if setter.room(34 + first):
        setter.y += 12
    setter.rule(0.5, colour=FAINT)
    setter.y += 8
    setter.bookmarks.append(Bookmark(section.title, len(setter.pages) - 1, setter.y - 8))
    setter.text(section.title, SECTION, after=5)
    for block in section.blocks:
        _block(setter, block)


def _least_height(setter: Setter, block: Block) -> float:
    """What must stand on the same page as the title above."""
    if isinstance(block, Picture):
        return _picture_height(setter, block)
    return 60.0


def _block(setter: Setter, block: Block) -> None:
    if isinstance(block, Paragraph):
        setter.text(block.words, SMALL if block.quiet else BODY)
    elif isinstance(block, Code):
        _code(setter, block)
    elif isinstance(block, Table):
        _table(setter, block)
    elif isinstance(block, Picture):
        _picture(setter, block)
    elif isinstance(block, Verdicts):
        for item in block.items:
            _verdict(setter, item)
    else:
        _results(setter, block)


def _code(setter: Setter, block: Code) -> None:
    step = CODE.size * LEADING
    for part in block.text.strip("\n").split("\n\n"):  # an entry stays on one page
        rows = [row for text in part.splitlines() for row in _code_rows(text)]
        setter.room(step * min(len(rows), 20))
        for x, line in rows:
            setter.room(step)
            setter.put(line, SIDE + x, setter.y + CODE.size)
            setter.y += step
        setter.y += step / 2
    setter.y += 4


def _code_rows(text: str) -> list[tuple[float, Line]]:
    """A line of code in lines that fit, each with its indent."""
    bare = text.lstrip(" ")
    x = text_width(" ", CODE) * (len(text) - len(bare))
    indent = text_width("    ", CODE)
    lines = lines_of(bare, CODE, WIDTH - x - indent)
    return [(x + (indent if number else 0.0), line) for number, line in enumerate(lines)]


def _results(setter: Setter, block: Results) -> None:
    """Main results: a row a star, symbol above value."""
    label = 46.0
    setter.rule(0.8)
    for title, items in block.rows:
        setter.room(34)
        setter.y += 6
        setter.put(lines_of(title, HEADING, label)[0], SIDE, setter.y + 21)
        width = (WIDTH - label) / max(len(items), 4)
        for number, item in enumerate(items):
            x = SIDE + label + number * width
            setter.put(lines_of(item.symbol, SMALL, width)[0], x, setter.y + 8)
            words = f"{item.value}\N{NO-BREAK SPACE}"
            value = lines_of(words, Face(11.5, bold=True), width)[0]
            setter.put(value, x, setter.y + 21)
            rest = lines_of(
                f"{item.error} {item.unit}".replace(" ", "\N{NO-BREAK SPACE}"), SMALL, 999
            )
            if value.width + rest[0].width > width - 6:  # below, where the value is long
                setter.put(rest[0], x, setter.y + 31)
            else:
                setter.put(rest[0], x + value.width, setter.y + 21)
        long = any(_wide(item.value, item.error, item.unit, width) for item in items)
        setter.y += 37 if long else 27
        setter.rule(0.4, colour=FAINT)
    setter.y += 8


def _wide(value: str, error: str, unit: str, width: float) -> bool:
    words = text_width(f"{value}\N{NO-BREAK SPACE}", Face(11.5, bold=True))
    return words + text_width(f"{error} {flat(unit)}", SMALL) > width - 6


def _picture_height(setter: Setter, block: Picture) -> float:
    """A figure with its caption."""
    caption = len(lines_of(block.caption, SMALL, WIDTH)) * SMALL.size * LEADING
    return setter.heights[block.name] + caption + 6


def _picture(setter: Setter, block: Picture) -> None:
    height = setter.heights[block.name]
    setter.room(min(_picture_height(setter, block), PAPER[1] - FOOT - TOP))
    setter.page.pictures.append((block.name, SIDE, setter.y + height))
    setter.y += height + 4
    setter.text(block.caption, SMALL, after=8)


def _verdict(setter: Setter, item: Verdict) -> None:
    x = 15.0
    colour = mark_colour(item.kind)
    said = lines_of(item.words, CELL, WIDTH - x)
    source = lines_of(item.source, CELL_SMALL, WIDTH - x) if item.source else []
    height = 11 + len(said) * CELL.size * LEADING + len(source) * CELL_SMALL.size * LEADING
    setter.room(height + 4)
    foot = setter.y + 8.5
    setter.page.marks.append((SIDE + 4.5, foot - 3, item.kind))
    kind = Face(8.5, bold=True, colour=colour)
    setter.put(lines_of(item.kind, kind, 60)[0], SIDE + x, foot)
    setter.put(lines_of(item.title, HEADING, WIDTH)[0], SIDE + x + 25, foot)
    if item.numbers:
        away = text_width(item.title, HEADING) + 33
        setter.put(lines_of(item.numbers, CELL_SMALL, WIDTH)[0], SIDE + x + away, foot)
    setter.y += 11
    setter.text(item.words, CELL, x=x, width=WIDTH - x, after=0)
    if item.source:
        setter.text(item.source, CELL_SMALL, x=x, width=WIDTH - x, after=0)
    setter.y += 4


def _table(setter: Setter, table: Table) -> None:
    widths = _widths(table)
    setter.room(44)
    _table_head(setter, table, widths)
    for title, rows in table.groups:
        if title:
            if not setter.room(32):
                _table_head(setter, table, widths)
            setter.y += 4
            setter.put(lines_of(title, GROUP, WIDTH)[0], SIDE, setter.y + 9)
            setter.y += 13
        for row in rows:
            _row(setter, table, widths, row)
    setter.rule(0.8)
    setter.y += 10


def _widths(table: Table) -> list[float]:
    """Widths of the columns: what their words need, the rest to those that can be broken."""
    count = len(table.columns)
    needs = []
    for number, column in enumerate(table.columns):
        face = CELL_SMALL if column.small else CELL
        texts = [row[number] for _, rows in table.groups for row in rows]
        widest = max((lines_of(text, face, 9999)[0].width for text in texts), default=0.0)
        needs.append(max(widest, text_width(flat(column.heading), HEADING)) + 1)
    whole = WIDTH - CELL_GAP * (count - 1)
    if sum(needs) <= whole:
        spare = whole - sum(needs)
        return [need + spare * column.share for need, column in zip(needs, table.columns)]
    total = sum(column.share for column in table.columns)
    fair = [whole * column.share / total for column in table.columns]
    soft = [n for n, column in enumerate(table.columns) if column.small and needs[n] > fair[n]]
    soft = soft or [n for n in range(count) if needs[n] > fair[n]]
    fixed = sum(needs[n] for n in range(count) if n not in soft)
    wanted = sum(needs[n] for n in soft)
    left = max(whole - fixed, 40.0 * len(soft))
    return [left * needs[n] / wanted if n in soft else needs[n] for n in range(count)]


def _table_head(setter: Setter, table: Table, widths: Sequence[float]) -> None:
    setter.rule(0.8)
    setter.y += 3
    cells = [
        lines_of(column.heading, HEADING, width) for column, width in zip(table.columns, widths)
    ]
    _cells(setter, table, widths, cells, HEADING.size)
    setter.y += 3
    setter.rule(0.5)
    setter.y += 2


def _row(setter: Setter, table: Table, widths: Sequence[float], row: Sequence[str]) -> None:
    cells = [
        lines_of(text, CELL_SMALL if column.small else CELL, width)
        for text, column, width in zip(row, table.columns, widths)
    ]
    height = max(map(len, cells)) * CELL.size * LEADING + 3
    if not setter.room(height):
        _table_head(setter, table, widths)
    _cells(setter, table, widths, cells, CELL.size)
    setter.y += 3


def _cells(
    setter: Setter,
    table: Table,
    widths: Sequence[float],
    cells: Sequence[Sequence[Line]],
    size: float,
) -> None:
    step = size * LEADING
    x = SIDE
    for column, width, lines in zip(table.columns, widths, cells):
        for number, line in enumerate(lines):
            away = width - line.width if column.side == RIGHT else 0.0
            setter.put(line, x + away, setter.y + size + number * step)
        x += width + CELL_GAP
    setter.y += max(map(len, cells)) * step
