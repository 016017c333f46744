"""Kept solutions, and those of other files, beside the present one: differences in sigmas, which fits better."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from shadowscale.fit.solution import DERIVED, Estimate
from shadowscale.jobs.typed_table import Number
from shadowscale.session.session import Session
from shadowscale.view.written import symbol, value_and_error

if TYPE_CHECKING:
    from shadowscale.jobs.compare import Comparison, Difference
    from shadowscale.jobs.compare_inputs import Compared

FAR = 3.0  # sigmas from which a difference carries the sign
SIGN = "\N{NOT EQUAL TO} "
PRESENT, NOTHING_BESIDE = "present", "Keep this solution; what comes later stands beside it."
_NONE = "\N{EM DASH}"


@dataclass(frozen=True)
class SideRow:
    """A line: the quantity, a text a solution, and of all but the first the difference in sigmas."""

    what: str
    values: tuple[str, ...]
    sigmas: tuple[str, ...]


@dataclass(frozen=True)
class SideBySide:
    """Names of the solutions, the lines, and what has to be said."""

    names: tuple[str, ...]
    rows: tuple[SideRow, ...]
    words: tuple[str, ...]


def side_by_side(session: Session, beside: Sequence[Compared] = ()) -> SideBySide:
    """The present solution first, then those kept, then those of other files."""
    from shadowscale.jobs.compare import compare
    from shadowscale.jobs.compare_inputs import solved

    held = [] if session.solution is None else [(PRESENT, session.solution)]
    held += [(kept.name, kept.solution) for kept in session.kept]
    columns = [*(solved(name, solution, session) for name, solution in held), *beside]
    names = tuple(column.name for column in columns)
    if len(columns) < 2:
        words = (NOTHING_BESIDE,) if columns else ()
        return SideBySide(names, tuple(_alone(columns)), words)
    found = compare(columns)
    rows = [
        SideRow(
            symbol(line.key),
            tuple(_value(line.key, number) for number in line.numbers),
            tuple(_sigmas(difference) for difference in line.differences),
        )
        for line in found.lines
    ]
    return SideBySide(names, (*_fit_rows(found), *rows), found.words)


def _alone(columns: Sequence[Compared]) -> list[SideRow]:
    return [
        SideRow(symbol(key), (_value(key, number),), ())
        for column in columns
        for key, number in column.numbers.items()
    ]


def _fit_rows(found: Comparison) -> list[SideRow]:
    """Points and free quantities; on the same rows chi-squared and both criteria less the least of them."""
    blank = ("",) * (len(found.columns) - 1)
    counts = tuple(_counts(column) for column in found.columns)
    rows = [SideRow("points, free", counts, blank)]
    for what, values in (
        ("\N{GREEK SMALL LETTER CHI}\N{SUPERSCRIPT TWO}", [fit.chi2 for fit in found.fits]),
        ("AIC", [fit.aic for fit in found.fits]),
        ("BIC", [fit.bic for fit in found.fits]),
    ):
        if values:
            least = min(values)
            texts = tuple(
                f"least + {each - least:.1f}" if each > least else "least" for each in values
            )
            shown = texts if what in ("AIC", "BIC") else tuple(f"{each:.1f}" for each in values)
            rows.append(SideRow(what, shown, blank))
    return rows


def _counts(column: Compared) -> str:
    numbers = [column.fit.get(name) for name in ("points", "free")]
    return ", ".join(f"{number:.0f}" for number in numbers if number is not None) or _NONE


def _value(key: str, number: Number | None) -> str:
    if number is None:
        return _NONE
    estimate = Estimate(number.value, number.minus, number.plus, DERIVED)
    return " ".join(part for part in value_and_error(key, estimate) if part)


def _sigmas(difference: Difference | None) -> str:
    if difference is None or difference.sigmas is None:
        return ""
    sign = SIGN if abs(difference.sigmas) > FAR else ""
    shown = f"{difference.sigmas:+.1f}"
    return "0.0" if shown in ("+0.0", "-0.0") else (sign + shown).replace("-", "\N{MINUS SIGN}")
