"""Both eclipses of a light curve folded on a known period: where they are, how long, how deep."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from shadowscale.constants import DAY
from shadowscale.data.photometry import Floats, Photometry
from shadowscale.errors import NoSolutionError
from shadowscale.geometry.contacts import EclipseTiming
from shadowscale.timing.fold import Dip, find_dips, nearest
from shadowscale.timing.levels import band_levels, flattened, outside_eclipse
from shadowscale.timing.light_points import LightPoints, isolated, light_points, robust_scatter
from shadowscale.timing.results import MeasuredEclipses, Span
from shadowscale.timing.window_fit import SeenEclipse, see_eclipse

PLACES = 3  # where a second eclipse is looked for
LEAST_GAIN = 20.0  # chi2 that a box must explain to be looked at
LEAST_SIGNAL = 6.0  # [sigma]
SMEARED = 3.0  # scatter in eclipse over scatter outside that tells a wrong period ...
SMEARED_DEPTH = 0.15  # ... where it is also that part of the depth
STRAY = 0.25  # part of the faint points outside the measured eclipses that tells a wrong period
LINE_UP = "the eclipses do not line up at this period"
HELP = "search the period, or check the ephemeris"


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
    together = see_eclipses(photometry, period=period, epoch=epoch, exposure=exposure)
    return _named(together, given=epoch is not None)


@dataclass(frozen=True, eq=False)
class SeenTogether:
    """The eclipses of a light curve, the deeper first, with the flattened points they were fitted to.

    cycles : (n,) time in cycles from `origin`;  smear : exposure [cycles];  level : (bands,) flux outside
    """

    points: LightPoints
    cycles: Floats
    eclipses: tuple[SeenEclipse, ...]
    level: Floats
    period: float
    origin: float
    smear: float
    notes: tuple[str, ...]

    @property
    def zero(self) -> float:
        """Phase of the deeper eclipse."""
        return self.eclipses[0].fit.middle


def see_eclipses(
    photometry: Photometry, *, period: float, epoch: float | None = None, exposure: float = 0.0
) -> SeenTogether:
    """Fit both eclipses; parameters and errors as in `measure_eclipses`."""
    _check(period, exposure)
    raw = light_points(photometry)
    origin = float(np.median(raw.time)) if epoch is None else epoch
    cycles = (raw.time - origin) / period
    dips = _dips(raw, cycles)
    points, notes = flattened(raw, cycles, dips)
    smear = exposure / DAY / period
    seen = _significant(_fitted(points, cycles, smear), points)
    _check_alignment(points, cycles, seen)
    level = band_levels(raw, outside_eclipse(cycles - np.floor(cycles), dips))
    return SeenTogether(points, cycles, tuple(seen), level, period, origin, smear, tuple(notes))


def _check(period: float, exposure: float) -> None:
    if not (np.isfinite(period) and period > 0):
        raise ValueError(f"period must be positive, found {period!r}")
    if not exposure >= 0:
        raise ValueError(f"exposure must not be negative, found {exposure!r}")


def _fitted(points: LightPoints, cycles: Floats, smear: float) -> list[SeenEclipse]:
    """The best dip and, of a few places for a second one, the first where an eclipse can be fitted."""
    first: SeenEclipse | None = None
    tried: tuple[Dip, ...] = ()
    for _ in range(PLACES):
        dips = _dips(points, cycles, besides=tried)
        if first is None:
            first = see_eclipse(points, cycles, dips, 0, smear=smear)
        second = see_eclipse(points, cycles, dips, 1, smear=smear) if len(dips) > 1 else None
        if second is not None and second.signal > LEAST_SIGNAL:
            return [one for one in (first, second) if one is not None]
        if len(dips) < 2:
            break
        tried = (*tried, dips[1])
    return [] if first is None else [first]


def _dips(points: LightPoints, cycles: Floats, *, besides: tuple[Dip, ...] = ()) -> tuple[Dip, ...]:
    """Dips of the fold, all bands together, the strongest first; NoSolutionError without any."""
    level = band_levels(points, np.ones(cycles.size, bool))[points.band]
    value, sigma = points.flux / level - 1, points.sigma / level
    weight = np.where(isolated(points.time, value, sigma), 0.0, sigma**-2)
    bins = int(np.clip(cycles.size / 3, 60, 400))
    found = find_dips(cycles - np.floor(cycles), value, weight, bins=bins, besides=besides)
    dips = tuple(dip for dip in found if dip.gain > LEAST_GAIN)
    if not dips:
        numbers = {"noise of a point": float(np.median(sigma)), "points": float(cycles.size)}
        raise NoSolutionError("no eclipse stands out at this period", numbers, help=HELP)
    return dips


def _significant(seen: list[SeenEclipse], points: LightPoints) -> list[SeenEclipse]:
    """The eclipses that stand out, the deeper first."""
    kept = [one for one in seen if one.signal > LEAST_SIGNAL]
    if kept:
        return sorted(kept, key=lambda one: -one.fit.depth)
    numbers = {"noise of a point": float(np.median(points.noise))}
    if seen:
        best = max(seen, key=lambda one: one.signal)
        numbers["depth"] = best.fit.depth
        numbers["depth over its noise"] = best.signal
    raise NoSolutionError("no eclipse stands out at this period", numbers, help=HELP)


def _check_alignment(points: LightPoints, cycles: Floats, seen: list[SeenEclipse]) -> None:
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
    faint = points.flux < 1 - np.maximum(0.5 * seen[0].fit.depth, 4 * points.sigma)
    stray = np.count_nonzero(faint & outside)
    if stray > max(5, STRAY * np.count_nonzero(faint)):
        numbers = {"faint points": float(faint.sum()), "of them outside the eclipses": float(stray)}
        raise NoSolutionError(LINE_UP, numbers, help=HELP)


def _named(together: SeenTogether, *, given: bool) -> MeasuredEclipses:
    """The result with phases from the middle of the deeper eclipse."""
    seen, zero, notes = together.eclipses, together.zero, list(together.notes)
    moved = zero - round(zero)
    if given and abs(moved) > 0.1:
        notes.append(f"the epoch was moved by {moved:+.4f} cycles to the deeper eclipse")
    if len(seen) == 1:
        notes.append("no second eclipse is seen")
    primary = _shifted(seen[0], zero, 0.0)
    secondary = _shifted(seen[1], zero, 0.5) if len(seen) > 1 else None
    depths, errors = _per_band(together.points, seen)
    return MeasuredEclipses(
        period=together.period,
        epoch=together.origin + moved * together.period,
        primary=primary[0],
        secondary=None if secondary is None else secondary[0],
        level=dict(zip(together.points.bands, map(float, together.level), strict=True)),
        depths=depths,
        depth_errors=errors,
        primary_window=primary[1],
        secondary_window=None if secondary is None else secondary[1],
        scatter=_scatter(together.points, seen),
        notes=tuple(notes),
    )


def _shifted(seen: SeenEclipse, zero: float, centre: float) -> tuple[EclipseTiming, Span]:
    """Timing and window with phases from `zero`, within half a cycle of `centre`."""
    raw = seen.fit.middle
    middle = raw - zero
    middle -= round(middle - centre)
    window = (seen.window[0] + middle - raw, seen.window[1] + middle - raw)
    return replace(seen.fit.timing, middle=float(middle)), window


BandPair = tuple[float | None, float | None]


def _per_band(
    points: LightPoints, seen: tuple[SeenEclipse, ...]
) -> tuple[dict[str, BandPair], dict[str, BandPair]]:
    """Depths and their errors by band; None where a band has no points in an eclipse."""
    depths: dict[str, BandPair] = {}
    errors: dict[str, BandPair] = {}
    for number, band in enumerate(points.bands):
        covered = [bool(one.fit.depth_errors[number] > 0) for one in seen] + [False]
        value = [float(one.fit.depths[number]) for one in seen] + [0.0]
        error = [float(one.fit.depth_errors[number]) for one in seen] + [0.0]
        depths[band] = (value[0] if covered[0] else None, value[1] if covered[1] else None)
        errors[band] = (error[0] if covered[0] else None, error[1] if covered[1] else None)
    return depths, errors


def _scatter(points: LightPoints, seen: tuple[SeenEclipse, ...]) -> dict[str, float]:
    scatter = {}
    for number, band in enumerate(points.bands):
        parts = []
        for one in seen:
            rows = points.band[one.inside] == number
            parts.append(one.residuals[rows] * points.sigma[one.inside][rows])
        scatter[band] = robust_scatter(np.concatenate(parts))
    return scatter
