"""Times of minimum, and observed minus computed."""

from __future__ import annotations

from shadowscale.data.photometry import Photometry
from shadowscale.jobs.table import Column, Table, Value
from shadowscale.progress import SILENT, Progress
from shadowscale.timing.results import Ephemeris, Minimum

COLUMNS = (
    Column("time", "d", 5),
    Column("error", "d", 5),
    Column("eclipse"),
    Column("cycle"),
    Column("band"),
    Column("method"),
    Column("points"),
    Column("o_minus_c", "d", 5),
    Column("remark"),
)
NAMES = {1: "primary", 2: "secondary"}
ENOUGH = 2  # minima through which a line can be laid


def minima_table(
    photometry: Photometry,
    *,
    period: float | None = None,
    epoch: float | None = None,
    progress: Progress = SILENT,
) -> Table:
    """Every eclipse in the photometry, timed or with the reason why not.

    O-C is against the ephemeris given; without one, against that of the period search, and where
    there are enough minima a line through them is told as well.
    """
    from shadowscale.timing import fit_ephemeris, search_period, times_of_minimum

    given = period is not None and epoch is not None
    if period is None or epoch is None:
        search = search_period(photometry, progress=progress)
        period = search.period if period is None else period
        epoch = search.epoch if epoch is None else epoch
    minima = tuple(times_of_minimum(photometry, period=period, epoch=epoch))
    timed = [item for item in minima if not item.why_not]
    words = [
        f"observed minus computed against {epoch:.5f} + {period:.7f} E"
        f" ({'as given' if given else 'found here'}), {photometry.time_scale}"
    ]
    primaries = {item.cycle for item in timed if item.eclipse == 1}
    facts: dict[str, Value] = {"period": period, "epoch": epoch}
    facts["time_scale"] = photometry.time_scale
    if len(primaries) >= ENOUGH:
        line = fit_ephemeris(tuple(timed))
        words.append(_line_words(line))
        facts |= {"fitted_period": line.period, "fitted_epoch": line.epoch}
        facts |= {f"fitted_{name}_error": error for name, error in line.errors.items()}
    rows = [_row(item, period=period, epoch=epoch) for item in minima]
    return Table(COLUMNS, tuple(rows), tuple(words), facts)


def _row(item: Minimum, *, period: float, epoch: float) -> tuple[Value, ...]:
    computed = epoch + period * (item.cycle + (0.5 if item.eclipse == 2 else 0.0))
    timed = not item.why_not
    return (
        item.time,
        item.error if timed else None,
        NAMES[item.eclipse],
        item.cycle,
        item.band,
        item.method if timed else "",
        item.points,
        item.time - computed if timed else None,
        item.why_not,
    )


def _line_words(line: Ephemeris) -> str:
    errors = line.errors
    return (
        f"a line through them: {line.epoch:.5f} (error {errors['epoch']:.2g})"
        f" + {line.period:.8f} (error {errors['period']:.2g}) E"
    )
