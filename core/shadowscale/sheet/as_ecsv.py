"""The sheet's numbers as ECSV (Enhanced Character Separated Values 1.0), which astropy reads."""

from __future__ import annotations

import json
from math import isfinite

from shadowscale.sheet.sheet import Entry, Sheet

COLUMNS = (
    ("name", "string", "name of the quantity"),
    ("value", "float64", "value in the unit of the row"),
    ("minus", "float64", "lower 68.3 % limit, as a distance"),
    ("plus", "float64", "upper 68.3 % limit, as a distance"),
    ("unit", "string", "unit in astropy's spelling"),
    ("how", "string", "fitted, fixed, derived or assumed"),
    ("prior", "float64", "middle of the prior, where there is one"),
    ("prior_sigma", "float64", "its standard deviation"),
    ("meaning", "string", "in words"),
    ("source", "string", "of the formula, where it is derived"),
)


def as_ecsv(sheet: Sheet) -> str:
    """The numbers of the system, the bands and the sources; an empty cell where there is no error."""
    made = sheet.provenance
    meta = {"program": made.program, "command": made.command, "time_scale": made.time_scale}
    head = ["%ECSV 1.0", "---", "delimiter: ','", "datatype:"]
    for name, kind, words in COLUMNS:
        head.append(f"- {{name: {name}, datatype: {kind}, description: {json.dumps(words)}}}")
    head.append(f"meta: {json.dumps(meta)}")  # JSON is YAML
    head.append("schema: astropy-2.0")
    lines = [f"# {line}" for line in head]
    lines.append(",".join(name for name, _, _ in COLUMNS))
    lines += [_row(entry) for entry in sheet.entries()]
    return "\n".join(lines) + "\n"


def _row(entry: Entry) -> str:
    estimate = entry.estimate
    numbers = (estimate.value, estimate.minus, estimate.plus)
    # an empty cell would be read as a missing one; astropy knows 1 as the unit of a pure number
    words = (entry.quantity.unit or "1", estimate.how)
    prior = estimate.prior or (None, None)
    ends = (entry.meaning, entry.source or "-")
    cells = [_quoted(entry.key), *map(_number, numbers), *map(_quoted, words)]
    return ",".join([*cells, *map(_number, prior), *map(_quoted, ends)])


def _number(value: float | None) -> str:
    return repr(float(value)) if value is not None and isfinite(value) else ""


def _quoted(text: str) -> str:
    return '"' + text.replace('"', '""') + '"'
