"""Setting words on the pages of a PDF: letters, widths, lines.

Lengths are in points (1/72 inch). The letters are STIX, which come with matplotlib.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import lru_cache

from shadowscale.sheet.figure_frame import INK
from shadowscale.sheet.symbols import Run, runs
from shadowscale.sheet.truetype import letters

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
    """Letters of one file in a row: their numbers, the characters they stand for, how wide they are [em]."""

    file: str
    numbers: tuple[int, ...]
    characters: str
    width: float


def spelled(text: str, face: Face) -> tuple[Spelled, ...]:
    """A text in the letters of a face; a character that it lacks is taken from another file."""
    return _spelled(text, face.bold, face.italic, face.fixed)


@lru_cache(maxsize=8192)
def _spelled(text: str, bold: bool, italic: bool, fixed: bool) -> tuple[Spelled, ...]:
    main = FIXED_WIDTH if fixed else FILES[bold, italic]
    found: list[tuple[str, list[int], list[str]]] = []
    for character in text:
        code = ord(character)
        file = next((each for each in (main, OTHERS) if code in letters(each).glyphs), main)
        if not found or found[-1][0] != file:
            found.append((file, [], []))
        found[-1][1].append(letters(file).glyphs.get(code, 0))
        found[-1][2].append(character)
    return tuple(
        Spelled(
            file,
            tuple(numbers),
            "".join(characters),
            sum(letters(file).advances[number] for number in numbers) / letters(file).per_em,
        )
        for file, numbers, characters in found
    )
