"""The guide: pages in Markdown that come with the program, for the help of the desktop and for readers.

`quantities.md` is made from the register by `quantities_page`; a test holds the two together.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from importlib.resources import files
from math import isfinite

from shadowscale.quantities import BAND, QUANTITIES, SOURCE, SYSTEM, Quantity

__all__ = ["PAGES", "Page", "page", "pages", "quantities_page"]

# In reading order.
PAGES = ("first_sheet", "data", "wishes", "reading", "files", "compare", "simulate", "quantities")
_PICTURE = re.compile(r"^!\[[^\]]*\]\([^)]*\)\n\n?", re.MULTILINE)
_SCOPES = (
    (SYSTEM, "Of the system"),
    (BAND, "Of a band"),
    (SOURCE, "Of a source of velocities"),
)


@dataclass(frozen=True)
class Page:
    """A page of the guide: its name, its title, its Markdown."""

    name: str
    title: str
    text: str

    @property
    def words(self) -> str:
        """The Markdown without its pictures, for a narrow pane."""
        return _PICTURE.sub("", self.text)


def pages() -> tuple[Page, ...]:
    """All pages in reading order."""
    return tuple(map(page, PAGES))


def page(name: str) -> Page:
    """One page; KeyError if there is none of that name."""
    if name not in PAGES:
        raise KeyError(name)
    text = files("shadowscale.guide").joinpath(f"{name}.md").read_text(encoding="utf-8")
    return Page(name, text.split("\n", 1)[0].removeprefix("# "), text)


def quantities_page() -> str:
    """Every quantity that the program writes, explained from the register."""
    lines = [
        "# Every quantity",
        "",
        "The names below are those of `sheet.json`, `sheet.csv`, `sheet.ecsv`, of the options `--free`, "
        "`--fix` and `--prior`, and of the tables that `shadowscale compare` reads.",
        "A quantity of a band or a source has its label in square brackets, as in `third_light[V]`; a "
        "limb-darkening coefficient also its number, as in `limb_darkening1[V].2`.",
        "Quantities marked *basic* are those the model is written in: they can be fitted, held, or given "
        "a prior. The others follow from them, with all correlations kept.",
    ]
    for scope, title in _SCOPES:
        of_scope = [quantity for quantity in QUANTITIES.values() if quantity.scope == scope]
        lines += ["", f"## {title}", ""]
        lines += _rows(of_scope)
    return "\n".join(lines) + "\n"


def _rows(quantities: Iterable[Quantity]) -> list[str]:
    rows = [
        "| name | symbol | unit | what it is | range | |",
        "| --- | --- | --- | --- | --- | --- |",
    ]
    return rows + [_row(quantity) for quantity in quantities]


def _row(quantity: Quantity) -> str:
    notes = ["basic"] if quantity.basic else []
    notes += [quantity.effect] if quantity.effect else []
    notes += [f"`{quantity.source}`" if "=" in quantity.source else quantity.source]
    cells = (
        f"`{quantity.name}`",
        f"{quantity.symbol}",
        f"`{quantity.unit}`" if quantity.unit else "",
        quantity.meaning,
        _range(quantity),
        "; ".join(note for note in notes if note),
    )
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |"


def _range(quantity: Quantity) -> str:
    """The limits of what the model accepts, in words."""
    low, high = quantity.lower, quantity.upper
    if isfinite(low) and isfinite(high):
        return f"{low:g} to {high:g}"
    if isfinite(low):
        return f"{low:g} or more"
    return f"up to {high:g}" if isfinite(high) else ""
