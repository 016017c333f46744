"""Period and epoch of photometry, with what else was weighed."""

from __future__ import annotations

from shadowscale.data.photometry import Photometry
from shadowscale.jobs.table import Column, Table
from shadowscale.progress import SILENT, Progress

COLUMNS = (
    Column("rank"),
    Column("period", "d", 7),
    Column("epoch", "d", 5),
    Column("score", decimals=3),
    Column("remark"),
)


def period_table(photometry: Photometry, *, progress: Progress = SILENT) -> Table:
    """The periods that were weighed, the chosen one first."""
    from shadowscale.timing.period import search_period

    search = search_period(photometry, progress=progress)
    rows = [
        (number, found.period, found.epoch, found.score, found.words)
        for number, found in enumerate(search.candidates, 1)
    ]
    facts = {
        "period": search.period,
        "period_error": search.period_error,
        "epoch": search.epoch,
        "ambiguous": int(search.ambiguous),
        "other": search.other,
        "time_scale": photometry.time_scale,
    }
    words = [
        f"period {search.period:.7f} d, error {search.period_error:.2g} d; "
        f"epoch {search.epoch:.5f} ({photometry.time_scale})",
        search.words,
    ]
    if search.ambiguous and search.other is not None:
        words.append(f"{search.other:.7f} d fits as well: more data must decide")
    return Table(COLUMNS, tuple(rows), tuple(words), facts)
