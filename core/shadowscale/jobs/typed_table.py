"""A table of quantities that somebody typed, from a paper or from memory."""

from __future__ import annotations

import csv
import re
from collections.abc import Mapping
from dataclasses import dataclass
from math import isfinite
from pathlib import Path

from shadowscale.errors import Problem, TableError
from shadowscale.quantities import parse_key, quantity_of

HEADER = "quantity, value, error [, unit]"
NAME_COLUMNS, VALUE_COLUMN, UNIT_COLUMN = ("quantity", "name"), "value", "unit"
ERROR_COLUMNS = (("error",), ("sigma",), ("minus", "plus"))
_SIGNS = re.compile(r"\s=\s|\+/-|\+-|\N{PLUS-MINUS SIGN}")
_BLANKS = re.compile(r"(?:\[[^\]]*\]|\S)+")  # a label in brackets may hold some
_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?")


@dataclass(frozen=True)
class Number:
    """A value with its limits, both positive; None where it has none."""

    value: float
    minus: float | None = None
    plus: float | None = None


def read_typed(path: Path) -> dict[str, Number]:
    """The numbers of a table that somebody typed, or of a `sheet.csv`, by key, in the register's units.

    Raises
    ------
    TableError
        Naming the line and what was expected there.
    """
    try:
        lines = path.read_text(encoding="utf-8-sig").splitlines()
    except OSError as error:
        raise TableError(Problem(str(path), HEADER, error.strerror or "trouble")) from error
    except UnicodeDecodeError as error:
        raise TableError(Problem(str(path), f"text: {HEADER}", "no text in UTF-8")) from error
    numbered = [
        (number, cells)
        for number, line in enumerate(lines, 1)
        if not line.lstrip().startswith("#") and any(cells := _cells(line))
    ]
    columns = _columns(numbered[0][1]) if numbered else None
    rows = numbered if columns is None else numbered[1:]
    found: dict[str, Number] = {}
    for line, cells in rows:
        places = columns or _usual_columns(cells)
        if "section" in places and cells[places["section"]] != "quantity":
            continue
        key, number = _typed_row(path, line, cells, places)
        found[key] = number
    if not found:
        raise TableError(Problem(str(path), f"rows of {HEADER}", "none"))
    return found


def _cells(line: str) -> list[str]:
    """The cells of a line: between commas, semicolons or tabs, else blanks; `M1 = 1.28 +/- 0.01` works, too."""
    mark = next((mark for mark in ",;\t" if mark in line), None)
    if mark is None:
        return _BLANKS.findall(_SIGNS.sub(" ", line))
    return [cell.strip() for cell in next(csv.reader([line], delimiter=mark))]


def _usual_columns(cells: list[str]) -> dict[str, int]:
    """Places of the columns without a header: name, value, one error or two, unit."""
    two = len(cells) > 3 and _NUMBER.fullmatch(cells[3])
    plus = 3 if two else 2
    return {"name": 0, "value": 1, "minus": 2, "plus": plus, "unit": plus + 1}


def _columns(cells: list[str]) -> dict[str, int] | None:
    """Places of the columns by a header line; None if the line is no header."""
    names = [cell.lower() for cell in cells]
    name = next((names.index(word) for word in NAME_COLUMNS if word in names), None)
    if name is None or VALUE_COLUMN not in names:
        return None
    found = {"name": name, "value": names.index(VALUE_COLUMN)}
    for words in ERROR_COLUMNS:
        if set(words) <= set(names):
            found |= {"minus": names.index(words[0]), "plus": names.index(words[-1])}
    found |= {word: names.index(word) for word in (UNIT_COLUMN, "section") if word in names}
    return found


def _typed_row(
    path: Path, line: int, cells: list[str], columns: Mapping[str, int]
) -> tuple[str, Number]:
    def cell(column: str) -> str:
        at = columns.get(column, len(cells))
        return cells[at] if at < len(cells) else ""

    def number(column: str) -> float | None:
        text = cell(column)
        try:
            value = float(text) if text else None
        except ValueError:
            value = float("nan")
        if value is not None and not (isfinite(value) and (column == "value" or value >= 0)):
            problem = Problem(str(path), "a number", repr(text), line=line, column=column)
            raise TableError(problem)
        return value

    key = cell("name")
    try:
        unit = quantity_of(key).unit
    except ValueError:
        known = "the name of a quantity, such as M1 or third_light[V]"
        raise TableError(Problem(str(path), known, repr(key), line=line)) from None
    value = number("value")
    if value is None:
        raise TableError(Problem(str(path), "a number", "nothing", line=line, column="value"))
    factor = _factor(path, line, cell("unit"), unit)
    errors = [None if each is None else each * factor for each in map(number, ("minus", "plus"))]
    return str(parse_key(key)), Number(value * factor, *errors)


def _factor(path: Path, line: int, given: str, unit: str) -> float:
    """What turns the unit given into the register's."""
    if not given or given == unit:
        return 1.0
    from astropy import units

    try:
        return float(units.Unit(given).to(units.Unit(unit or "")))
    except (ValueError, TypeError, units.UnitConversionError) as error:
        expected = f"a unit like {unit or 'none'}"
        problem = Problem(str(path), expected, repr(given), line=line, column="unit")
        raise TableError(problem) from error
