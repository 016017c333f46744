"""What unnamed numbers look like: times, magnitudes, fluxes, errors. Every answer comes with its reason."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.data.raw_table import RawTable


def time_column(table: RawTable, indices: list[int], *, any_column: bool) -> tuple[int, str] | None:
    """The column that looks most like time, among `indices`; None if none does.

    Julian dates are known by their size; else the first column whose numbers mostly rise and do not
    only count the rows; else, where `any_column`, the first column of numbers.
    """
    numeric = [index for index in indices if not table.columns[index].is_text]
    for index in numeric:
        middle = _middle(table.columns[index].numbers)
        if 2.2e6 < middle < 2.7e6:
            return index, "the numbers are of the size of Julian dates"
    for index in numeric:
        if 10_000 < _middle(table.columns[index].numbers) < 100_000 and _rises(
            table.columns[index].numbers
        ):
            return index, "the numbers are of the size of shortened Julian dates, and rise"
    for index in numeric:
        if _rises(table.columns[index].numbers) and not _counts(table.columns[index].numbers):
            return index, "the first column whose numbers rise"
    return (numeric[0], "the first column of numbers") if any_column and numeric else None


def _middle(numbers: Floats) -> float:
    finite = numbers[np.isfinite(numbers)]
    return float(np.median(finite)) if len(finite) else float("nan")


def _rises(numbers: Floats) -> bool:
    finite = numbers[np.isfinite(numbers)]
    return len(finite) > 1 and bool(np.mean(np.diff(finite) > 0) > 0.9)


def _counts(numbers: Floats) -> bool:
    """Whether the numbers only count the rows."""
    finite = numbers[np.isfinite(numbers)]
    return len(finite) > 1 and bool(np.all(np.diff(finite) == 1.0)) and finite[0] in (0.0, 1.0)


def light_by_look(numbers: Floats) -> tuple[str, str]:
    """`mag` or `flux`, and why.

    Eclipses are the long tail of the distribution: towards larger numbers in magnitudes, towards
    smaller ones in flux. The size of the numbers decides where it can.
    """
    finite = numbers[np.isfinite(numbers)]
    if not len(finite):
        return "flux", "nothing speaks for magnitudes"
    low, middle, high = (float(q) for q in np.percentile(finite, (1, 50, 99)))
    tail = "towards larger numbers" if high - middle > middle - low else "towards smaller numbers"
    size = f"the numbers lie around {middle:.4g}"
    if middle > 30 or high - low > 12:
        return "flux", f"{size}, too much for magnitudes"
    if middle > 3 and low > 0:
        return "mag", f"{size} with a spread of {high - low:.2g}, as magnitudes do"
    if low > 0 and abs(middle - 1) < 0.2 and "smaller" in tail:
        return "flux", f"{size} and reach {tail}, as flux in units of its level does"
    if "larger" in tail or low < -0.5:
        return "mag", f"{size} and reach {tail}, as differences of magnitude do"
    return "flux", f"{size} and reach {tail}, as flux does"


def uncertainty_by_look(values: Floats, errors: Floats) -> str:
    """Why the second column looks like the error of the first, or an empty string."""
    good = np.isfinite(values) & np.isfinite(errors)
    if not np.any(good):
        return ""
    spread = float(np.percentile(values[good], 99) - np.percentile(values[good], 1))
    size = float(np.median(np.abs(values[good])))
    if np.all(errors[good] >= 0) and np.median(errors[good]) < max(0.3 * size, spread):
        return "follows the value, and its numbers are small and not negative"
    return ""


def velocities_by_look(numbers: Floats) -> bool:
    """Whether unnamed numbers are rather velocities [km/s] than light: both signs, or a wide spread."""
    finite = numbers[np.isfinite(numbers)]
    if not len(finite) or len(finite) > 5000:
        return False
    low, high = float(np.min(finite)), float(np.max(finite))
    return low < -5.0 or (high - low > 15.0 and high < 1000.0 and low < 0.5 * high)
