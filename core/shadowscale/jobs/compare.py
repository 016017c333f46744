"""Solutions side by side: differences in sigmas and, for the same data, which fits better."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import hypot, isfinite, log, sqrt
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import USED, Floats
from shadowscale.jobs.compare_inputs import Compared, read_compared
from shadowscale.jobs.table import Column, Table
from shadowscale.jobs.typed_table import Number
from shadowscale.quantities import QUANTITIES, parse_key, quantity_of, written

LIMB = "limb_darkening"
NOT_INDEPENDENT = (
    "solutions of the same data are not independent: their differences in sigmas come out too small"
)


@dataclass(frozen=True)
class Difference:
    """Another number less the first, and the same in units of the combined error (None without one)."""

    value: float
    sigmas: float | None


@dataclass(frozen=True)
class Line:
    """One quantity: a number a column (None where it has none), differences of all but the first."""

    key: str
    unit: str
    numbers: tuple[Number | None, ...]
    differences: tuple[Difference | None, ...]


@dataclass(frozen=True)
class Fit:
    """How well a solution describes rows that all solutions share.

    chi2 is of the errors as the solution scales them; `deviance` is -2 ln L with those errors in it, from
    which both criteria follow.
    """

    points: int
    free: int
    chi2: float
    deviance: float

    @property
    def aic(self) -> float:
        """Akaike's information criterion (Akaike 1974, IEEE Trans. Autom. Control 19, 716)."""
        return self.deviance + 2 * self.free

    @property
    def bic(self) -> float:
        """Bayesian information criterion (Schwarz 1978, Annals of Statistics 6, 461)."""
        return self.deviance + self.free * log(self.points)


@dataclass(frozen=True, eq=False)
class Comparison:
    """Columns, lines, and the fits where all columns have the same data."""

    columns: tuple[Compared, ...]
    lines: tuple[Line, ...]
    fits: tuple[Fit, ...]
    words: tuple[str, ...]


def compare_files(paths: Sequence[Path]) -> Comparison:
    """Solved sessions (with their kept solutions), sheets or typed tables side by side.

    Raises
    ------
    InputError
        If a file cannot be used.
    ValueError
        If there are fewer than two solutions in all.
    """
    columns = [column for path in paths for column in read_compared(path)]
    return compare(_named_apart(columns))


def compare(columns: Sequence[Compared]) -> Comparison:
    """The columns side by side, quantities in the register's order."""
    if len(columns) < 2:
        raise ValueError(f"columns: expected two or more solutions, found {len(columns)}")
    words = []
    same_data = bool(columns[0].data) and all(each.data == columns[0].data for each in columns)
    if same_data:
        words.append(NOT_INDEPENDENT)
    aligned = [columns[0], *(_same_epoch(columns[0], each) for each in columns[1:])]
    if any(each is not other for each, other in zip(aligned, columns)):
        words.append("epochs were moved by whole cycles to that of the first")
    fits = _fits(aligned) if same_data else ()
    if not fits:
        words.append("information criteria need solved sessions of the same data, rows unchanged")
    laws = {column.law for column in aligned if column.law}
    if len(laws) > 1:
        words.append(f"limb darkening is left out: its laws differ ({', '.join(sorted(laws))})")
    keys = [key for key in _shared(aligned) if len(laws) < 2 or not key.startswith(LIMB)]
    lines = tuple(_line(key, aligned) for key in keys)
    return Comparison(tuple(aligned), lines, fits, tuple(words))


def comparison_table(comparison: Comparison) -> Table:
    """The comparison for a terminal."""
    names = [column.name for column in comparison.columns]
    heads = [Column("quantity"), Column("unit"), *map(Column, names)]
    for name in names[1:]:
        heads += [Column(f"{name} - {names[0]}"), Column("sigmas")]
    rows: list[tuple[str, ...]] = []
    for line in comparison.lines:
        cells = [_shown(number) for number in line.numbers]
        for number, difference in zip(line.numbers[1:], line.differences):
            cells += _shown_difference(line.numbers[0], number, difference)
        rows.append((line.key, line.unit, *cells))
    rows += _fit_rows(comparison)
    return Table(tuple(heads), tuple(rows), comparison.words)


def comparison_document(comparison: Comparison) -> dict[str, Any]:
    """The comparison as JSON knows it."""
    names = [column.name for column in comparison.columns]
    quantities = {
        line.key: {
            "unit": line.unit,
            "values": [None if item is None else vars(item) for item in line.numbers],
            "differences": [None if item is None else vars(item) for item in line.differences],
        }
        for line in comparison.lines
    }
    fits = [{**vars(fit), "aic": fit.aic, "bic": fit.bic} for fit in comparison.fits]
    given = [dict(column.fit) for column in comparison.columns]
    return {
        "solutions": names,
        "quantities": quantities,
        "fits": given,
        "same_rows": fits,
        "notes": list(comparison.words),
    }


def _named_apart(columns: list[Compared]) -> list[Compared]:
    """The columns with a number behind names that come twice."""
    names = [column.name for column in columns]
    return [
        replace(column, name=f"{column.name} {names[: at + 1].count(column.name)}")
        if names.count(column.name) > 1
        else column
        for at, column in enumerate(columns)
    ]


def _shared(columns: Sequence[Compared]) -> list[str]:
    """The keys that two columns or more have, in the register's order."""
    counts = Counter(key for column in columns for key in column.numbers)
    order = {name: number for number, name in enumerate(QUANTITIES)}

    def place(key: str) -> tuple[int, str]:
        return order[parse_key(key).name], key

    return sorted((key for key, count in counts.items() if count > 1), key=place)


def _line(key: str, columns: Sequence[Compared]) -> Line:
    numbers = tuple(column.numbers.get(key) for column in columns)
    differences = tuple(_difference(numbers[0], number) for number in numbers[1:])
    return Line(key, quantity_of(key).unit, numbers, differences)


def _difference(first: Number | None, other: Number | None) -> Difference | None:
    """With the errors of the sides that face each other."""
    if first is None or other is None:
        return None
    value = other.value - first.value
    near, far = (first.plus, other.minus) if value >= 0 else (first.minus, other.plus)
    error = hypot(near or 0.0, far or 0.0)
    return Difference(value, value / error if error > 0 and isfinite(error) else None)


def _same_epoch(first: Compared, other: Compared) -> Compared:
    """The other with its epoch moved by whole cycles next to the first's; the period's error counts."""
    ours, theirs = (each.numbers.get("epoch") for each in (first, other))
    period = other.numbers.get("period") or first.numbers.get("period")
    if ours is None or theirs is None or period is None:
        return other
    cycles = round((ours.value - theirs.value) / period.value)
    if cycles == 0:
        return other

    def grown(error: float | None, of_period: float | None) -> float | None:
        return None if error is None else sqrt(error**2 + (cycles * (of_period or 0.0)) ** 2)

    moved = Number(
        theirs.value + cycles * period.value,
        grown(theirs.minus, period.minus),
        grown(theirs.plus, period.plus),
    )
    return replace(other, numbers={**other.numbers, "epoch": moved})


def _fits(columns: Sequence[Compared]) -> tuple[Fit, ...]:
    """The fits on the rows that take part in all of them; empty where the rows are not known."""
    parts = [_residuals(column) for column in columns]
    if any(part is None for part in parts):
        return ()
    found = [part for part in parts if part is not None]
    if len({part[0].size for part in found}) > 1:
        return ()
    shared = np.logical_and.reduce([np.isfinite(residual / error) for residual, error in found])
    count = int(shared.sum())
    fits = []
    for column, (residual, error) in zip(columns, found):
        chi2 = float(np.sum((residual[shared] / error[shared]) ** 2))
        deviance = chi2 + float(np.sum(np.log(2 * np.pi * error[shared] ** 2)))
        fits.append(Fit(count, int(column.fit["free"]), chi2, deviance))
    return tuple(fits)


def _residuals(column: Compared) -> tuple[Floats, Floats] | None:
    """Residuals of all rows and the errors the solution gives them; NaN where a row takes no part."""
    solution, table = column.solution, column.photometry
    if solution is None or table is None:
        return None
    light, fit = solution.light, solution.fit
    scale = np.array([fit.error_scale.get(band, 1.0) for band in table.bands])[table.band]
    parts = [_taking_part(table.flux - light.model, table.flux_error * scale, light.why == USED)]
    speed, result = column.velocities, solution.velocity
    if speed is not None and result is not None:
        if speed.errors_from_scatter:
            return None
        for star, (measured, error, model, why) in enumerate(
            (
                (speed.rv1, speed.rv1_error, result.model1, result.why1),
                (speed.rv2, speed.rv2_error, result.model2, result.why2),
            ),
            1,
        ):
            extra = [fit.jitter.get(f"{name}, star {star}", 0.0) for name in speed.sources]
            whole = np.hypot(error, np.array(extra)[speed.source])
            parts.append(_taking_part(measured - model, whole, why == USED))
    return np.concatenate([part[0] for part in parts]), np.concatenate([part[1] for part in parts])


def _taking_part(residual: Floats, error: Floats, used: NDArray[np.bool_]) -> tuple[Floats, Floats]:
    return np.where(used, residual, np.nan), np.where(used, error, np.nan)


def _shown(number: Number | None) -> str:
    return "" if number is None else written(number.value, number.minus, number.plus)


def _shown_difference(
    first: Number | None, other: Number | None, difference: Difference | None
) -> tuple[str, str]:
    if difference is None or first is None or other is None:
        return "", ""
    sigmas = "" if difference.sigmas is None else f"{difference.sigmas:.2f}"
    return f"{difference.value:.2g}" if difference.value else "0", sigmas


def _fit_rows(comparison: Comparison) -> list[tuple[str, ...]]:
    """Rows on the fits, below the quantities."""
    others = [("", "")] * (len(comparison.columns) - 1)
    blank = [cell for pair in others for cell in pair]
    rows = []
    for name in ("points", "free", "chi2"):
        cells = [
            f"{column.fit[name]:.6g}" if name in column.fit else "" for column in comparison.columns
        ]
        if any(cells):
            rows.append((name, "", *cells, *blank))
    if not comparison.fits:
        return rows
    for title, values in (
        ("chi2, same rows", [fit.chi2 for fit in comparison.fits]),
        ("AIC, less least", [fit.aic for fit in comparison.fits]),
        ("BIC, less least", [fit.bic for fit in comparison.fits]),
    ):
        least = 0.0 if title.startswith("chi2") else min(values)
        rows.append((title, "", *(f"{value - least:.1f}" for value in values), *blank))
    return rows
