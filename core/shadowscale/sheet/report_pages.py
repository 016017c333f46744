"""Pages of the report as PDF: words, rules, marks and figures at their places.

Lengths are in points (1/72 inch), from the lower left corner of a page.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field, replace

from shadowscale.sheet.document import Document
from shadowscale.sheet.pdf_file import Figure, PdfFile, embed_letters, text_string
from shadowscale.sheet.report_text import Face, Piece, lines_of, spelled, text_width
from shadowscale.sheet.symbols import flat
from shadowscale.sheet.truetype import letters

PAPER = (595.28, 841.89)  # A4
SIDE = 56.7
WIDTH = PAPER[0] - 2 * SIDE
FOOT_LINE = 34.0
QUIET = "#5a626b"
SMALL = Face(8.0, colour=QUIET)
MARK = 2.8  # half the size of a mark
PASS, WARN, FAIL = "#00714f", "#b36b00", "#b03c00"
TRIANGLE = ((0.0, 1.1), (1.15, -0.9), (-1.15, -0.9))
OCTAGON = (
    (1.0, 0.42), (0.42, 1.0), (-0.42, 1.0), (-1.0, 0.42),
    (-1.0, -0.42), (-0.42, -1.0), (0.42, -1.0), (1.0, -0.42),
)  # fmt: skip
ROUND = 0.5523  # handles of the four arcs of a circle


@dataclass(eq=False)
class Page:
    """What stands on a page: words, rules (left, right, height, width, colour), marks, figures."""

    pieces: list[Piece] = field(default_factory=list)
    rules: list[tuple[float, float, float, float, str]] = field(default_factory=list)
    marks: list[tuple[float, float, str]] = field(default_factory=list)
    pictures: list[tuple[Figure, float, float]] = field(default_factory=list)


@dataclass(frozen=True)
class Bookmark:
    """A title, the page it stands on (from 0), its height there."""

    title: str
    page: int
    y: float


def mark_colour(kind: str) -> str:
    """The colour of a verdict."""
    return {"pass": PASS, "warn": WARN}.get(kind, FAIL)


def write_pages(
    pdf: PdfFile, pages: Sequence[Page], document: Document, bookmarks: Sequence[Bookmark]
) -> bytes:
    """A file of pages, with the document's title and page numbers below."""
    root, tree, resources = pdf.reserve(), pdf.reserve(), pdf.reserve()
    used: dict[str, dict[int, str]] = {}
    numbers = []
    for number, page in enumerate(pages, 1):
        _foot(page, document.title, f"{number} / {len(pages)}")
        drawing = pdf.add_stream("\n".join(_operators(page, used)).encode("latin-1"))
        numbers.append(
            pdf.add(
                f"<< /Type /Page /Parent {tree} 0 R /MediaBox [0 0 {PAPER[0]} {PAPER[1]}] "
                f"/Resources {resources} 0 R /Contents {drawing} 0 R >>"
            )
        )
    figures = {figure.number for page in pages for figure, _, _ in page.pictures}
    drawn = " ".join(f"/G{number} {number} 0 R" for number in sorted(figures))
    fonts = [
        f"/{_font_name(file)} {embed_letters(pdf, _font_name(file), letters(file), found)} 0 R"
        for file, found in used.items()
    ]
    pdf.put(resources, f"<< /Font << {' '.join(fonts)} >> /XObject << {drawn} >> >>")
    kids = " ".join(f"{number} 0 R" for number in numbers)
    pdf.put(tree, f"<< /Type /Pages /Kids [{kids}] /Count {len(numbers)} >>")
    outline = _outline(pdf, bookmarks, numbers)
    pdf.put(
        root,
        f"<< /Type /Catalog /Pages {tree} 0 R /Outlines {outline} 0 R /PageMode /UseOutlines "
        "/Lang (en) /ViewerPreferences << /DisplayDocTitle true >> >>",
    )
    info = pdf.add(f"<< /Title {text_string(flat(document.title))} /Creator (shadowscale) >>")
    return pdf.written(root=root, info=info)


def _outline(pdf: PdfFile, bookmarks: Sequence[Bookmark], pages: Sequence[int]) -> int:
    """The titles of the sections beside the pages."""
    top = pdf.reserve()
    items = [pdf.reserve() for _ in bookmarks]
    for n, (item, mark) in enumerate(zip(items, bookmarks)):
        before = f"/Prev {items[n - 1]} 0 R " if n else ""
        after = f"/Next {items[n + 1]} 0 R " if n + 1 < len(items) else ""
        place = f"[{pages[mark.page]} 0 R /XYZ null {mark.y:.1f} null]"
        title = text_string(flat(mark.title))
        pdf.put(item, f"<< /Title {title} /Parent {top} 0 R {before}{after}/Dest {place} >>")
    ends = f"/First {items[0]} 0 R /Last {items[-1]} 0 R " if items else ""
    pdf.put(top, f"<< /Type /Outlines {ends}/Count {len(items)} >>")
    return top


def _foot(page: Page, title: str, count: str) -> None:
    face = replace(SMALL, size=7.5)
    for words, x in ((title, SIDE), (count, PAPER[0] - SIDE - text_width(count, face))):
        line = lines_of(words, face, WIDTH - 60)[0]
        page.pieces += [replace(each, x=x + each.x, y=FOOT_LINE + each.y) for each in line.pieces]


def _operators(page: Page, used: dict[str, dict[int, str]]) -> Iterator[str]:
    """A page as the operators of PDF; letters are noted in `used`."""
    for figure, left, bottom in page.pictures:
        yield f"q 1 0 0 1 {left:.2f} {bottom:.2f} cm /G{figure.number} Do Q"
    for left, right, at, width, colour in page.rules:
        yield f"{_colour(colour)} RG {width:g} w {left:.2f} {at:.2f} m {right:.2f} {at:.2f} l S"
    for x, y, kind in page.marks:
        yield f"{_colour(mark_colour(kind))} rg {_mark(x, y, kind)} f"
    yield "BT"
    for piece in page.pieces:
        yield from _shown(piece, used)
    yield "ET"


def _shown(piece: Piece, used: dict[str, dict[int, str]]) -> Iterator[str]:
    face, x = piece.face, piece.x
    yield f"{_colour(face.colour)} rg"
    for part in spelled(piece.text, face):
        used.setdefault(part.file, {}).update(zip(part.numbers, part.characters))
        row = "".join(f"{number:04x}" for number in part.numbers)
        yield f"/{_font_name(part.file)} {face.size:g} Tf 1 0 0 1 {x:.2f} {piece.y:.2f} Tm <{row}> Tj"
        x += face.size * part.width


def _font_name(file: str) -> str:
    return file.removesuffix(".ttf")


def _colour(colour: str) -> str:
    return " ".join(f"{int(colour[at : at + 2], 16) / 255:.3f}" for at in (1, 3, 5))


def _mark(x: float, y: float, kind: str) -> str:
    """A disc, a triangle or an octagon."""
    if kind == "pass":
        r, h = MARK, ROUND * MARK
        arcs = (
            (r, h, h, r, 0, r),
            (-h, r, -r, h, -r, 0),
            (-r, -h, -h, -r, 0, -r),
            (h, -r, r, -h, r, 0),
        )
        curves = (
            " ".join(f"{(x, y)[n % 2] + each:.2f}" for n, each in enumerate(arc)) + " c"
            for arc in arcs
        )
        return f"{x + r:.2f} {y:.2f} m {' '.join(curves)}"
    corners = TRIANGLE if kind == "warn" else OCTAGON
    places = [f"{x + MARK * a:.2f} {y + MARK * b:.2f}" for a, b in corners]
    return f"{places[0]} m " + " ".join(f"{place} l" for place in places[1:]) + " h"
