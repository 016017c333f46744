"""FITS binary tables, as space missions and archives write them. astropy is imported when first needed."""

from __future__ import annotations

import warnings
from collections.abc import Mapping
from io import BytesIO
from typing import Any

import numpy as np

from shadowscale.data.files import FileBytes
from shadowscale.data.raw_table import Column, RawTable, coded
from shadowscale.errors import Problem, TableError

HEAD_ROWS = 500  # rows of a table that is only shown


def read_fits(file: FileBytes) -> RawTable:
    """Read the first table of a FITS file that has two columns of numbers.

    Header cards become `headers`, with those of the table before those of the file. Columns with
    several numbers a row (pictures, centroids) are left out and named in a note.

    Raises
    ------
    TableError
        If the file is broken or holds no such table.
    """
    from astropy.io import fits

    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            source = file.path if file.partial else BytesIO(file.content)
            with fits.open(source, memmap=file.partial, lazy_load_hdus=True) as units:
                return _first_table(file, units, caught)
        except TableError:
            raise
        except Exception as error:  # a broken file makes astropy raise nearly anything
            raise TableError(_broken(file, str(error))) from error


def _broken(file: FileBytes, what: str) -> Problem:
    words = " ".join(what.split())[:160] or "unknown reason"
    return Problem(file.path, "a FITS file with a table", f"a file that cannot be read ({words})")


def _first_table(file: FileBytes, units: Any, caught: list[warnings.WarningMessage]) -> RawTable:
    seen = 0
    for unit in units:
        seen += 1
        if not getattr(unit, "columns", None) or not len(unit.columns):
            continue
        total = int(unit.header.get("NAXIS2", 0))
        columns, left_out = _columns(unit, HEAD_ROWS if file.partial else total)
        if sum(not column.is_text for column in columns) >= 2:
            return _raw_table(file, units[0], unit, columns, left_out, caught)
    found = f"{seen} parts, none of them a table with two columns of numbers"
    raise TableError(Problem(file.path, "a FITS binary table", found))


def _raw_table(
    file: FileBytes,
    first: Any,
    unit: Any,
    columns: list[Column],
    left_out: list[str],
    caught: list[warnings.WarningMessage],
) -> RawTable:
    total = int(unit.header.get("NAXIS2", 0))
    rows = len(columns[0].numbers)
    notes = [" ".join(str(item.message).split())[:200] for item in caught]
    if left_out:
        notes.append(f"columns with several numbers a row are left out: {', '.join(left_out)}")
    return RawTable(
        path=file.path,
        sha256=file.sha256,
        form=f"FITS binary table {unit.name}".rstrip(),
        columns=tuple(columns),
        line=np.arange(1, rows + 1),
        named=True,
        headers={**_cards(first), **_cards(unit)},
        comments=_comments(first) + _comments(unit),
        notes=tuple(dict.fromkeys(notes)),
        estimated_rows=total if file.partial else None,
    )


def _columns(unit: Any, limit: int) -> tuple[list[Column], list[str]]:
    columns, left_out = [], []
    data = unit.data[:limit] if limit < int(unit.header.get("NAXIS2", 0)) else unit.data
    for definition in unit.columns:
        cells = np.asarray(data.field(definition.name))
        if cells.ndim == 2 and cells.shape[1] == 1:
            cells = cells[:, 0]
        if cells.ndim != 1 or cells.dtype.kind not in "fiubSU":
            left_out.append(str(definition.name))
            continue
        columns.append(_column(definition, cells))
    return columns, left_out


def _column(definition: Any, cells: np.ndarray) -> Column:
    name, unit = str(definition.name), str(definition.unit or "")
    if cells.dtype.kind in "SU":
        labels, codes = coded([str(cell).strip() for cell in cells])
        return Column(name, unit, np.full(len(codes), np.nan), labels=labels, codes=codes)
    numbers = cells.astype(np.float64)
    empty = definition.null
    if empty is not None and cells.dtype.kind in "iu":
        numbers[cells == empty] = np.nan
    return Column(name, unit, numbers)


def _cards(unit: Any) -> Mapping[str, str]:
    return {
        card.keyword.lower(): str(card.value)
        for card in unit.header.cards
        if card.keyword and card.keyword not in ("COMMENT", "HISTORY") and card.value is not None
    }


def _comments(unit: Any) -> tuple[str, ...]:
    return tuple(
        str(card.value) for card in unit.header.cards if card.keyword in ("COMMENT", "HISTORY")
    )
