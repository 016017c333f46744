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
    from shadowscale.timing.ephemeris import fit_ephemeris
    from shadowscale.timing.minima import times_of_minimum

    given = period is not None and epoch is not None
    period, epoch = _ephemeris(photometry, period, epoch, progress=progress)
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
        facts["fitted_secondary_phase"] = line.secondary_phase
        facts |= {f"fitted_{name}_error": error for name, error in line.errors.items()}
    rows = [_row(item, period=period, epoch=epoch) for item in minima]
    return Table(COLUMNS, tuple(rows), tuple(words), facts)


def _ephemeris(
    photometry: Photometry, period: float | None, epoch: float | None, *, progress: Progress
) -> tuple[float, float]:
    """Period and epoch, what was not given found from the photometry."""
    from shadowscale.timing.eclipses import measure_eclipses
    from shadowscale.timing.period import search_period

    if period is None:
        search = search_period(photometry, progress=progress)
        return search.period, search.epoch if epoch is None else epoch
    if epoch is None:
        return period, measure_eclipses(photometry, period=period).epoch
    return period, epoch


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
    words = (
        f"a line through them: {line.epoch:.5f} (error {errors['epoch']:.2g})"
        f" + {line.period:.8f} (error {errors['period']:.2g}) E"
    )
    if line.secondary_phase is None:
        return words
    error = errors["secondary_phase"]
    return f"{words}; secondary at phase {line.secondary_phase:.6f} (error {error:.2g})"
