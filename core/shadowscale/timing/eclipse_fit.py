"""One folded eclipse: the shape that fits best, what its contacts are, and how sure.

A trapezoid finds the place; then discs of several ratios are tried, since a plain trapezoid cuts the
rounded ends of an eclipse and gives too short a duration. The covariance holds the spread between the
ratios that the data do not tell apart, and what an unknown limb darkening does: a star with u = 0.8 (0.2)
looks 1.7 % shorter (longer) eclipsed, so the duration is never surer than 0.9 %.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.geometry.contacts import EclipseTiming
from shadowscale.timing.profile import (
    FINE,
    LADDER,
    RATIOS,
    TRAPEZOID,
    Profile,
    Trapezoid,
    discs,
    library,
)
from shadowscale.timing.shape_fit import (
    DEPTH,
    DURATION,
    INGRESS,
    MIDDLE,
    ShapeData,
    ShapeFit,
    fit_shape,
    grid_chi2,
    merged,
    with_profile,
)

GRID_CELLS = 40
CELLS = 120  # cells in one duration, when points are averaged
# Duration, ingress, egress and depth change by these parts for each unit of the linear coefficient that the
# profile is off; measured on simulated spheres with coefficients 0.2 and 0.8, ratios 0.1 to 3.
BY_DARKENING = (-0.057, -0.11, -0.11, 0.0)
DARKENING_SIGMA = 0.15  # what is known of the coefficient without spectra
_FIRST = 2  # ratios fitted from the grid before the best one's neighbours
_MOST_RATIOS = 8
_TOLD_APART = 1.0  # chi2
_STRETCHES = np.array([0.96, 0.98, 1.0, 1.02, 1.05])
_SHAPE_GAIN = 9.0  # chi2 that a free egress, or a flat part, must bring (3 sigma)


@dataclass(frozen=True, eq=False)
class EclipseFit:
    """A fitted eclipse; what takes time is worked out when it is asked for.

    best : the shape;  tried : symmetric shapes, the best of which it is, or a little better than
    data, grid : what they were fitted to, and where the starts of discs came from
    first : the band whose depth the timing carries
    """

    best: ShapeFit
    tried: tuple[ShapeFit, ...]
    data: ShapeData
    grid: _Grid | None
    first: int

    @property
    def middle(self) -> float:
        """[cycles]"""
        return float(self.best.values[MIDDLE])

    @property
    def duration(self) -> float:
        """First to fourth contact [cycles]."""
        return float(self.best.values[DURATION])

    @property
    def depth(self) -> float:
        """Light lost at the middle in the first band that matters."""
        return float(self.best.depths[self.first])

    @cached_property
    def timing(self) -> EclipseTiming:
        """Contacts and depth, and whether a flat part is seen."""
        flat = _is_flat(self.data, _least(self.tried), self.grid)
        return _timing(self.best, self.tried, flat=flat, first=self.first)

    @property
    def depths(self) -> Floats:
        """(bands,) light lost at the middle."""
        return self.best.depths

    @property
    def depth_errors(self) -> Floats:
        """(bands,) of `depths`."""
        rows = slice(DEPTH, DEPTH + self.data.bands)
        return np.sqrt(self._scale * np.diag(self.best.covariance)[rows])

    @cached_property
    def signal(self) -> float:
        """Square root of the scaled chi2 that the eclipse explains beyond a sloping line."""
        return float(np.sqrt(max(_line_chi2(self.data) - self.best.chi2, 0.0) / self._scale))

    @property
    def _scale(self) -> float:
        return max(_least(self.tried).scale, 1.0)


def fit_eclipse(
    data: ShapeData,
    *,
    middle: float,
    width: float,
    profile: Profile | None = None,
    first: int = 0,
    rough: EclipseFit | None = None,
    like: EclipseFit | None = None,
) -> EclipseFit:
    """Fit an eclipse near a known place.

    Parameters
    ----------
    data : ShapeData
        The eclipse and some light on both sides.
    middle, width : float [cycles]
        From the box that found it.
    profile : Profile, optional
        Use this one instead of choosing among discs.
    first : int
        The band whose depth the timing carries.
    rough, like : EclipseFit, optional
        Of nearly the same points, from which to start: a trapezoid, and one of `profile`.
    """
    used, grid = _thinned(data, width), None
    plain = _trapezoid(used, middle, width, rough)
    tried = [plain]
    if not isinstance(profile, Trapezoid):
        used = _thinned(data, float(plain.values[DURATION]))
        if profile is None:
            grid = _grid(used, plain)
            tried = _disc_fits(used, grid)
        else:
            start = with_profile(plain, profile) if like is None else _least(like.tried).values
            tried = [fit_shape(used, profile, start, symmetric=True)]
    best = _least(tried)
    free = fit_shape(used, best.profile, best.values)
    scale = max(best.scale, 1.0)
    lopsided = best.chi2 - free.chi2 > _SHAPE_GAIN * scale and free.freedom > 10
    return EclipseFit(free if lopsided else best, tuple(tried), used, grid, first)


def _least(fits: Iterable[ShapeFit]) -> ShapeFit:
    return min(fits, key=lambda fit: fit.chi2)


def _line_chi2(data: ShapeData) -> float:
    """chi2 of a level for each band and a slope, without any eclipse."""
    rows = np.zeros((data.phase.size, data.bands + 1))
    rows[np.arange(data.phase.size), data.band] = 1.0
    rows[:, -1] = data.phase - data.centre
    rows /= data.sigma[:, None]
    light = data.flux / data.sigma
    left = light - rows @ np.linalg.lstsq(rows, light, rcond=None)[0]
    return float(left @ left)


def _thinned(data: ShapeData, duration: float) -> ShapeData:
    return data if data.phase.size <= 2 * CELLS else merged(data, duration / CELLS)


def _trapezoid(data: ShapeData, middle: float, width: float, rough: EclipseFit | None) -> ShapeFit:
    """The best trapezoid from several starts, or from one that is nearly right."""
    if rough is not None:
        starts = [rough.tried[0].values]
    else:
        kinds = ((1.0, 0.3), (1.35, 0.7), (1.7, 0.9))
        starts = [_start(data, middle, factor * width, ingress) for factor, ingress in kinds]
    return _least(fit_shape(data, TRAPEZOID, start, symmetric=True) for start in starts)


def _start(data: ShapeData, middle: float, duration: float, ingress: float) -> Floats:
    inside = np.abs(data.phase - middle) < duration / 4
    levels, depths = np.ones(data.bands), np.full(data.bands, 0.1)
    for band in range(data.bands):
        rows = data.band == band
        if rows.any():
            levels[band] = _middling(data.flux[rows & ~inside], 1.0)
            depths[band] = (
                1 - _middling(data.flux[rows & inside], 0.9 * levels[band]) / levels[band]
            )
    return np.concatenate([[middle, duration, ingress, ingress], depths, levels, [0.0]])


def _middling(values: Floats, missing: float) -> float:
    """The median, the upper one of two; numpy's own takes ten times as long for few values."""
    half = values.size // 2
    return float(np.partition(values, half)[half]) if values.size else missing


@dataclass(frozen=True, eq=False)
class _Grid:
    """Values to start from (ratios, shapes, parameters) and their chi2 (ratios, shapes)."""

    starts: Floats
    chi2: Floats


def _disc_fits(data: ShapeData, grid: _Grid) -> list[ShapeFit]:
    """Symmetric fits of discs near the ratios that fit best, smaller and larger front discs apart.

    A grid over all shapes gives the starts. The two kinds differ in the bottom, curved or flat, and each
    has a least chi2 of its own.
    """
    equal = len(RATIOS) // 2
    fits: list[ShapeFit] = []
    for kind in (range(equal + 1), range(equal, len(RATIOS))):
        found: dict[int, ShapeFit] = {}  # by place on the ladder
        order = sorted(kind, key=lambda index: float(grid.chi2[index].min()))
        for index in order[:_FIRST]:
            found[index * FINE] = _from_grid(data, grid, index)
        _walk(data, grid, found)
        _fit_between(data, found)
        fits += found.values()
    return fits


def _walk(data: ShapeData, grid: _Grid, found: dict[int, ShapeFit]) -> None:
    """Fit neighbours on the coarse ladder until the best one has both."""
    while len(found) < _MOST_RATIOS:
        best = _best(found)
        fresh = [place for place in (best - FINE, best + FINE) if 0 <= place < len(LADDER)]
        fresh = [place for place in fresh if place not in found]
        if not fresh:
            return
        for place in fresh:
            found[place] = _from_grid(data, grid, place // FINE)


def _best(found: dict[int, ShapeFit]) -> int:
    return min(found, key=lambda place: found[place].chi2)


def _fit_between(data: ShapeData, found: dict[int, ShapeFit]) -> None:
    """Halve the steps around the best ratio while the data tell the neighbours from it."""
    step = FINE
    while step > 1:
        best = _best(found)
        limit = found[best].chi2 + _TOLD_APART * max(found[best].scale, 1.0)
        sides = [found[place].chi2 for place in (best - step, best + step) if place in found]
        if max(sides) < limit:
            return
        step //= 2
        for place in (best - step, best + step):
            if 0 <= place < len(LADDER) and place not in found:
                profile = discs(LADDER[place])
                start = with_profile(found[best], profile)
                found[place] = fit_shape(data, profile, start, symmetric=True)


def _grid(data: ShapeData, rough: ShapeFit) -> _Grid:
    """Starts with the width at half depth of the rough fit, each at its best stretch."""
    part = rough.profile.ingress(float(rough.values[INGRESS]))[0]
    width = float(rough.values[DURATION]) * (1 - part / 2)
    lib = library()
    durations = np.minimum(width / lib.half, 0.45)
    if data.phase.size > 2 * GRID_CELLS:
        data = merged(data, float(rough.values[DURATION]) / GRID_CELLS)
    chi2 = grid_chi2(data, rough, durations, _STRETCHES)
    best = chi2.argmin(axis=2)
    starts = np.tile(rough.values, (*durations.shape, 1))
    starts[..., DURATION] = durations * _STRETCHES[best]
    starts[..., INGRESS] = starts[..., INGRESS + 1] = lib.shapes
    return _Grid(starts, chi2.min(axis=2))


def _from_grid(data: ShapeData, grid: _Grid, index: int, *, lower: float = 0.0) -> ShapeFit:
    """Fit one ratio from its best place on the grid."""
    allowed = np.where(library().shapes[index] >= lower, grid.chi2[index], np.inf)
    start = grid.starts[index, int(np.argmin(allowed))]
    return fit_shape(data, discs(RATIOS[index]), start, symmetric=True, lower=lower)


def _is_flat(data: ShapeData, best: ShapeFit, grid: _Grid | None) -> bool:
    """Whether no eclipse without inner contacts fits nearly as well."""
    if best.profile.ingress(float(best.values[INGRESS]))[0] >= 1:
        return False
    limit = best.chi2 + _SHAPE_GAIN * max(best.scale, 1.0)
    if grid is None or isinstance(best.profile, Trapezoid):
        start = with_profile(best, best.profile)
        return fit_shape(data, best.profile, start, symmetric=True, lower=1.0).chi2 > limit
    partial = np.where(library().flat, np.inf, grid.chi2)
    for index in np.argsort(partial.min(axis=1))[:_FIRST]:
        lower = discs(RATIOS[index]).inner
        if _from_grid(data, grid, int(index), lower=lower).chi2 < limit:
            return False
    return True


def _timing(
    chosen: ShapeFit, tried: Sequence[ShapeFit], *, flat: bool, first: int
) -> EclipseTiming:
    values, rows = _contact_values(chosen, flat=flat, first=first)
    covariance = rows @ chosen.covariance @ rows.T * max(chosen.scale, 1.0)
    covariance = covariance + _spread(tried, flat=flat, first=first)
    if not isinstance(chosen.profile, Trapezoid):
        covariance = covariance + _of_darkening(values)
    return EclipseTiming(
        middle=float(values[0]),
        duration=float(values[1]),
        ingress=float(values[2]),
        egress=float(values[3]),
        depth=float(values[4]),
        flat=flat,
        covariance=(covariance + covariance.T) / 2,
    )


def _contact_values(fit: ShapeFit, *, flat: bool, first: int) -> tuple[Floats, Floats]:
    """Middle, duration, ingress, egress, depth (5,), and their derivatives by the parameters (5, m)."""
    duration = fit.values[DURATION]
    values = np.array([fit.values[MIDDLE], duration, 0.0, 0.0, fit.values[DEPTH + first]])
    rows = np.zeros((5, fit.values.size))
    rows[0, MIDDLE] = rows[1, DURATION] = rows[4, DEPTH + first] = 1.0
    for place in (2, 3):
        part, slope = _ingress(fit, place) if flat else (1.0, 0.0)
        values[place] = part * duration / 2
        rows[place, DURATION] = part / 2
        rows[place, place] = slope * duration / 2
    return values, rows


def _ingress(fit: ShapeFit, place: int) -> tuple[float, float]:
    """Ingress in half durations and its slope: a chord over one sigma where the curve is steep."""
    value = float(fit.values[place])
    sigma = np.sqrt(fit.covariance[place, place] * max(fit.scale, 1.0))
    part, slope = fit.profile.ingress(value)
    low, high = (
        np.clip(value + side * sigma, fit.profile.lower, fit.profile.upper) for side in (-1, 1)
    )
    if high - low < 1e-9:
        return part, slope
    ends = [fit.profile.ingress(float(end))[0] for end in (low, high)]
    return part, (ends[1] - ends[0]) / float(high - low)


def _of_darkening(values: Floats) -> Floats:
    """Covariance (5, 5) from not knowing the limb darkening that the profile takes as 0.5."""
    change = DARKENING_SIGMA * np.array([0.0, *BY_DARKENING]) * values
    return np.outer(change, change)


def _spread(tried: Sequence[ShapeFit], *, flat: bool, first: int) -> Floats:
    """Covariance (5, 5) between the shapes that fit, weighted by exp(-chi2/2)."""
    best = _least(tried)
    scale = max(best.scale, 1.0)
    weight = np.array([np.exp(-(fit.chi2 - best.chi2) / (2 * scale)) for fit in tried])
    centre = _contact_values(best, flat=flat, first=first)[0]
    away = np.array([_contact_values(fit, flat=flat, first=first)[0] for fit in tried]) - centre
    return np.asarray((away * (weight / weight.sum())[:, None]).T @ away)
