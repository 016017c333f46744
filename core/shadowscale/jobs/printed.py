"""How simulated tables are printed."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from io import StringIO

TIME_DIGITS = 6  # decimals of printed times [d]
IMPLIED = {"MJD": 2400000.5, "BTJD": 2457000.0, "BKJD": 2454833.0}  # offsets in a name [d]


def time_name(scale: str, offset: float) -> str:
    """The header of the times; an offset is said unless the name implies it."""
    if not offset or IMPLIED.get(scale) == offset:
        return scale
    return f"{scale}-{offset:.15g}"


def written_time(time: float, offset: float) -> str:
    """A time as it is printed, the offset taken off."""
    return f"{time - offset:.{TIME_DIGITS}f}"


def printed(header: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """A table as comma-separated text."""
    text = StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    return text.getvalue()
