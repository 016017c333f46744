"""One folded eclipse: the shape that fits best, what its contacts are, and how sure.

A trapezoid finds the place; then discs of several ratios are tried, since a plain trapezoid cuts the
rounded ends of an eclipse and gives too short a duration. The covariance holds the spread between the
ratios that the data do not tell apart.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.geometry.contacts import EclipseTiming
from shadowscale.timing.profile import RATIOS, TRAPEZOID, Profile, discs
from shadowscale.timing.shape_fit import (
    DEPTH,
    DURATION,
    INGRESS,
    MIDDLE,
    ShapeData,
    ShapeFit,
    fit_shape,
    merged,
    with_profile,
)

CELLS = 120  # cells in one duration, when points are averaged
_COARSE = (0, 4, 8, 10, 12, 16, 20)
_SHAPE_GAIN = 9.0  # chi2 that a free egress, or a flat part, must bring (3 sigma)
_DISC_LONGER = 1.04  # a disc profile is that much longer than the trapezoid through it


@dataclass(frozen=True, eq=False)
class EclipseFit:
    """A fitted eclipse: the best shape, the timing that follows, and whether a flat part is seen."""

    best: ShapeFit
    timing: EclipseTiming
    depths: Floats
    depth_errors: Floats


def fit_eclipse(
    data: ShapeData, *, middle: float, width: float, profile: Profile | None = None, first: int = 0
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
    """
    rough = _trapezoid(data, middle, width)
    data = _thinned(data, float(rough.values[DURATION]))
    if profile is not None:
        tried = [fit_shape(data, profile, with_profile(rough, profile), symmetric=True)]
    else:
        tried = _disc_fits(data, rough)
    best = min(tried, key=lambda fit: fit.chi2)
    flat = _is_flat(data, best)
    scale = max(best.scale, 1.0)
    free = fit_shape(data, best.profile, best.values)
    lopsided = best.chi2 - free.chi2 > _SHAPE_GAIN * scale and free.freedom > 10
    chosen = free if lopsided else best
    timing = _timing(chosen, tried, flat=flat, first=first)
    rows = slice(DEPTH, DEPTH + data.bands)
    errors = np.sqrt(scale * np.diag(chosen.covariance)[rows])
    return EclipseFit(chosen, timing, chosen.depths, errors)


def _thinned(data: ShapeData, duration: float) -> ShapeData:
    return data if data.phase.size <= 2 * CELLS else merged(data, duration / CELLS)


def _trapezoid(data: ShapeData, middle: float, width: float) -> ShapeFit:
    """The best trapezoid from several starts."""
    small = _thinned(data, width)
    fits = []
    for factor, ingress in ((1.0, 0.3), (1.35, 0.7), (1.7, 0.9)):
        start = _start(small, middle, factor * width, ingress)
        fits.append(fit_shape(small, TRAPEZOID, start, symmetric=True))
    return min(fits, key=lambda fit: fit.chi2)


def _start(data: ShapeData, middle: float, duration: float, ingress: float) -> Floats:
    inside = np.abs(data.phase - middle) < duration / 4
    levels, depths = np.ones(data.bands), np.full(data.bands, 0.1)
    for band in range(data.bands):
        rows = data.band == band
        if rows.any():
            levels[band] = np.median(data.flux[rows & ~inside]) if (rows & ~inside).any() else 1.0
        if (rows & inside).any():
            depths[band] = 1 - np.median(data.flux[rows & inside]) / levels[band]
    return np.concatenate([[middle, duration, ingress, ingress], depths, levels, [0.0]])


def _disc_fits(data: ShapeData, rough: ShapeFit) -> list[ShapeFit]:
    """Symmetric fits of discs, finer near the ratio that fits best."""
    start = rough
    values = rough.values.copy()
    values[DURATION] *= _DISC_LONGER
    start = ShapeFit(
        rough.profile, values, rough.covariance, rough.chi2, rough.freedom, rough.centre
    )
    found: dict[int, ShapeFit] = {}

    def fit(index: int) -> None:
        if index in found or not 0 <= index < len(RATIOS):
            return
        near = min(found, key=lambda other: abs(other - index)) if found else None
        begin = start if near is None or abs(near - index) > 2 else found[near]
        profile = discs(RATIOS[index])
        found[index] = fit_shape(data, profile, with_profile(begin, profile), symmetric=True)

    for index in _COARSE:
        fit(index)
    for step in (2, 1):
        best = min(found, key=lambda index: found[index].chi2)
        fit(best - step)
        fit(best + step)
    return list(found.values())


def _is_flat(data: ShapeData, best: ShapeFit) -> bool:
    """Whether no eclipse without inner contacts fits nearly as well."""
    if best.profile.ingress(float(best.values[INGRESS]))[0] >= 1:
        return False
    chi2 = np.inf
    ratios = (0.5, 0.75, 1.0, 4 / 3, 2.0)
    profiles = [TRAPEZOID] if best.profile is TRAPEZOID else [discs(ratio) for ratio in ratios]
    for profile in profiles:
        lower = 1.0 if profile is TRAPEZOID else profile.inner  # type: ignore[union-attr]
        start = with_profile(best, profile)
        fit = fit_shape(data, profile, start, symmetric=True, lower=lower)
        chi2 = min(chi2, fit.chi2)
    return bool(chi2 - best.chi2 > _SHAPE_GAIN * max(best.scale, 1.0))


def _timing(chosen: ShapeFit, tried: list[ShapeFit], *, flat: bool, first: int) -> EclipseTiming:
    values, rows = _contact_values(chosen, flat=flat, first=first)
    covariance = rows @ chosen.covariance @ rows.T * max(chosen.scale, 1.0)
    covariance = covariance + _spread(chosen, tried, flat=flat, first=first)
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


def _spread(chosen: ShapeFit, tried: list[ShapeFit], *, flat: bool, first: int) -> Floats:
    """Covariance (5, 5) between the shapes that fit, weighted by exp(-chi2/2)."""
    best = min(tried, key=lambda fit: fit.chi2)
    scale = max(best.scale, 1.0)
    weight = np.array([np.exp(-(fit.chi2 - best.chi2) / (2 * scale)) for fit in tried])
    centre = _contact_values(best, flat=flat, first=first)[0]
    away = np.array([_contact_values(fit, flat=flat, first=first)[0] for fit in tried]) - centre
    return (away * (weight / weight.sum())[:, None]).T @ away
