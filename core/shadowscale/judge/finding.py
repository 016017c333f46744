"""What a check found."""

from __future__ import annotations

from dataclasses import dataclass

PASS, WARN, FAIL = "pass", "warn", "fail"
ABSENT = "absent: "  # begins the name of the check on a quantity that is not given


@dataclass(frozen=True)
class Finding:
    """One check's result: its number, its limit, the verdict, plain words, and the limit's source.

    A check that finds `fatal` forbids the sheet to quote what it names (`NoSolutionError`).
    """

    check: str
    value: float | None
    limit: float | None
    verdict: str
    words: str
    source: str
    fatal: bool = False
