"""PDF files: numbered objects, embedded letters, figures as parts of pages (ISO 32000-1).

Written here because matplotlib sets words letter by letter: a report of twelve pages would take it
longer than the fit.
"""

from __future__ import annotations

import re
import zlib
from collections.abc import Iterable
from dataclasses import dataclass

from shadowscale.sheet.truetype import TrueType

LEVEL = 6  # of compression
_REFERENCE = re.compile(rb"\b(\d+) 0 R\b")
_LEFT_OUT = re.compile(rb"/Type\s*/(?:Catalog|Pages|Page)\b")


class PdfFile:
    """Objects as they are added; `written` puts them into a file."""

    def __init__(self) -> None:
        self._objects: list[bytes] = []

    def reserve(self) -> int:
        """The number of an object that comes later."""
        self._objects.append(b"null")
        return len(self._objects)

    def put(self, number: int, body: str | bytes) -> None:
        """The content of a reserved object."""
        self._objects[number - 1] = body.encode("latin-1") if isinstance(body, str) else body

    def add(self, body: str | bytes) -> int:
        """An object; its number."""
        number = self.reserve()
        self.put(number, body)
        return number

    def add_stream(self, content: bytes, entries: str = "") -> int:
        """A compressed stream with further entries of its dictionary."""
        packed = zlib.compress(content, LEVEL)
        head = f"<< /Length {len(packed)} /Filter /FlateDecode {entries} >>\nstream\n"
        return self.add(head.encode("latin-1") + packed + b"\nendstream")

    def written(self, *, root: int, info: int) -> bytes:
        """The whole file."""
        parts = [b"%PDF-1.5\n%\xe2\xe3\xcf\xd3\n"]
        places, at = [], len(parts[0])
        for number, body in enumerate(self._objects, 1):
            places.append(at)
            parts.append(b"%d 0 obj\n%b\nendobj\n" % (number, body))
            at += len(parts[-1])
        count = len(places) + 1
        table = "".join(f"{place:010d} 00000 n \n" for place in places)
        parts.append(
            f"xref\n0 {count}\n0000000000 65535 f \n{table}trailer\n"
            f"<< /Size {count} /Root {root} 0 R /Info {info} 0 R >>\nstartxref\n{at}\n%%EOF\n".encode()
        )
        return b"".join(parts)


def text_string(text: str) -> str:
    """Words of a title or a bookmark."""
    return f"<feff{text.encode('utf-16-be', 'replace').hex()}>"


def embed_letters(pdf: PdfFile, name: str, letters: TrueType, used: dict[int, str]) -> int:
    """Letters by their numbers, two bytes each, with what characters they stand for.

    Parameters
    ----------
    pdf : PdfFile
    name : str
        Of the letters, without blanks.
    letters : TrueType
    used : mapping of letter number to character
    """
    scale = 1000 / letters.per_em
    name = f"SHADOW+{name}"  # the mark of a file with a part of the letters
    box = " ".join(f"{scale * each:.0f}" for each in letters.box)
    outlines = letters.with_only(set(used))
    file = pdf.add_stream(outlines, f"/Length1 {len(outlines)}")
    about = pdf.add(
        f"<< /Type /FontDescriptor /FontName /{name} /Flags 4 /FontBBox [{box}] /ItalicAngle 0 "
        f"/Ascent {scale * letters.ascent:.0f} /Descent {scale * letters.descent:.0f} "
        f"/CapHeight 700 /StemV 80 /FontFile2 {file} 0 R >>"
    )
    widths = " ".join(f"{n} [{scale * letters.advances[n]:.5g}]" for n in sorted(used))
    described = pdf.add(
        f"<< /Type /Font /Subtype /CIDFontType2 /BaseFont /{name} /CIDToGIDMap /Identity "
        "/CIDSystemInfo << /Registry (Adobe) /Ordering (Identity) /Supplement 0 >> "
        f"/FontDescriptor {about} 0 R /DW 500 /W [{widths}] >>"
    )
    meaning = pdf.add_stream(_meaning(used).encode("latin-1"))
    return pdf.add(
        f"<< /Type /Font /Subtype /Type0 /BaseFont /{name} /Encoding /Identity-H "
        f"/DescendantFonts [{described} 0 R] /ToUnicode {meaning} 0 R >>"
    )


def _meaning(used: dict[int, str]) -> str:
    """Which character each letter stands for, so that words can be searched and copied."""
    pairs = [f"<{n:04x}> <{used[n].encode('utf-16-be', 'replace').hex()}>" for n in sorted(used)]
    blocks = (pairs[at : at + 100] for at in range(0, len(pairs), 100))
    listing = "\n".join(
        f"{len(block)} beginbfchar\n" + "\n".join(block) + "\nendbfchar" for block in blocks
    )
    return (
        "/CIDInit /ProcSet findresource begin\n12 dict begin\nbegincmap\n"
        "/CIDSystemInfo << /Registry (Adobe) /Ordering (UCS) /Supplement 0 >> def\n"
        "/CMapName /Adobe-Identity-UCS def\n/CMapType 2 def\n"
        f"1 begincodespacerange\n<0000> <ffff>\nendcodespacerange\n{listing}\n"
        "endcmap\nCMapName currentdict /CMap defineresource pop\nend\nend"
    )


@dataclass(frozen=True)
class Figure:
    """A part of pages: its number, its size [points]."""

    number: int
    width: float
    height: float


def add_figure(pdf: PdfFile, content: bytes) -> Figure:
    """The only page of a PDF that matplotlib wrote, as a part of other pages.

    Raises
    ------
    ValueError
        If it is not such a file.
    """
    bodies = dict(_bodies(content)) if b"startxref" in content else {}
    page = next((body for body in bodies.values() if re.search(rb"/Type\s*/Page\b", body)), None)
    if page is None:
        raise ValueError("a PDF file of one page was expected")
    width, height = _size(page)
    drawing, resources = (_reference(page, name) for name in (b"Contents", b"Resources"))
    kept = [n for n, body in bodies.items() if not _LEFT_OUT.search(_head(body))]
    numbers = {old: pdf.reserve() for old in kept}
    for old, new in numbers.items():
        head = _head(bodies[old])
        rest = bodies[old][len(head) :]
        head = _REFERENCE.sub(lambda found: b"%d 0 R" % numbers.get(int(found[1]), 0), head)
        if old == drawing:
            form = (
                f"<< /Type /XObject /Subtype /Form /BBox [0 0 {width:g} {height:g}] "
                f"/Resources {numbers[resources]} 0 R "
            )
            head = head.replace(b"<<", form.encode("latin-1"), 1)
        pdf.put(new, head + rest)
    return Figure(numbers[drawing], width, height)


def _bodies(content: bytes) -> Iterable[tuple[int, bytes]]:
    """Number and content of each object, by the file's own table."""
    table = int(content[content.rindex(b"startxref") + 9 :].split(maxsplit=1)[0])
    lines = content[table:].splitlines()
    count = int(lines[1].split()[1])
    entries = [line.split() for line in lines[2 : 2 + count]]
    places = sorted((int(e[0]), n) for n, e in enumerate(entries) if e[2] == b"n")
    ends = [place for place, _ in places[1:]] + [table]
    for (place, number), end in zip(places, ends):
        body = content[place:end].split(b"obj", 1)[1]
        yield number, body[: body.rindex(b"endobj")].strip(b"\r\n ")


def _head(body: bytes) -> bytes:
    """An object without the content of its stream."""
    return body.split(b"stream", 1)[0]


def _reference(body: bytes, name: bytes) -> int:
    found = re.search(rb"/" + name + rb"\s+(\d+) 0 R", body)
    if found is None:
        raise ValueError(f"a page with {name.decode()} was expected")
    return int(found[1])


def _size(page: bytes) -> tuple[float, float]:
    found = re.search(rb"/MediaBox\s*\[([^\]]+)\]", page)
    if found is None:
        raise ValueError("a page with a size was expected")
    left, low, right, top = map(float, found[1].split())
    return right - left, top - low
