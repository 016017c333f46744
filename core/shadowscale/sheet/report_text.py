"""Setting words on the pages of a PDF: widths, lines, and drawing them at once.

Lengths are in points (1/72 inch). The letters are STIX, which come with matplotlib.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from shadowscale.sheet.figure_frame import INK
from shadowscale.sheet.symbols import Run, runs

if TYPE_CHECKING:
    from matplotlib.figure import Figure

FAMILY, FIXED_WIDTH = "STIXGeneral", "DejaVu Sans Mono"
SMALLER, LOWER, HIGHER = 0.72, 0.18, 0.34  # size and shift of indices, in sizes of the letters
MEASURED_AT = 100


@dataclass(frozen=True)
class Face:
    """Letters: size [points], weight, slant, colour, whether all are of one width."""

    size: float = 9.5
    bold: bool = False
    italic: bool = False
    colour: str = INK
    fixed: bool = False


@dataclass(frozen=True)
class Piece:
    """A run of letters at its place in a line [points from the line's left end and foot]."""

    text: str
    face: Face
    x: float
    y: float


@dataclass(frozen=True)
class Line:
    """Pieces side by side, and how long they are together."""

    pieces: tuple[Piece, ...]
    width: float


@dataclass(frozen=True)
class _Word:
    """What stays together on a line; `gap` is the blank after it."""

    pieces: tuple[Piece, ...]
    width: float
    gap: float


def text_width(text: str, face: Face) -> float:
    """Length of a text on one line."""
    return _width(text, face.bold, face.italic, face.fixed) * face.size / MEASURED_AT


def lines_of(words: str, face: Face, width: float) -> list[Line]:
    """Words broken into lines no longer than `width`; a word that is longer is cut."""
    lines: list[Line] = []
    pieces: list[Piece] = []
    x = gap = 0.0
    for word in _fitting(words, face, width):
        if pieces and x + gap + word.width > width:
            lines.append(Line(tuple(pieces), x))
            pieces, x, gap = [], 0.0, 0.0
        _append(pieces, word, at=x + gap, blank=gap > 0)
        x, gap = x + gap + word.width, word.gap
    if pieces:
        lines.append(Line(tuple(pieces), x))
    return lines or [Line((), 0.0)]


def _append(pieces: list[Piece], word: _Word, *, at: float, blank: bool) -> None:
    """A word at its place; plain words become one piece with those before, which draws faster."""
    first, last = word.pieces[0], pieces[-1] if pieces else None
    rest = word.pieces
    if blank and last is not None and (last.face, last.y) == (first.face, first.y):
        pieces[-1] = replace(last, text=f"{last.text} {first.text}")
        rest = rest[1:]
    pieces += [replace(each, x=at + each.x) for each in rest]


def _fitting(words: str, face: Face, width: float) -> Iterator[_Word]:
    """Words, those that are too long for a line in parts."""
    for word in _words(words, face):
        if word.width <= width or len(word.pieces) != 1:
            yield word
            continue
        text = word.pieces[0].text
        while text_width(text, face) > width and len(text) > 1:
            count = max(1, int(len(text) * width / text_width(text, face)))
            while count > 1 and text_width(text[:count], face) > width:
                count -= 1
            part, text = text[:count], text[count:]
            yield _Word((Piece(part, face, 0.0, 0.0),), text_width(part, face), 0.0)
        yield _Word((Piece(text, face, 0.0, 0.0),), text_width(text, face), word.gap)


def _words(words: str, face: Face) -> Iterator[_Word]:
    """Words with their symbols; a blank inside a plain run ends a word."""
    pieces: list[Piece] = []
    x = 0.0
    blank = text_width(" ", face)
    for run in runs(words):
        parts = run.text.split(" ") if run.level == 0 else [run.text]
        for number, part in enumerate(parts):
            if number and pieces:
                yield _Word(tuple(pieces), x, blank)
                pieces, x = [], 0.0
            if part:
                piece = _piece(run, part, face, x)
                pieces.append(piece)
                x += text_width(part, piece.face)
    if pieces:
        yield _Word(tuple(pieces), x, blank)


def _piece(run: Run, text: str, face: Face, x: float) -> Piece:
    size = face.size if run.level == 0 else SMALLER * face.size
    shift = {0: 0.0, -1: -LOWER, 1: HIGHER}[run.level] * face.size
    italic = run.italic or face.italic
    return Piece(text, Face(size, face.bold, italic, face.colour, face.fixed), x, shift)


@lru_cache(maxsize=8192)
def _width(text: str, bold: bool, italic: bool, fixed: bool) -> float:
    from matplotlib.ft2font import LoadFlags

    font = _font(bold, italic, fixed)
    font.set_size(MEASURED_AT, 72)
    font.set_text(text.replace(" ", "\N{NO-BREAK SPACE}"), 0.0, flags=LoadFlags.NO_HINTING)
    return float(font.get_width_height()[0]) / 64


@lru_cache(maxsize=16)
def _font(bold: bool, italic: bool, fixed: bool) -> Any:
    from matplotlib.font_manager import findfont, get_font

    return get_font([findfont(properties(Face(1.0, bold, italic, INK, fixed)))])


@lru_cache(maxsize=256)
def properties(face: Face) -> Any:
    """The letters as matplotlib knows them."""
    from matplotlib.font_manager import FontProperties

    return FontProperties(
        family=[FIXED_WIDTH if face.fixed else FAMILY, "DejaVu Sans"],
        size=face.size,
        weight="bold" if face.bold else "normal",
        style="italic" if face.italic and not face.fixed else "normal",
    )


def add_pieces(figure: Figure, pieces: Sequence[Piece]) -> None:
    """Draw pieces on a page, places in points from its lower left corner; all in one go."""
    from matplotlib.artist import Artist

    class Letters(Artist):
        """All words of a page: an artist for each would take longer than the page."""

        def draw(self, renderer: Any) -> None:
            graphics = renderer.new_gc()
            for piece in pieces:
                graphics.set_foreground(piece.face.colour)
                renderer.draw_text(
                    graphics, piece.x, piece.y, piece.text, properties(piece.face), 0.0
                )
            graphics.restore()

    figure.add_artist(Letters())
