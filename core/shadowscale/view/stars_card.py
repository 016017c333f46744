"""The two stars in a few numbers, always in view."""

from __future__ import annotations

from dataclasses import dataclass

from shadowscale.fit.solution import Solution
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


def card_lines(solution: Solution | None) -> tuple[CardLine, ...]:
    """Mass, radius, gravity, luminosity where known; fractional radii where masses are not."""
    if solution is None:
        return ()
    lines = []
    for what, stem, unit in LINES:
        cells = [_cell(solution, f"{stem}{star}") for star in (1, 2)]
        if any(cell[0] for cell in cells):
            lines.append(CardLine(what, unit_sign(unit), cells[0], cells[1]))
    known = [line for line in lines if line.what != "r = R/a"]
    return tuple(known if any(line.what == "radius" for line in known) else lines)


def _cell(solution: Solution, name: str) -> tuple[str, str]:
    estimate = solution.estimates.get(name)
    return ("", "") if estimate is None else value_and_error(name, estimate)
