"""What can be compared: solved sessions, sheets, and tables that somebody typed."""

from __future__ import annotations

import csv
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from math import isfinite
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.errors import Problem, SessionError, TableError
from shadowscale.fit.solution import Solution
from shadowscale.jobs.packing import is_packed, unpack_session
from shadowscale.quantities import QUANTITIES, parse_key, quantity_of
from shadowscale.session.session import Session

HEADER = "quantity, value, error [, unit]"
NAME_COLUMNS, VALUE_COLUMN, UNIT_COLUMN = ("quantity", "name"), "value", "unit"
ERROR_COLUMNS = (("error",), ("sigma",), ("minus", "plus"))


@dataclass(frozen=True)
class Number:
    """A value with its limits, both positive; None where it has none."""

    value: float
    minus: float | None = None
    plus: float | None = None


@dataclass(frozen=True, eq=False)
class Compared:
    """One column of a comparison.

    Attributes
    ----------
    numbers : mapping of key to Number
        In the register's units.
    fit : mapping
        Points, free quantities, chi-squared; empty for a typed table.
    data : tuple of str
        Checksums of the inputs, sorted; empty where not known.
    law : str
        Of limb darkening, whose coefficients mean nothing under another; empty where not known.
    solution, photometry, velocities
        Where a session gave them.
    """

    name: str
    numbers: Mapping[str, Number]
    fit: Mapping[str, float] = field(default_factory=dict)
    data: tuple[str, ...] = ()
    law: str = ""
    solution: Solution | None = None
    photometry: Photometry | None = None
    velocities: Velocities | None = None


def read_compared(path: Path) -> tuple[Compared, ...]:
    """What a file holds: one solution, or with kept ones several.

    Raises
    ------
    InputError
        If it is none of the three, or a session without a solution.
    """
    if is_packed(path):
        with TemporaryDirectory() as folder:
            return _session(unpack_session(path, Path(folder) / path.stem))
    if path.suffix.lower() != ".json":
        return (_typed(path),)
    document = _json(path)
    if "quantities" in document:
        return (_sheet(path, document),)
    return _session(path)


def _json(path: Path) -> dict[str, Any]:
    expected = "a session, a sheet.json or a table"
    try:
        document = json.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise SessionError(Problem(str(path), expected, error.strerror or "trouble")) from error
    except ValueError as error:
        raise SessionError(Problem(str(path), expected, f"no JSON ({error})")) from error
    if not isinstance(document, dict):
        raise SessionError(Problem(str(path), expected, "other JSON"))
    return document


def _session(path: Path) -> tuple[Compared, ...]:
    from shadowscale.session.store import open_session

    session = open_session(path)
    held = [] if session.solution is None else [(path_name(path), session.solution)]
    held += [(kept.name, kept.solution) for kept in session.kept]
    if not held:
        why = "; ".join(session.notes) or "one without a solution"
        raise SessionError(Problem(str(path), "a solved session", why))
    return tuple(solved(name, solution, session) for name, solution in held)


def solved(name: str, solution: Solution, session: Session) -> Compared:
    """A solution of a session as a column."""
    fit = solution.fit
    sources = session.photometry_sources + session.velocity_sources
    return Compared(
        name=name,
        numbers={
            key: Number(item.value, item.minus, item.plus)
            for key, item in solution.estimates.items()
        },
        fit={"points": fit.points, "free": fit.free, "chi2": fit.chi2},
        data=tuple(sorted(source.sha256 for source in sources)),
        law=solution.system.law,
        solution=solution,
        photometry=session.photometry,
        velocities=session.velocities,
    )


def _sheet(path: Path, document: Mapping[str, Any]) -> Compared:
    try:
        fit = document["fit"]
        return Compared(
            name=path_name(path),
            numbers={key: _number(item) for key, item in _entries(document)},
            fit={name: fit[name] for name in ("points", "free", "chi2") if fit[name] is not None},
            data=tuple(sorted(item["sha256"] for item in document["provenance"]["inputs"])),
            law=next((band["limb_darkening"]["law"] for band in document["bands"].values()), ""),
        )
    except (KeyError, TypeError, AttributeError) as error:
        raise SessionError(Problem(str(path), "a sheet.json", f"trouble at {error}")) from error


def _entries(document: Mapping[str, Any]) -> Iterator[tuple[str, Mapping[str, Any]]]:
    """Every number of a sheet by its key."""
    yield from _with_values(document["quantities"], "")
    for label, band in document["bands"].items():
        yield from _with_values(band, f"[{label}]")
        for star in (1, 2):
            found = band["limb_darkening"].get(f"star{star}", {})
            for number, item in enumerate(found.values(), 1):
                yield f"limb_darkening{star}[{label}].{number}", item
    for label, source in document["sources"].items():
        yield from _with_values(source, f"[{label}]")


def _with_values(items: Mapping[str, Any], label: str) -> Iterator[tuple[str, Mapping[str, Any]]]:
    for name, item in items.items():
        if name in QUANTITIES and isinstance(item, dict) and item.get("value") is not None:
            yield f"{name}{label}", item


def _number(item: Mapping[str, Any]) -> Number:
    return Number(item["value"], item["minus"], item["plus"])


def _typed(path: Path) -> Compared:
    """A table that somebody typed, or a `sheet.csv`."""
    try:
        lines = path.read_text(encoding="utf-8-sig").splitlines()
    except OSError as error:
        raise TableError(Problem(str(path), HEADER, error.strerror or "trouble")) from error
    except UnicodeDecodeError as error:
        raise TableError(Problem(str(path), f"text: {HEADER}", "no text in UTF-8")) from error
    numbered = [
        (number, [cell.strip() for cell in row])
        for number, row in enumerate(csv.reader(lines), 1)
        if row and row[0].strip() and not row[0].startswith("#")
    ]
    columns = _columns(numbered[0][1]) if numbered else None
    rows = numbered if columns is None else numbered[1:]
    columns = columns or {"name": 0, "value": 1, "minus": 2, "plus": 2, "unit": 3}
    found: dict[str, Number] = {}
    for line, cells in rows:
        if "section" in columns and cells[columns["section"]] != "quantity":
            continue
        key, number = _typed_row(path, line, cells, columns)
        found[key] = number
    if not found:
        raise TableError(Problem(str(path), f"rows of {HEADER}", "none"))
    return Compared(path_name(path), found)


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


def path_name(path: Path) -> str:
    """A short name for a file: its own, or its folder's where it is a usual result."""
    plain = path.stem in ("session", "sheet")
    return path.resolve().parent.name if plain and path.resolve().parent.name else path.stem
