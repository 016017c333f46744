"""Times of the single minima of an eclipsing binary: template and folding."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Photometry
from shadowscale.timing.eclipses import SeenTogether, see_eclipses
from shadowscale.timing.folding import folded_minimum
from shadowscale.timing.results import Minimum
from shadowscale.timing.shape_fit import ShapeData, predicted
from shadowscale.timing.window_fit import SeenEclipse

FEWEST = 5  # points in the eclipse
FEWEST_ON_BRANCH = 2
STEPS = 12
SHOWS = 9.0  # gain in chi2 of a slope that is not chance
FARTHEST = 0.5  # shift that is still this eclipse, in durations


def times_of_minimum(
    photometry: Photometry, *, period: float, epoch: float, exposure: float = 0.0
) -> tuple[Minimum, ...]:
    """The time of each observed eclipse, by band.

    Parameters
    ----------
    photometry : Photometry
    period, epoch : float [d]
        Good enough that the eclipses line up.
    exposure : float [s]

    Returns
    -------
    tuple of Minimum
        In time order; eclipses that hold a point but cannot be timed say why not.

    Raises
    ------
    NoSolutionError
        As `measure_eclipses`.

    Notes
    -----
    The template is the mean eclipse of the same kind and band, moved in time with its own level and, where
    light is seen on both sides, slope; errors are scaled by the scatter about it. The folding method
    (Kwee & van Woerden 1956; error of Deeg 2021) is given beside it.
    """
    together = see_eclipses(photometry, period=period, epoch=epoch, exposure=exposure)
    found: list[Minimum] = []
    for number, seen in enumerate(together.eclipses):
        for band in range(len(together.points.bands)):
            found += _of_one_kind(together, seen, eclipse=number + 1, band=band)
    return tuple(sorted(found, key=lambda minimum: minimum.time))


@dataclass(frozen=True, eq=False)
class _Single:
    """Points of one eclipse of one band: phase from the expected middle, light, sigma, time [d]."""

    away: Floats
    flux: Floats
    sigma: Floats
    time: Floats
    expected: float
    cycle: int
    half: float  # half the duration [cycles]


def _of_one_kind(
    together: SeenTogether, seen: SeenEclipse, *, eclipse: int, band: int
) -> list[Minimum]:
    points, cycles = together.points, together.cycles
    middle = seen.fit.middle
    rows = np.flatnonzero(seen.inside)[seen.kept]
    rows = rows[points.band[rows] == band]
    number = np.round(cycles[rows] - middle).astype(np.int64)
    order = np.argsort(number, kind="stable")
    rows, number = rows[order], number[order]
    edges = np.flatnonzero(np.diff(number)) + 1
    found = []
    for part in np.split(rows, edges):
        if part.size == 0:
            continue
        turn = int(np.round(cycles[part[0]] - middle))
        single = _single(together, part, middle + turn, seen.fit.duration / 2)
        if np.any(np.abs(single.away) < single.half):
            found.append(_timed(together, seen, single, eclipse=eclipse, band=band))
    return found


def _single(
    together: SeenTogether, rows: NDArray[np.int64], expected: float, half: float
) -> _Single:
    points = together.points
    rows = rows[np.argsort(points.time[rows], kind="stable")]
    zero = together.zero - round(together.zero)
    return _Single(
        away=together.cycles[rows] - expected,
        flux=points.flux[rows],
        sigma=points.sigma[rows],
        time=points.time[rows],
        expected=together.origin + expected * together.period,
        cycle=int(np.floor(expected - zero + 0.25)),
        half=half,
    )


def _timed(
    together: SeenTogether, seen: SeenEclipse, single: _Single, *, eclipse: int, band: int
) -> Minimum:
    inside = np.abs(single.away) < single.half
    blank = Minimum(
        cycle=single.cycle,
        eclipse=eclipse,
        band=together.points.bands[band],
        time=single.expected,
        error=float("nan"),
        method="",
        points=int(inside.sum()),
    )
    if why := _why_not(single, inside):
        return replace(blank, why_not=why)
    template = _by_template(together, seen, single, band)
    core = np.abs(single.away) < single.half
    folded = folded_minimum(
        single.time[core], single.flux[core], float(np.median(single.sigma[core]))
    )
    if folded is not None:
        blank = replace(blank, folding_time=folded.time, folding_error=folded.error)
    if template is not None:
        return replace(blank, time=template[0], error=template[1], method="template")
    if folded is not None:
        return replace(blank, time=folded.time, error=folded.error, method="folding")
    return replace(blank, why_not="the mean eclipse does not fit these points")


def _why_not(single: _Single, inside: NDArray[np.bool_]) -> str:
    if inside.sum() < FEWEST:
        return f"only {int(inside.sum())} points in the eclipse, {FEWEST} are needed"
    if np.count_nonzero(inside & (single.away < 0)) < FEWEST_ON_BRANCH:
        return "only the rising branch was observed"
    if np.count_nonzero(inside & (single.away > 0)) < FEWEST_ON_BRANCH:
        return "only the falling branch was observed"
    return ""


def _by_template(
    together: SeenTogether, seen: SeenEclipse, single: _Single, band: int
) -> tuple[float, float] | None:
    """Time and error from the mean eclipse moved in time; None if it runs away.

    A slope of the light is part of the shift's error, so it is fitted only where it shows.
    """
    found = _moved(together, seen, single, band, tilted=False)
    if _both_sides(single):
        tilted = _moved(together, seen, single, band, tilted=True)
        if tilted is not None and (found is None or tilted.chi2 < found.chi2 - tilted.least_gain):
            found = tilted
    if found is None:
        return None
    return (
        single.expected + found.shift * together.period,
        found.error * together.period,
    )


@dataclass(frozen=True)
class _Moved:
    """A template moved by `shift` [cycles]; the error is scaled to the scatter."""

    shift: float
    error: float
    chi2: float
    least_gain: float  # in chi2, of a slope that shows


def _moved(
    together: SeenTogether, seen: SeenEclipse, single: _Single, band: int, *, tilted: bool
) -> _Moved | None:
    """Least squares for shift and level, and slope if asked for."""
    shift, level = 0.0, np.array([1.0, 0.0])
    rows, residual = np.zeros((1, 1)), np.zeros(1)
    for _ in range(STEPS):
        shape, slope = _template(together, seen, single, band, shift)
        line = level[0] + level[1] * single.away
        columns = [-slope * line, shape]
        if tilted:
            columns.append(single.away * shape)
        rows = np.stack(columns, axis=1) / single.sigma[:, None]
        residual = (single.flux - shape * line) / single.sigma
        step = np.linalg.lstsq(rows, residual, rcond=None)[0]
        shift += float(step[0])
        level[: step.size - 1] += step[1:]
        if abs(shift) > FARTHEST * 2 * single.half:
            return None
        if abs(step[0]) < 1e-7 * single.half:
            break
    chi2 = float(residual @ residual)
    scale = max(1.0, chi2 / max(single.away.size - rows.shape[1], 1))
    variance = np.linalg.pinv(rows.T @ rows, hermitian=True)[0, 0]
    return _Moved(shift, float(np.sqrt(variance * scale)), chi2, SHOWS * scale)


def _both_sides(single: _Single) -> bool:
    outside = np.abs(single.away) > single.half
    return bool(
        np.count_nonzero(outside & (single.away < 0)) >= 3
        and np.count_nonzero(outside & (single.away > 0)) >= 3
    )


def _template(
    together: SeenTogether, seen: SeenEclipse, single: _Single, band: int, shift: float
) -> tuple[Floats, Floats]:
    """Mean eclipse at the points, and its slope by phase; 1 outside."""
    best = seen.fit.best
    middle = seen.fit.middle
    step = 2e-3 * single.half
    data = ShapeData(
        phase=middle + single.away - shift,
        flux=single.flux,
        sigma=single.sigma,
        band=np.full(single.away.size, band, np.int64),
        bands=best.bands,
        centre=best.centre,
        exposure=together.smear,
    )
    ahead, here, behind = (
        predicted(replace(data, phase=data.phase + side), best) for side in (step, 0.0, -step)
    )
    level = best.levels[band]
    return here / level, (ahead - behind) / (2 * step) / level
