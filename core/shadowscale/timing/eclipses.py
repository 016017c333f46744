"""Both eclipses of a light curve folded on a known period: where they are, how long, how deep."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import DAY
from shadowscale.data.photometry import Floats, Photometry
from shadowscale.errors import NoSolutionError
from shadowscale.geometry.contacts import EclipseTiming
from shadowscale.timing.eclipse_fit import EclipseFit, fit_eclipse
from shadowscale.timing.fold import Dip, find_dips, nearest
from shadowscale.timing.levels import band_levels, flattened, outside_eclipse
from shadowscale.timing.light_points import LightPoints, light_points, robust_scatter
from shadowscale.timing.results import MeasuredEclipses, Span
from shadowscale.timing.shape_fit import ShapeData, predicted

MARGIN = 0.4  # light on either side of an eclipse, in durations
FEWEST_OUTSIDE = 30  # points outside eclipse that the window should hold
FEWEST_INSIDE = 3  # points in an eclipse that give a band's depth
WIDEST_WINDOW = 0.24  # [cycles] half width
OUTLIER = 5.0  # [sigma]
LEAST_GAIN = 20.0  # chi2 that a box must explain to be looked at
LEAST_SIGNAL = 5.0  # depth over its error
SMEARED = 3.0  # scatter in eclipse over scatter outside that tells a wrong period ...
SMEARED_DEPTH = 0.15  # ... where it is also that part of the depth
STRAY = 0.25  # part of the faint points outside the measured eclipses that tells a wrong period
LINE_UP = "the eclipses do not line up at this period"
HELP = "search the period, or check the ephemeris"


@dataclass(frozen=True, eq=False)
class _Seen:
    """One eclipse: its fit, its window, residuals [sigma] of the window's points, and which those are."""

    fit: EclipseFit
    window: Span
    residuals: Floats
    inside: NDArray[np.bool_]

    @property
    def signal(self) -> float:
        """Depth over its error, all bands together."""
        if self.fit.timing.depth <= 0:
            return 0.0
        errors = np.maximum(self.fit.depth_errors, 1e-9)
        return float(np.sqrt(np.sum((self.fit.depths / errors) ** 2)))


def measure_eclipses(
    photometry: Photometry, *, period: float, epoch: float | None = None, exposure: float = 0.0
) -> MeasuredEclipses:
    """Middles, durations, ingress, egress and depths of both eclipses.

    Parameters
    ----------
    photometry : Photometry
    period : float [d]
    epoch : float, optional [d]
        Near a primary minimum; found from the data where missing.
    exposure : float [s]
        Length of one exposure.

    Returns
    -------
    MeasuredEclipses
        The deeper eclipse is the primary, whichever `epoch` pointed at.

    Raises
    ------
    ValueError
        If `period` is not positive, or `exposure` is negative.
    NoSolutionError
        If no eclipse stands out at this ephemeris, or the eclipses do not line up.
    """
    _check(period, exposure)
    raw = light_points(photometry)
    origin = float(np.median(raw.time)) if epoch is None else epoch
    cycles = (raw.time - origin) / period
    dips = _dips(raw, cycles)
    points, notes = flattened(raw, cycles, dips)
    dips = _dips(points, cycles)
    smear = exposure / DAY / period
    seen = _significant([_seen(points, cycles, dips, n, smear) for n in range(len(dips))], points)
    _check_alignment(points, cycles, seen)
    found = _named(points, seen, notes, period=period, origin=origin, given=epoch is not None)
    level = band_levels(raw, outside_eclipse(cycles - np.floor(cycles), dips))
    return replace(found, level=dict(zip(raw.bands, map(float, level), strict=True)))


def _check(period: float, exposure: float) -> None:
    if not (np.isfinite(period) and period > 0):
        raise ValueError(f"period must be positive, found {period!r}")
    if not exposure >= 0:
        raise ValueError(f"exposure must not be negative, found {exposure!r}")


def _dips(points: LightPoints, cycles: Floats) -> tuple[Dip, ...]:
    """Dips of the fold, all bands together; NoSolutionError without any."""
    level = band_levels(points, np.ones(cycles.size, bool))[points.band]
    sigma = points.sigma / level
    bins = int(np.clip(cycles.size / 3, 60, 400))
    dips = find_dips(cycles - np.floor(cycles), points.flux / level - 1, sigma**-2, bins=bins)
    dips = tuple(dip for dip in dips if dip.gain > LEAST_GAIN)
    if not dips:
        numbers = {"noise of a point": float(np.median(sigma)), "points": float(cycles.size)}
        raise NoSolutionError("no eclipse stands out at this period", numbers, help=HELP)
    return dips


def _seen(
    points: LightPoints, cycles: Floats, dips: tuple[Dip, ...], number: int, smear: float
) -> _Seen:
    """Fit one eclipse in a window from its box, then again without outliers in one from the fit."""
    dip = dips[number]
    near = nearest(cycles, dip.middle)
    room, first = _room(dips, number), _first_band(points, cycles, dips)
    middle, width = dip.middle, 1.3 * dip.width
    kept = np.ones(cycles.size, bool)
    for _ in range(3):
        window = _window(near, middle, width, room)
        inside = (near >= window[0]) & (near <= window[1])
        data = _shape_data(points, near, inside & kept, smear)
        fit = fit_eclipse(data, middle=middle, width=min(width / 1.3, dip.width), first=first)
        residuals = _residuals(points, near, inside, fit, smear)
        fresh = kept.copy()
        fresh[inside] = np.abs(residuals) < OUTLIER * max(robust_scatter(residuals), 1e-12)
        settled = abs(fit.timing.duration - width) < 0.15 * width and np.array_equal(fresh, kept)
        kept, middle, width = fresh, fit.timing.middle, fit.timing.duration
        if settled:
            break
    return _Seen(fit, window, residuals, inside)


def _room(dips: tuple[Dip, ...], number: int) -> float:
    """Half width of the widest window that leaves the other eclipse out."""
    dip = dips[number]
    room = WIDEST_WINDOW
    for other in dips:
        if other is not dip:
            apart = abs(float(nearest(np.array(other.middle), dip.middle)) - dip.middle)
            room = min(room, apart - 0.75 * other.width)
    return max(room, 0.8 * dip.width)


def _first_band(points: LightPoints, cycles: Floats, dips: tuple[Dip, ...]) -> int:
    """The first band with points in every dip, else the first with points in the strongest."""
    counts = np.array(
        [
            np.bincount(
                points.band[np.abs(nearest(cycles, dip.middle) - dip.middle) < dip.width / 2],
                minlength=len(points.bands),
            )
            for dip in dips
        ]
    )
    covered = counts >= FEWEST_INSIDE
    both = np.flatnonzero(covered.all(axis=0))
    return int(both[0]) if both.size else int(np.argmax(counts[0]))


def _window(near: Floats, middle: float, width: float, room: float) -> Span:
    """Phases to fit: the eclipse and enough light beside it."""
    away = np.abs(near - middle)
    for margin in (MARGIN, 2 * MARGIN, 4 * MARGIN):
        half = min(width * (0.5 + margin), room)
        if np.count_nonzero((away > width / 2) & (away < half)) >= FEWEST_OUTSIDE:
            break
    return middle - half, middle + half


def _shape_data(
    points: LightPoints, near: Floats, rows: NDArray[np.bool_], smear: float
) -> ShapeData:
    phase = near[rows]
    return ShapeData(
        phase=phase,
        flux=points.flux[rows],
        sigma=points.sigma[rows],
        band=points.band[rows],
        bands=len(points.bands),
        centre=float(phase.min() + phase.max()) / 2,
        exposure=smear,
    )


def _residuals(
    points: LightPoints, near: Floats, inside: NDArray[np.bool_], fit: EclipseFit, smear: float
) -> Floats:
    data = replace(_shape_data(points, near, inside, smear), centre=fit.best.centre)
    return (data.flux - predicted(data, fit.best)) / data.sigma


def _significant(seen: list[_Seen], points: LightPoints) -> list[_Seen]:
    """The eclipses that stand out, the deeper first."""
    kept = [one for one in seen if one.signal > LEAST_SIGNAL]
    if kept:
        return sorted(kept, key=lambda one: -one.fit.timing.depth)
    best = max(seen, key=lambda one: one.signal)
    numbers = {
        "depth": best.fit.timing.depth,
        "error of the depth": float(best.fit.depth_errors.max()),
        "noise of a point": float(np.median(points.noise)),
    }
    raise NoSolutionError("no eclipse stands out at this period", numbers, help=HELP)


def _check_alignment(points: LightPoints, cycles: Floats, seen: list[_Seen]) -> None:
    """A wrong period strews the eclipses over the fold: into one another, or outside the measured ones."""
    outside = np.ones(cycles.size, bool)
    for one in seen:
        timing = one.fit.timing
        away = np.abs(nearest(cycles, timing.middle) - timing.middle) / timing.duration
        outside &= away > 0.55
        core = away[one.inside] < 0.4
        within, beside = (robust_scatter(one.residuals[rows]) for rows in (core, ~core))
        scatter = within * float(np.median(points.sigma))
        if core.sum() > 8 and within > SMEARED * beside and scatter > SMEARED_DEPTH * timing.depth:
            numbers = {"scatter in eclipse": scatter, "depth": timing.depth}
            raise NoSolutionError(LINE_UP, numbers, help=HELP)
    faint = points.flux < 1 - np.maximum(0.5 * seen[0].fit.timing.depth, 4 * points.sigma)
    stray = np.count_nonzero(faint & outside)
    if stray > max(5, STRAY * np.count_nonzero(faint)):
        numbers = {"faint points": float(faint.sum()), "of them outside the eclipses": float(stray)}
        raise NoSolutionError(LINE_UP, numbers, help=HELP)


def _named(
    points: LightPoints,
    seen: list[_Seen],
    notes: list[str],
    *,
    period: float,
    origin: float,
    given: bool,
) -> MeasuredEclipses:
    """The result with phases from the middle of the deeper eclipse."""
    zero = seen[0].fit.timing.middle
    moved = zero - round(zero)
    if given and abs(moved) > 0.1:
        notes.append(f"the epoch was moved by {moved:+.4f} cycles to the deeper eclipse")
    if len(seen) == 1:
        notes.append("no second eclipse is seen")
    primary, secondary = _shifted(seen[0], zero, 0.0), None
    if len(seen) > 1:
        secondary = _shifted(seen[1], zero, 0.5)
    depths, errors = _per_band(points, seen)
    return MeasuredEclipses(
        period=period,
        epoch=origin + moved * period,
        primary=primary[0],
        secondary=None if secondary is None else secondary[0],
        level={},
        depths=depths,
        depth_errors=errors,
        primary_window=primary[1],
        secondary_window=None if secondary is None else secondary[1],
        scatter=_scatter(points, seen),
        notes=tuple(notes),
    )


def _shifted(seen: _Seen, zero: float, centre: float) -> tuple[EclipseTiming, Span]:
    """Timing and window with phases from `zero`, within half a cycle of `centre`."""
    raw = seen.fit.timing.middle
    middle = raw - zero
    middle -= round(middle - centre)
    window = (seen.window[0] + middle - raw, seen.window[1] + middle - raw)
    return replace(seen.fit.timing, middle=float(middle)), window


BandPair = tuple[float | None, float | None]


def _per_band(
    points: LightPoints, seen: list[_Seen]
) -> tuple[dict[str, BandPair], dict[str, BandPair]]:
    """Depths and their errors by band; None where a band has no points in an eclipse."""
    depths: dict[str, BandPair] = {}
    errors: dict[str, BandPair] = {}
    for number, band in enumerate(points.bands):
        covered = [_covers(points, one, number) for one in seen] + [False]
        value = [float(one.fit.depths[number]) for one in seen] + [0.0]
        error = [float(one.fit.depth_errors[number]) for one in seen] + [0.0]
        depths[band] = (value[0] if covered[0] else None, value[1] if covered[1] else None)
        errors[band] = (error[0] if covered[0] else None, error[1] if covered[1] else None)
    return depths, errors


def _covers(points: LightPoints, seen: _Seen, number: int) -> bool:
    """Whether a band has points in an eclipse: only then does its depth have an error."""
    return bool(seen.fit.depth_errors[number] > 0)


def _scatter(points: LightPoints, seen: list[_Seen]) -> dict[str, float]:
    scatter = {}
    for number, band in enumerate(points.bands):
        parts = []
        for one in seen:
            rows = points.band[one.inside] == number
            parts.append(one.residuals[rows] * points.sigma[one.inside][rows])
        scatter[band] = robust_scatter(np.concatenate(parts))
    return scatter
