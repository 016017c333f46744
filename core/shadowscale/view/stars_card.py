"""The two stars in a few numbers, always in view."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from shadowscale.fit.solution import Estimate
from shadowscale.session.session import Session
from shadowscale.view.shown import shown_estimates
from shadowscale.view.written import unit_sign, value_and_error

LINES = (
    ("mass", "M", "solMass"),
    ("radius", "R", "solRad"),
    ("log g", "logg", ""),
    ("luminosity", "L", "solLum"),
    ("r = R/a", "r", ""),
)


@dataclass(frozen=True)
class CardLine:
    """A line of the card: what, star 1's value and error, star 2's, unit."""

    what: str
    unit: str
    star1: tuple[str, str]
    star2: tuple[str, str]


def card_lines(session: Session) -> tuple[CardLine, ...]:
    """Mass, radius, gravity, luminosity where known; fractional radii where masses are not."""
    estimates = shown_estimates(session)
    lines = []
    for what, stem, unit in LINES:
        cells = [_cell(estimates, f"{stem}{star}") for star in (1, 2)]
        if any(cell[0] for cell in cells):
            lines.append(CardLine(what, unit_sign(unit), cells[0], cells[1]))
    known = [line for line in lines if line.what != "r = R/a"]
    return tuple(known if any(line.what == "radius" for line in known) else lines)


def _cell(estimates: Mapping[str, Estimate], name: str) -> tuple[str, str]:
    estimate = estimates.get(name)
    return ("", "") if estimate is None else value_and_error(name, estimate)
