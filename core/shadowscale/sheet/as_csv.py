"""The sheet for a spreadsheet: one row a number, checks and provenance below in the same columns."""

from __future__ import annotations

import csv
from collections.abc import Iterator
from io import StringIO
from math import isfinite

from shadowscale.sheet.sheet import Entry, Sheet

HEADER = ("section", "name", "value", "minus", "plus", "unit", "how", "meaning")
Row = tuple[str, str, object, object, object, str, str, str]


def as_csv(sheet: Sheet) -> str:
    """The sheet as comma-separated text, numbers in full precision, empty cells for nothing."""
    text = StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(HEADER)
    for row in rows(sheet):
        writer.writerow([_cell(value) for value in row])
    return text.getvalue()


def rows(sheet: Sheet) -> Iterator[Row]:
    """The rows of the table, in the sheet's order."""
    for entry in sheet.entries():
        yield _entry_row(entry)
    for name, value in _fit_numbers(sheet):
        yield ("fit", name, value, None, None, "", "", "")
    for finding in sheet.audit:
        value, words = finding.value, finding.words
        yield ("audit", finding.check, value, None, None, "", finding.verdict, words)
    for decision in sheet.decisions:
        yield ("decision", decision.what, decision.chosen, None, None, "", "", decision.words)
    yield from _provenance_rows(sheet)


def _entry_row(entry: Entry) -> Row:
    estimate, quantity = entry.estimate, entry.quantity
    numbers = (estimate.value, estimate.minus, estimate.plus)
    return ("quantity", entry.key, *numbers, quantity.unit, estimate.how, entry.meaning)


def _fit_numbers(sheet: Sheet) -> Iterator[tuple[str, object]]:
    for name, value in vars(sheet.fit).items():
        if isinstance(value, dict):
            yield from ((f"{name}[{label}]", number) for label, number in value.items())
        else:
            yield name, value


def _provenance_rows(sheet: Sheet) -> Iterator[Row]:
    made = sheet.provenance
    plain = {
        "program": made.program,
        "command": made.command,
        "seed": made.seed,
        "time_scale": made.time_scale,
    }
    for name, value in {**plain, **made.versions}.items():
        yield ("provenance", name, value, None, None, "", "", "")
    for file in made.inputs:
        words = f"{file.used} of {file.rows} rows used"
        yield ("input", file.path, file.sha256, None, None, "", "", words)


def _cell(value: object) -> object:
    if value is None or (isinstance(value, float) and not isfinite(value)):
        return ""
    return float(value) if isinstance(value, float) else value
