"""ECSV and VOTable, read by astropy, which is imported when first needed."""

from __future__ import annotations

import warnings
from dataclasses import replace
from io import BytesIO
from typing import Any

import numpy as np

from shadowscale.data.files import FileBytes
from shadowscale.data.photometry import Ints
from shadowscale.data.raw_table import Column, RawTable, coded
from shadowscale.data.text import read_text
from shadowscale.errors import Problem, TableError


def read_ecsv(file: FileBytes) -> RawTable:
    """Read an ECSV file; one that breaks the format is read as plain text, with a note.

    Raises
    ------
    TableError
        If it is no table in either way.
    """
    from astropy.table import Table

    lines = file.content.decode("utf-8-sig", errors="replace").splitlines()
    if file.partial:
        lines.pop()
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            table = Table.read(lines, format="ascii.ecsv")
        except Exception as error:  # a broken file makes astropy raise nearly anything
            note = f"read as plain text, since it breaks the rules of ECSV ({_short(error)})"
            plain = read_text(file)
            return replace(plain, notes=(*plain.notes, note))
    read = _raw_table(file, table, "ECSV", caught)
    numbers = _line_numbers(lines)
    if file.partial:
        estimate = round(len(read.line) * file.size / max(len(file.content), 1))
        read = replace(read, estimated_rows=estimate)
    return replace(read, line=numbers) if len(numbers) == len(read.line) else read


def read_votable(file: FileBytes) -> RawTable:
    """Read the first table of a VOTable that has two columns of numbers.

    Raises
    ------
    TableError
        If the file is broken or holds no such table.
    """
    from astropy.io.votable import parse

    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always")
        try:
            tables = list(parse(BytesIO(file.content), verify="ignore").iter_tables())
            converted = [table.to_table(use_names_over_ids=True) for table in tables]
        except Exception as error:  # a broken file makes astropy raise nearly anything
            found = f"a file that cannot be read ({_short(error)})"
            raise TableError(Problem(file.path, "a VOTable", found)) from error
    for number, table in enumerate(converted):
        if sum(not column.is_text for column in _columns(table)[0]) >= 2:
            read = _raw_table(file, table, "VOTable", caught)
            return replace(read, comments=(*read.comments, *_systems(tables[number])))
    found = f"{len(tables)} tables, none with two columns of numbers"
    raise TableError(Problem(file.path, "a VOTable of measurements", found))


def _short(error: Exception) -> str:
    return " ".join(str(error).split())[:160]


def _line_numbers(lines: list[str]) -> Ints:
    numbers = [
        number
        for number, line in enumerate(lines, start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    return np.asarray(numbers[1:], dtype=np.int64)


def _systems(table: Any) -> list[str]:
    """Descriptions of a VOTable's fields, in which times are often explained."""
    return [f"{field.name}: {field.description}" for field in table.fields if field.description]


def _raw_table(file: FileBytes, table: Any, form: str, caught: list[Any]) -> RawTable:
    columns, comments, left_out = _columns(table)
    notes = list(dict.fromkeys(" ".join(str(item.message).split())[:200] for item in caught))
    if left_out:
        notes.append(f"columns with several numbers a row are left out: {', '.join(left_out)}")
    if not columns:
        raise TableError(Problem(file.path, f"{form} with columns of numbers", "none"))
    return RawTable(
        path=file.path,
        sha256=file.sha256,
        form=form,
        columns=tuple(columns),
        line=np.arange(1, len(table) + 1),
        named=True,
        headers={str(key).lower(): str(value) for key, value in table.meta.items()},
        comments=tuple(comments),
        notes=tuple(notes),
    )


def _columns(table: Any) -> tuple[list[Column], list[str], list[str]]:
    columns, comments, left_out = [], [], []
    for name in table.colnames:
        cells = table[name]
        if hasattr(cells, "jd") and hasattr(cells, "scale"):
            columns.append(Column(name, "JD", np.asarray(cells.jd, dtype=np.float64)))
            comments.append(f"time {name}: JD {cells.scale.upper()}")
            continue
        if getattr(cells, "ndim", 1) != 1 or cells.dtype.kind not in "fiubSUO":
            left_out.append(str(name))
            continue
        columns.append(_column(str(name), cells))
        description = getattr(cells.info, "description", None)
        if description:
            comments.append(f"{name}: {description}")
    return columns, comments, left_out


def _column(name: str, cells: Any) -> Column:
    unit = "" if cells.unit is None else str(cells.unit)
    mask = np.ma.getmaskarray(cells) if np.ma.isMaskedArray(cells) else np.zeros(len(cells), bool)
    if cells.dtype.kind in "SUO":
        words = ["" if hidden else str(cell).strip() for cell, hidden in zip(cells, mask)]
        labels, codes = coded(words)
        return Column(name, unit, np.full(len(codes), np.nan), labels=labels, codes=codes)
    numbers = np.array(np.ma.getdata(cells), dtype=np.float64)
    numbers[mask] = np.nan
    return Column(name, unit, numbers)
