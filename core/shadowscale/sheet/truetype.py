"""TrueType letters: how wide each is, and a file with only those that a document uses.

Tables as in the OpenType specification 1.9 (head, hhea, hmtx, maxp, cmap 4 and 12, loca, glyf).
"""

from __future__ import annotations

import struct
from functools import cached_property, lru_cache
from pathlib import Path

import numpy as np

KEPT = ("cvt ", "fpgm", "glyf", "head", "hhea", "hmtx", "loca", "maxp", "prep")
WORDS_FOLLOW, MORE_PARTS = 0x0001, 0x0020  # flags of a part of a composite letter
SCALED = {0x0008: 2, 0x0040: 4, 0x0080: 8}  # flags of its transformation: bytes of it


class TrueType:
    """One file of letters."""

    def __init__(self, content: bytes) -> None:
        self._content = content
        count = struct.unpack_from(">H", content, 4)[0]
        entries = (struct.unpack_from(">4sIII", content, 12 + 16 * n) for n in range(count))
        self._places = {tag.decode("latin-1"): (start, size) for tag, _, start, size in entries}
        head = self._table("head")
        self.per_em = struct.unpack_from(">H", head, 18)[0]
        self.box = struct.unpack_from(">4h", head, 36)
        self.ascent, self.descent = struct.unpack_from(">2h", self._table("hhea"), 4)

    def _table(self, tag: str) -> bytes:
        start, size = self._places.get(tag, (0, 0))
        return self._content[start : start + size]

    @cached_property
    def glyphs(self) -> dict[int, int]:
        """Number of the letter of each character."""
        table = self._table("cmap")
        count = struct.unpack_from(">H", table, 2)[0]
        entries = [struct.unpack_from(">HHI", table, 4 + 8 * n) for n in range(count)]
        unicode = {
            struct.unpack_from(">H", table, start)[0]: table[start:]
            for platform, encoding, start in entries
            if (platform, encoding) in ((0, 3), (0, 4), (3, 1), (3, 10))
        }
        if 12 in unicode:
            return _groups(unicode[12])
        return _segments(unicode[4])

    @cached_property
    def advances(self) -> list[int]:
        """Width of each letter [1/per_em]."""
        count = struct.unpack_from(">H", self._table("hhea"), 34)[0]
        wide = np.frombuffer(self._table("hmtx"), dtype=">u2", count=2 * count)[::2].tolist()
        found: list[int] = wide + wide[-1:] * (self._number - count)
        return found

    @cached_property
    def _number(self) -> int:
        number: int = struct.unpack_from(">H", self._table("maxp"), 4)[0]
        return number

    @cached_property
    def _outlines(self) -> list[int]:
        """Where the outline of each letter begins, and where the last one ends."""
        long = struct.unpack_from(">h", self._table("head"), 50)[0]
        places = np.frombuffer(self._table("loca"), dtype=">u4" if long else ">u2")
        found: list[int] = (
            places[: self._number + 1].astype(np.int64) * (1 if long else 2)
        ).tolist()
        return found

    def with_only(self, numbers: set[int]) -> bytes:
        """A file in which only these letters have an outline; numbers stay as they are."""
        outlines, starts = self._table("glyf"), self._outlines
        wanted = self._with_parts({0, *numbers})
        pieces, places, end = [], [0], 0
        for number in range(self._number):
            if number in wanted:
                piece = outlines[starts[number] : starts[number + 1]]
                piece += bytes(-len(piece) % 4)
                pieces.append(piece)
                end += len(piece)
            places.append(end)
        head = bytearray(self._table("head"))
        struct.pack_into(">h", head, 50, 1)
        tables = {tag: self._table(tag) for tag in KEPT if tag in self._places}
        tables |= {"glyf": b"".join(pieces), "head": bytes(head)}
        tables["loca"] = np.asarray(places, dtype=">u4").tobytes()
        return _file(tables)

    def _with_parts(self, numbers: set[int]) -> set[int]:
        """The letters and those that they are put together from."""
        found: set[int] = set()
        waiting = [number for number in numbers if number < self._number]
        while waiting:
            number = waiting.pop()
            if number not in found:
                found.add(number)
                waiting += self._parts(number)
        return found

    def _parts(self, number: int) -> list[int]:
        start, end = self._outlines[number : number + 2]
        piece = self._table("glyf")[start:end]
        if not piece or struct.unpack_from(">h", piece)[0] >= 0:
            return []
        parts, at, flags = [], 10, MORE_PARTS
        while flags & MORE_PARTS:
            flags, part = struct.unpack_from(">HH", piece, at)
            parts.append(part)
            at += 8 if flags & WORDS_FOLLOW else 6
            at += next((size for flag, size in SCALED.items() if flags & flag), 0)
        return parts


@lru_cache(maxsize=8)
def letters(name: str) -> TrueType:
    """The letters of a file that comes with matplotlib."""
    from matplotlib import get_data_path

    return TrueType((Path(get_data_path()) / "fonts" / "ttf" / name).read_bytes())


def _groups(table: bytes) -> dict[int, int]:
    """Format 12: runs of characters."""
    count = struct.unpack_from(">I", table, 12)[0]
    found: dict[int, int] = {}
    for n in range(count):
        first, last, glyph = struct.unpack_from(">III", table, 16 + 12 * n)
        found |= {character: glyph + character - first for character in range(first, last + 1)}
    return found


def _segments(table: bytes) -> dict[int, int]:
    """Format 4: segments of characters, shifted or looked up."""
    half = struct.unpack_from(">H", table, 6)[0] // 2
    ends, starts, shifts, ranges = (
        struct.unpack_from(f">{half}H", table, 14 + 2 * half * n + (2 if n else 0))
        for n in range(4)
    )
    found = {}
    for n, (start, end, shift, away) in enumerate(zip(starts, ends, shifts, ranges)):
        for character in range(start, min(end, 0xFFFE) + 1):
            glyph = character
            if away:
                place = 16 + 6 * half + 2 * n + away + 2 * (character - start)
                glyph = struct.unpack_from(">H", table, place)[0]
            if glyph or not away:
                found[character] = (glyph + shift) & 0xFFFF
    return found


def _file(tables: dict[str, bytes]) -> bytes:
    """Tables put together."""
    count = len(tables)
    power = count.bit_length() - 1
    head = struct.pack(">IHHHH", 0x00010000, count, 16 << power, power, 16 * (count - (1 << power)))
    at = 12 + 16 * count
    entries, bodies = [], []
    for tag, content in sorted(tables.items()):
        body = content + bytes(-len(content) % 4)
        check = int(np.frombuffer(body, dtype=">u4").sum(dtype=np.uint64)) & 0xFFFFFFFF
        entries.append(struct.pack(">4sIII", tag.encode("latin-1"), check, at, len(content)))
        bodies.append(body)
        at += len(body)
    return head + b"".join(entries) + b"".join(bodies)
