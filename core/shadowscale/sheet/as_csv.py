"""The sheet for a spreadsheet: one row a number, checks and provenance below in the same columns."""

from __future__ import annotations

import csv
import json
from collections.abc import Iterator, Mapping
from io import StringIO
from math import isfinite

from shadowscale.sheet.file_names import file_names
from shadowscale.sheet.sheet import Entry, Sheet

NUMBERS = ("value", "minus", "plus")
HEADER = (
    "section", "name", *NUMBERS, "unit", "how", "prior", "prior_sigma", "meaning", "source"
)  # fmt: skip
Row = Mapping[str, object]


def as_csv(sheet: Sheet) -> str:
    """The sheet as comma-separated text, numbers in full precision, empty cells for nothing."""
    text = StringIO()
    writer = csv.DictWriter(text, HEADER, restval="", lineterminator="\n")
    writer.writeheader()
    for row in rows(sheet):
        writer.writerow({name: _cell(value) for name, value in row.items()})
    return text.getvalue()


def rows(sheet: Sheet) -> Iterator[Row]:
    """The rows of the table, in the sheet's order."""
    for entry in sheet.entries():
        yield {"section": "quantity", **_entry_row(entry)}
    for name, value in _fit_numbers(sheet):
        yield {"section": "fit", "name": name, "value": value}
    for finding in sheet.audit:
        yield {
            "section": "audit",
            "name": finding.check,
            "value": finding.value,
            "how": finding.verdict,
            "meaning": finding.words,
            "source": finding.source,
        }
    for decision in sheet.decisions:
        words = {"value": decision.chosen, "meaning": decision.words}
        yield {"section": "decision", "name": decision.what, **words}
    yield from _provenance_rows(sheet)


def _entry_row(entry: Entry) -> Row:
    estimate, quantity = entry.estimate, entry.quantity
    prior, sigma = estimate.prior or (None, None)
    return {
        "name": entry.key,
        "value": estimate.value,
        "minus": estimate.minus,
        "plus": estimate.plus,
        "unit": quantity.unit,
        "how": estimate.how,
        "prior": prior,
        "prior_sigma": sigma,
        "meaning": entry.meaning,
        "source": entry.source,
    }


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
    wishes = {f"plan.{name}": json.dumps(value) for name, value in made.plan.items()}
    for name, value in {**plain, **made.versions, **wishes}.items():
        yield {"section": "provenance", "name": name, "value": value}
    names = file_names(file.path for file in made.inputs)
    for file in made.inputs:
        words = f"{file.used} of {file.rows} rows used"
        yield {"section": "input", "name": names[file.path], "value": file.sha256, "meaning": words}


def _cell(value: object) -> object:
    if value is None or (isinstance(value, float) and not isfinite(value)):
        return ""
    return float(value) if isinstance(value, float) else value
