"""A small table as a result: the command line aligns it, scripts get it as JSON."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from math import isfinite
from typing import Any

Value = float | int | str | None


@dataclass(frozen=True)
class Column:
    """A column: its name for scripts, its unit, and the decimals that people want to see."""

    name: str
    unit: str = ""
    decimals: int | None = None


@dataclass(frozen=True)
class Table:
    """Columns, rows, and words below them.

    `facts` are single numbers or texts that belong to the table as a whole.
    """

    columns: tuple[Column, ...]
    rows: tuple[tuple[Value, ...], ...]
    words: tuple[str, ...] = ()
    facts: Mapping[str, Value] = field(default_factory=dict)

    @property
    def header(self) -> tuple[str, ...]:
        """Names with units in brackets."""
        return tuple(
            f"{column.name} [{column.unit}]" if column.unit else column.name
            for column in self.columns
        )

    def cells(self) -> list[tuple[str, ...]]:
        """The rows as people read them; nothing where there is no value."""
        return [tuple(map(_cell, row, self.columns)) for row in self.rows]

    def document(self) -> dict[str, Any]:
        """The table as JSON knows it, a row an object."""
        names = [column.name for column in self.columns]
        return {
            "rows": [dict(zip(names, map(_plain, row))) for row in self.rows],
            "notes": list(self.words),
            **{name: _plain(value) for name, value in self.facts.items()},
        }


def table_of(
    columns: Sequence[Column], rows: Sequence[Sequence[Value]], words: Sequence[str] = ()
) -> Table:
    """A table of anything that can be run through."""
    return Table(tuple(columns), tuple(tuple(row) for row in rows), tuple(words))


def _cell(value: Value, column: Column) -> str:
    if value is None or (isinstance(value, float) and not isfinite(value)):
        return ""
    if isinstance(value, float):
        return f"{value:.{column.decimals}f}" if column.decimals is not None else f"{value:.6g}"
    return str(value)


def _plain(value: Value) -> Value:
    return None if isinstance(value, float) and not isfinite(value) else value
