"""A table on standard output: aligned for people, JSON for scripts."""

from __future__ import annotations

import json

from shadowscale.jobs.table import Table


def print_table(table: Table, *, as_json: bool) -> None:
    """Print a table."""
    if as_json:
        print(json.dumps(table.document(), indent=1, allow_nan=False))
    else:
        print(aligned(table), end="")


def aligned(table: Table) -> str:
    """The table as text: columns in line, numbers to the right, words below."""
    cells = [table.header, *table.cells()]
    widths = [max(len(row[number]) for row in cells) for number in range(len(table.header))]
    numeric = [all(_is_number(row[number]) for row in cells[1:]) for number in range(len(widths))]
    lines = []
    for row in cells:
        parts = [
            cell.rjust(width) if right else cell.ljust(width)
            for cell, width, right in zip(row, widths, numeric)
        ]
        lines.append("  ".join(parts).rstrip())
    return "\n".join([*lines, *table.words]) + "\n"


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return text == ""
    return True
