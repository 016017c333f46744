"""Pages of the report as PDF: fpdf2 sets words, rules and marks, pypdf puts the figures on their places.

Lengths are in points (1/72 inch), from the upper left corner of a page.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from datetime import UTC, datetime
from io import BytesIO
from typing import TYPE_CHECKING, cast

from shadowscale.sheet.document import Document
from shadowscale.sheet.report_text import Face, Piece, font_path, lines_of, spelled, text_width
from shadowscale.sheet.symbols import flat

if TYPE_CHECKING:
    from fpdf import FPDF
    from pypdf import PageObject, PdfWriter

PAPER = (595.28, 841.89)  # A4
SIDE = 56.7
WIDTH = PAPER[0] - 2 * SIDE
FOOT_LINE = 34.0
NO_DATE = datetime(2000, 1, 1, tzinfo=UTC)  # the file's identifier would differ with every date
QUIET = "#5a626b"
SMALL = Face(8.0, colour=QUIET)
MARK = 2.8  # half the size of a mark
PASS, WARN, FAIL = "#00714f", "#b36b00", "#b03c00"
TRIANGLE = ((0.0, -1.1), (1.15, 0.9), (-1.15, 0.9))
OCTAGON = (
    (1.0, 0.42), (0.42, 1.0), (-0.42, 1.0), (-1.0, 0.42),
    (-1.0, -0.42), (-0.42, -1.0), (0.42, -1.0), (1.0, -0.42),
)  # fmt: skip
Figures = Mapping[
    str, Mapping[str, bytes]
]  # by name and format; here a `pdf` of one page is needed


@dataclass(eq=False)
class Page:
    """What stands on a page: words, rules (left, right, y, width, colour), marks, figures (left, foot)."""

    pieces: list[Piece] = field(default_factory=list)
    rules: list[tuple[float, float, float, float, str]] = field(default_factory=list)
    marks: list[tuple[float, float, str]] = field(default_factory=list)
    pictures: list[tuple[str, float, float]] = field(default_factory=list)


@dataclass(frozen=True)
class Bookmark:
    """A title, the page it stands on (from 0), how far down it stands there."""

    title: str
    page: int
    y: float


def mark_colour(kind: str) -> str:
    """The colour of a verdict."""
    return {"pass": PASS, "warn": WARN}.get(kind, FAIL)


@dataclass(frozen=True)
class WithoutFigures:
    """A file of pages with room for figures: its content, and what is still to be done."""

    content: bytes
    title: str
    pictures: tuple[tuple[tuple[str, float, float], ...], ...]
    bookmarks: tuple[Bookmark, ...]


def heights_of(figures: Figures) -> dict[str, float]:
    """The heights of figures."""
    return {name: float(_page_of(files["pdf"]).mediabox.height) for name, files in figures.items()}


def _page_of(content: bytes) -> PageObject:
    from pypdf import PdfReader

    return PdfReader(BytesIO(content)).pages[0]


def draw_pages(
    pages: Sequence[Page], document: Document, bookmarks: Sequence[Bookmark]
) -> WithoutFigures:
    """Pages with the document's title and page numbers below."""
    for number, page in enumerate(pages, 1):
        _foot(page, document.title, f"{number} / {len(pages)}")
    pictures = tuple(tuple(page.pictures) for page in pages)
    return WithoutFigures(_drawn(pages), document.title, pictures, tuple(bookmarks))


def with_figures(drawn: WithoutFigures, figures: Figures) -> bytes:
    """The file with the figures on their places."""
    from pypdf import PdfWriter
    from pypdf.generic import Fit

    writer = PdfWriter(clone_from=BytesIO(drawn.content))
    for page, pictures in zip(writer.pages, drawn.pictures):
        for name, left, foot in pictures:
            _place(writer, page, name, figures[name]["pdf"], left=left, low=PAPER[1] - foot)
    for mark in drawn.bookmarks:
        place = Fit.xyz(top=round(PAPER[1] - mark.y, 1))
        writer.add_outline_item(title=flat(mark.title), page_number=mark.page, fit=place)
    writer.pdf_header = "%PDF-1.4"  # of the figures; that of the pages alone would be lower
    # in place of all that the libraries say of themselves and of the time
    title = flat(drawn.title).encode("utf-16", "replace").decode("utf-16")
    writer.metadata = {"/Title": title, "/Creator": "shadowscale"}
    stream = BytesIO()
    writer.write(stream)
    return stream.getvalue()


def _place(
    writer: PdfWriter, page: PageObject, name: str, content: bytes, *, left: float, low: float
) -> None:
    """Put a figure on a page as a form: nothing in it need be read or written anew (ISO 32000-1, 8.10)."""
    from pypdf.generic import DictionaryObject, EncodedStreamObject, NameObject

    figure, own = _page_of(content), NameObject(f"/{name}")
    form = cast(EncodedStreamObject, figure["/Contents"].get_object()).clone(writer)
    form[NameObject("/Type")] = NameObject("/XObject")
    form[NameObject("/Subtype")] = NameObject("/Form")
    form[NameObject("/BBox")] = figure.mediabox.clone(writer)
    form[NameObject("/Resources")] = figure["/Resources"].clone(writer)
    resources = cast(DictionaryObject, page["/Resources"].get_object())
    forms = resources.setdefault(NameObject("/XObject"), DictionaryObject())
    cast(DictionaryObject, forms.get_object())[own] = form.indirect_reference
    words = cast(EncodedStreamObject, page["/Contents"].get_object())
    place = f"\nq 1 0 0 1 {left:.2f} {low:.2f} cm {own} Do Q\n".encode()
    words.set_data(words.get_data() + place)


def _foot(page: Page, title: str, count: str) -> None:
    face = replace(SMALL, size=7.5)
    foot = PAPER[1] - FOOT_LINE
    for words, x in ((title, SIDE), (count, PAPER[0] - SIDE - text_width(count, face))):
        line = lines_of(words, face, WIDTH - 60)[0]
        page.pieces += [replace(each, x=x + each.x, y=foot - each.y) for each in line.pieces]


def _drawn(pages: Sequence[Page]) -> bytes:
    """A file of the pages without their figures."""
    from fpdf import FPDF, ViewerPreferences

    pdf = FPDF(unit="pt", format=PAPER)
    pdf.set_creation_date(NO_DATE)
    pdf.set_lang("en")
    pdf.page_mode = "USE_OUTLINES"
    pdf.viewer_preferences = ViewerPreferences(display_doc_title=True)
    for page in pages:
        pdf.add_page()
        for left, right, y, width, colour in page.rules:
            pdf.set_draw_color(colour)
            pdf.set_line_width(width)
            pdf.line(left, y, right, y)
        for x, y, kind in page.marks:
            _draw_mark(pdf, x, y, kind)
        for piece in page.pieces:
            _draw_piece(pdf, piece)
    return bytes(pdf.output())


def _draw_piece(pdf: FPDF, piece: Piece) -> None:
    x = piece.x
    pdf.set_text_color(piece.face.colour)
    for part in spelled(piece.text, piece.face):
        name = part.file.removesuffix(".ttf").lower()
        if name not in pdf.fonts:
            pdf.add_font(name, fname=font_path(part.file))
        pdf.set_font(name, size=piece.face.size)
        pdf.text(x, piece.y, part.text)
        x += piece.face.size * part.width


def _draw_mark(pdf: FPDF, x: float, y: float, kind: str) -> None:
    """A disc, a triangle or an octagon."""
    pdf.set_fill_color(mark_colour(kind))
    if kind == "pass":
        pdf.circle(x, y, MARK, style="F")
    else:
        corners = TRIANGLE if kind == "warn" else OCTAGON
        pdf.polygon([(x + MARK * a, y + MARK * b) for a, b in corners], style="F")
