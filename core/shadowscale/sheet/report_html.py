"""The report as one HTML file that needs nothing else: figures, style and all inside."""

from __future__ import annotations

import re
from collections.abc import Mapping
from functools import cache
from html import escape
from typing import TYPE_CHECKING

from shadowscale.sheet.document import Document
from shadowscale.sheet.figure_frame import FAINT, INK, SOFT
from shadowscale.sheet.symbols import Run, flat, runs

if TYPE_CHECKING:
    from jinja2 import Template

# Colours of a figure that follow the page where it turns dark.
_THEMED = {INK: "ink", SOFT: "soft", FAINT: "rule"}
_ID = re.compile(r'\bid="([^"]+)"')
_LINK = re.compile(r'(href="#|url\(#)')
_COLOURS = re.compile("|".join(_THEMED))
_HEAD = re.compile(r"^.*?(?=<svg)", re.DOTALL)
_METADATA = re.compile(r"<metadata>.*?</metadata>", re.DOTALL)


def as_html(document: Document, figures: Mapping[str, Mapping[str, bytes]]) -> bytes:
    """The page.

    Parameters
    ----------
    document : Document
    figures : mapping of name and format to content
        Every picture in the document, as `svg` at least.
    """
    inline = {name: _inline(name, files["svg"].decode()) for name, files in figures.items()}
    page = _template().render(document=document, figures=inline)
    return page.encode("utf-8", "replace")


@cache
def _template() -> Template:
    from jinja2 import Environment, PackageLoader, StrictUndefined

    environment = Environment(
        loader=PackageLoader("shadowscale.sheet", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters["words"] = _words
    environment.filters["flat"] = flat
    environment.filters["kind"] = lambda block: type(block).__name__
    return environment.get_template("report.html")


def _words(words: str) -> str:
    """Words with their symbols as markup."""
    from markupsafe import Markup

    return Markup("".join(map(_run, runs(words))))


def _run(run: Run) -> str:
    text = escape(run.text, quote=False)
    if run.italic:
        text = f"<i>{text}</i>"
    if run.level:
        tag = "sub" if run.level < 0 else "sup"
        text = f"<{tag}>{text}</{tag}>"
    return text


def _inline(name: str, svg: str) -> str:
    """A figure to be put into the page: names of its own, colours of the page, size of its place."""
    from markupsafe import Markup

    text = _METADATA.sub("", _HEAD.sub("", svg, count=1))
    text = _ID.sub(lambda match: f'id="{name}-{match[1]}"', text)
    text = _LINK.sub(lambda match: f"{match[1]}{name}-", text)
    text = _COLOURS.sub(lambda match: f"var(--{_THEMED[match[0]]})", text)
    text = text.replace("fill: #ffffff", "fill: var(--paper)")
    opening, rest = text.split(">", 1)
    opening = re.sub(r'\s(width|height)="[^"]*"', "", opening)
    label = name.replace("_", " ")
    return Markup(f'{opening} role="img" aria-label="{label}">{rest}')
