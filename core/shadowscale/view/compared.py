"""Kept solutions beside the present one."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import sqrt

from shadowscale.fit.solution import Estimate, Solution
from shadowscale.session.session import Session
from shadowscale.view.written import symbol, value_and_error

NAMES = (
    "M1", "M2", "R1", "R2", "logg1", "logg2", "r1", "r2", "inclination", "radius_ratio", "ecosw", "esinw",
    "K1", "K2", "period", "epoch",
)  # fmt: skip
SIGN = "\N{NOT EQUAL TO} "


@dataclass(frozen=True)
class Compared:
    """A line of the comparison: the quantity and a text a solution."""

    what: str
    cells: tuple[str, ...]


@dataclass(frozen=True)
class Comparison:
    """Names of the solutions, and the lines."""

    names: tuple[str, ...]
    rows: tuple[Compared, ...]


def comparison(session: Session) -> Comparison:
    """The present solution first, then those kept; a sign where a value differs by more than the errors."""
    columns = [] if session.solution is None else [("present", session.solution)]
    columns += [(kept.name, kept.solution) for kept in session.kept]
    rows = (
        [_fit_row("reduced chi\N{SUPERSCRIPT TWO}", columns, lambda s: f"{s.fit.reduced_chi2:.3f}")]
        if columns
        else []
    )
    rows += (
        [_fit_row("points, free", columns, lambda s: f"{s.fit.points}, {s.fit.free}")]
        if columns
        else []
    )
    for name in NAMES:
        estimates = [solution.estimates.get(name) for _, solution in columns]
        if any(estimate is not None for estimate in estimates):
            cells = tuple(_cell(name, estimate, estimates[0]) for estimate in estimates)
            rows.append(Compared(symbol(name), cells))
    return Comparison(tuple(name for name, _ in columns), tuple(rows))


def _fit_row(
    what: str, columns: list[tuple[str, Solution]], text: Callable[[Solution], str]
) -> Compared:
    return Compared(what, tuple(text(solution) for _, solution in columns))


def _cell(name: str, estimate: Estimate | None, first: Estimate | None) -> str:
    if estimate is None:
        return "\N{EM DASH}"
    value, error = value_and_error(name, estimate)
    differs = first is not None and first is not estimate and _apart(first, estimate)
    return f"{SIGN if differs else ''}{value} {error}".strip()


def _apart(first: Estimate, second: Estimate) -> bool:
    errors = sqrt(sum((each.plus or 0.0) ** 2 for each in (first, second)))
    return errors > 0 and abs(first.value - second.value) > errors
