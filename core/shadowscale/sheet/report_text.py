"""Setting words on the pages of a PDF: letters, widths, lines.

Lengths are in points (1/72 inch). The letters are STIX, which come with matplotlib.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import lru_cache
from itertools import groupby
from operator import itemgetter
from pathlib import Path

from shadowscale.sheet.figure_frame import INK
from shadowscale.sheet.symbols import Run, runs

FILES = {  # by bold and italic
    (False, False): "STIXGeneral.ttf",
    (True, False): "STIXGeneralBol.ttf",
    (False, True): "STIXGeneralItalic.ttf",
    (True, True): "STIXGeneralBolIta.ttf",
}
FIXED_WIDTH, OTHERS = "DejaVuSansMono.ttf", "DejaVuSans.ttf"
SMALLER, LOWER, HIGHER = 0.72, 0.18, 0.34  # size and shift of indices, in sizes of the letters


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
    return face.size * sum(each.width for each in spelled(text, face))


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


@dataclass(frozen=True)
class Spelled:
    """Text in the letters of one file, and how wide it is [em]."""

    file: str
    text: str
    width: float


def spelled(text: str, face: Face) -> tuple[Spelled, ...]:
    """A text in the letters of a face; a character that it lacks is taken from another file.

    One that no file has becomes the sign for such characters, U+FFFD.
    """
    return _spelled(text, FIXED_WIDTH if face.fixed else FILES[face.bold, face.italic])


@lru_cache(maxsize=8192)
def _spelled(text: str, main: str) -> tuple[Spelled, ...]:
    found = []
    for character in text:
        file = next((each for each in (main, OTHERS) if character in letter_widths(each)), None)
        found.append((OTHERS, "\N{REPLACEMENT CHARACTER}") if file is None else (file, character))
    parts = []
    for file, pairs in groupby(found, key=itemgetter(0)):
        row = "".join(character for _, character in pairs)
        widths = letter_widths(file)
        parts.append(Spelled(file, row, sum(widths[character] for character in row)))
    return tuple(parts)


@lru_cache(maxsize=8)
def letter_widths(file: str) -> dict[str, float]:
    """How wide each character of a file of letters is [em]."""
    from fontTools.ttLib import TTFont

    with TTFont(font_path(file), lazy=True) as font:
        per_em, advances = font["head"].unitsPerEm, font["hmtx"].metrics
        names = font.getBestCmap()
    return {chr(code): advances[name][0] / per_em for code, name in names.items()}


def font_path(file: str) -> Path:
    """Where a file of letters is; all of them come with matplotlib."""
    from matplotlib import get_data_path

    return Path(get_data_path()) / "fonts" / "ttf" / file
