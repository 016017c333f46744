"""One eclipse of a folded light curve: the window around it, its fit, and its outliers."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats
from shadowscale.timing.eclipse_fit import EclipseFit, fit_eclipse
from shadowscale.timing.fold import Dip, nearest
from shadowscale.timing.light_points import LightPoints, robust_scatter
from shadowscale.timing.profile import TRAPEZOID, Profile
from shadowscale.timing.results import Span
from shadowscale.timing.running import running_median
from shadowscale.timing.shape_fit import ShapeData, predicted

MARGIN = 0.4  # light on either side of an eclipse, in durations
FEWEST_OUTSIDE = 30  # points outside eclipse that the window should hold
FEWEST_IN_WINDOW = 10  # points to fit an eclipse at all
FEWEST_INSIDE = 3  # points in an eclipse that give a band's depth
WIDEST_WINDOW = 0.24  # [cycles] half width
OUTLIER = 5.0  # [sigma]
NEIGHBOURS = 9  # points whose median an outlier is measured from
_LAST = 3


@dataclass(frozen=True, eq=False)
class SeenEclipse:
    """One eclipse: its fit, its window, residuals [sigma] of the window's points, which those are (n,),
    and which of them are no outliers."""

    fit: EclipseFit
    window: Span
    residuals: Floats
    inside: NDArray[np.bool_]
    kept: NDArray[np.bool_]

    @property
    def signal(self) -> float:
        """How far the eclipse stands out [sigma]; 0 for light gained instead of lost."""
        return self.fit.signal if self.fit.depth > 0 else 0.0


def see_eclipse(
    points: LightPoints,
    cycles: Floats,
    dips: tuple[Dip, ...],
    number: int,
    *,
    smear: float = 0.0,
    profile: Profile | None = None,
    like: EclipseFit | None = None,
    clip: bool = True,
) -> SeenEclipse | None:
    """Fit one of the dips in a window from its box, then again without outliers in one from the fit.

    Parameters
    ----------
    points : LightPoints
        Flattened: 1 outside eclipse.
    cycles : (n,) float64
        Time in cycles from the origin of the dips' phases.
    dips : tuple of Dip
    number : int
        Which of them; the others are kept out of the window.
    smear : float [cycles]
        Exposure.
    profile : Profile, optional
        Use this shape; the best discs where missing.
    like : EclipseFit, optional
        Use its shape, and start from it.
    clip : bool
        Leave outliers out; not while the period is still off, for then the eclipses themselves stray.

    Returns
    -------
    SeenEclipse or None
        None where too few points are in the window.
    """
    dip = dips[number]
    near = nearest(cycles, dip.middle)
    room, first = _room(dips, number), _first_band(points, cycles, dips)
    middle, width = dip.middle, 1.3 * dip.width
    kept = np.ones(cycles.size, bool)
    rough = None
    profile = profile if like is None else like.best.profile
    # Trapezoids place the window and show the outliers; the shape asked for comes last.
    for turn, shape in enumerate((TRAPEZOID, TRAPEZOID, profile, profile)):
        window = _window(near, middle, width, room)
        inside = (near >= window[0]) & (near <= window[1])
        rows = inside & kept
        if rows.sum() < FEWEST_IN_WINDOW or not np.any(np.abs(near[rows] - middle) < width / 2):
            return None
        data = _shape_data(points, near, rows, smear)
        box = min(width / 1.3, 1.3 * dip.width)
        fit = fit_eclipse(
            data, middle=middle, width=box, profile=shape, first=first, rough=rough, like=like
        )
        steady = abs(fit.duration - width) < 0.15 * width
        if shape is TRAPEZOID:
            rough = fit if steady else None  # in another window another trapezoid may be better
        residuals = _residuals(points, near, inside, fit, smear)
        fresh = kept.copy()
        if clip:
            fresh[inside] = _ordinary(near[inside], residuals)
        settled = steady and np.array_equal(fresh, kept)
        if turn == _LAST or (settled and shape is profile):
            break
        kept, middle, width = fresh, fit.middle, fit.duration
    return SeenEclipse(fit, window, residuals, inside, kept[inside])


def _ordinary(phase: Floats, residuals: Floats) -> NDArray[np.bool_]:
    """(n,) True for points that are no outliers among their neighbours in phase.

    A shape that does not quite fit leaves residuals that neighbours share; those are no outliers.
    """
    order = np.argsort(phase, kind="stable")
    away = np.empty_like(residuals)
    away[order] = residuals[order] - running_median(residuals[order], NEIGHBOURS)
    return np.asarray(np.abs(away) < OUTLIER * max(robust_scatter(away), 1e-12))


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


def slope_and_residual(
    points: LightPoints, cycles: Floats, seen: SeenEclipse
) -> tuple[Floats, Floats, Floats]:
    """For points in an eclipse's window, outliers left out: slope of the fitted light by phase over sigma,
    residual over sigma, and time in cycles."""
    best = seen.fit.best
    rows = np.flatnonzero(seen.inside)[seen.kept]
    near = nearest(cycles[rows], best.centre)
    data = replace(
        _shape_data(points.at(rows), near, np.ones(rows.size, bool), 0.0), centre=best.centre
    )
    step = 1e-3 * seen.fit.duration
    ahead, behind = (predicted(replace(data, phase=near + side), best) for side in (step, -step))
    residual = seen.residuals[seen.kept]
    return (ahead - behind) / (2 * step) / data.sigma, residual, cycles[rows]
