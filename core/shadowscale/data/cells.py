"""Cells of text tables: what counts as a number, as nothing, or as something else."""

from __future__ import annotations

import re
from math import nan

MISSING = frozenset({"", "-", "--", "---", "nan", "na", "n/a", "null", "none", "...", "indef"})
_MINUS = str.maketrans("\N{MINUS SIGN}\N{EN DASH}", "--")  # as word processors print it
_FORTRAN = re.compile(r"[dD](?=[+-]?\d+$)")


def is_missing(cell: str) -> bool:
    """Whether the cell says that there is no value."""
    return cell.strip().lower() in MISSING


def number_in(cell: str, decimal_comma: bool = False) -> float | None:
    """The cell's number; NaN where it is empty, None where it holds something else."""
    text = cell.strip()
    if is_missing(text):
        return nan
    if "_" in text:
        return None
    if decimal_comma:
        if "." in text:
            return None
        text = text.replace(",", ".")
    text = _FORTRAN.sub("e", text.translate(_MINUS))
    try:
        return float(text)
    except ValueError:
        return None


def is_number(cell: str, decimal_comma: bool = False) -> bool:
    """Whether the cell holds a number (not nothing)."""
    number = number_in(cell, decimal_comma)
    return number is not None and number == number
