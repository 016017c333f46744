"""A period search as a table's lines."""

from __future__ import annotations

from dataclasses import dataclass

from shadowscale.timing.results import PeriodSearch


@dataclass(frozen=True)
class PeriodLine:
    """A candidate and its cells."""

    period: float
    epoch: float
    cells: tuple[str, ...]


def period_lines(search: object) -> tuple[tuple[PeriodLine, ...], str]:
    """Lines of a search, best first, and how it was settled; nothing for anything else."""
    if not isinstance(search, PeriodSearch):
        return (), ""
    lines = tuple(
        PeriodLine(
            each.period,
            each.epoch,
            (f"{each.period:.7f}", f"{each.epoch:.5f}", f"{each.score:.3g}", each.words),
        )
        for each in search.candidates
    )
    return lines, search.words
