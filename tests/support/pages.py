"""Reading reports with readers that are not ours: the standard library's for HTML and XML, pypdf for PDF."""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from html.parser import HTMLParser
from io import BytesIO

VOID = frozenset(
    ("meta", "link", "br", "hr", "img", "input")
)  # HTML Living Standard, void elements
DASHES = {"\N{NO-BREAK SPACE}": " ", "\N{THIN SPACE}": " "}


@dataclass
class Page(HTMLParser):
    """A page of HTML taken apart; `trouble` lists what does not fit."""

    ids: list[str] = field(default_factory=list)
    links: list[str] = field(default_factory=list)
    outside: list[str] = field(default_factory=list)
    rows: list[list[str]] = field(default_factory=list)
    headings: list[str] = field(default_factory=list)
    trouble: list[str] = field(default_factory=list)
    words: list[str] = field(default_factory=list)
    _open: list[str] = field(default_factory=list)

    def __post_init__(self) -> None:
        super().__init__(convert_charrefs=True)

    @classmethod
    def read(cls, text: str) -> Page:
        """The page of a text."""
        page = cls()
        page.feed(text)
        page.close()
        page.trouble += [f"{tag} is not closed" for tag in page._open]
        return page

    @property
    def text(self) -> str:
        """All words in one line."""
        joined = "".join(self.words)
        for odd, usual in DASHES.items():
            joined = joined.replace(odd, usual)
        return re.sub(r"\s+", " ", joined)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self._attributes(attrs)
        if tag not in VOID:
            self._open.append(tag)
        if tag == "tr":
            self.rows.append([])
        elif tag in ("td", "th"):
            self.rows[-1].append("")
        elif tag == "h2":
            self.headings.append("")

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self._attributes(attrs)

    def handle_endtag(self, tag: str) -> None:
        if not self._open or self._open[-1] != tag:
            self.trouble.append(f"{tag} closes {self._open[-1:]}")
        else:
            self._open.pop()

    def handle_data(self, data: str) -> None:
        if {"style", "script"} & set(self._open):
            return
        self.words.append(data)
        if {"td", "th"} & set(self._open):
            self.rows[-1][-1] += data
        if "h2" in self._open:
            self.headings[-1] += data

    def _attributes(self, attrs: list[tuple[str, str | None]]) -> None:
        for name, value in attrs:
            if name == "id" and value:
                self.ids.append(value)
            if name in ("href", "xlink:href", "src") and value:
                local = value.startswith("#")
                (self.links if local else self.outside).append(value)


def pdf_pages(content: bytes) -> list[str]:
    """The text of each page of a PDF."""
    from pypdf import PdfReader

    return [page.extract_text() for page in PdfReader(BytesIO(content)).pages]


def pdf_size(content: bytes) -> tuple[float, float]:
    """Width and height of the first page [points]."""
    from pypdf import PdfReader

    box = PdfReader(BytesIO(content)).pages[0].mediabox
    return float(box.width), float(box.height)


def png_size(content: bytes) -> tuple[int, int]:
    """Width and height of a PNG [pixels], from its header (PNG Specification, section 11.2.2)."""
    assert content[:8] == b"\x89PNG\r\n\x1a\n"
    return int.from_bytes(content[16:20], "big"), int.from_bytes(content[20:24], "big")
