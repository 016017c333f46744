"""The photometry as the timing part uses it: usable rows, each with an error that the scatter supports."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.errors import NoSolutionError

FEWEST_POINTS = 20
ENOUGH = 100_000  # values whose median is as good as that of all
MAD_TO_SIGMA = 1.4826  # median absolute deviation to standard deviation of a normal distribution
ISOLATED_GAP = 0.03  # [d] no eclipse comes and goes between neighbours nearer than this
ALONE = 0.2  # spread of the neighbours over the drop of a lone point
WILD = 6.0  # [sigma]
NEIGHBOUR_GAP = 0.1  # [d] points nearer than this are neighbours


@dataclass(frozen=True, eq=False)
class LightPoints:
    """Usable points in time order; `sigma` is the given error scaled to the point-to-point scatter.

    time [d], flux, sigma : (n,) float64;  band, night : (n,) int64
    bands : names;  noise : (number of bands,) point-to-point scatter
    """

    time: Floats
    flux: Floats
    sigma: Floats
    band: Ints
    night: Ints
    bands: tuple[str, ...]
    noise: Floats

    @property
    def span(self) -> float:
        """Time from the first to the last point [d]."""
        return float(self.time[-1] - self.time[0])

    def at(self, rows: NDArray[np.bool_] | NDArray[np.int64]) -> LightPoints:
        """Some of the points."""
        return replace(
            self,
            time=self.time[rows],
            flux=self.flux[rows],
            sigma=self.sigma[rows],
            band=self.band[rows],
            night=self.night[rows],
        )


def light_points(photometry: Photometry) -> LightPoints:
    """The usable points of a table.

    Raises
    ------
    NoSolutionError
        If fewer than 20 are left.
    """
    good = photometry.used & np.isfinite(photometry.time) & np.isfinite(photometry.flux)
    if (count := int(good.sum())) < FEWEST_POINTS:
        raise NoSolutionError(
            "too few usable points to look for eclipses",
            {"points": count, "fewest": FEWEST_POINTS},
        )
    error = np.where(photometry.flux_error > 0, photometry.flux_error, np.nan)
    points = LightPoints(
        time=np.asarray(photometry.time[good], float),
        flux=np.asarray(photometry.flux[good], float),
        sigma=error[good],
        band=photometry.band[good],
        night=photometry.night[good],
        bands=photometry.bands,
        noise=np.zeros(len(photometry.bands)),
    )
    if np.any(np.diff(points.time) < 0):
        points = points.at(np.argsort(points.time, kind="stable"))
    return _with_noise(points)


def averaged(points: LightPoints, width: float) -> LightPoints:
    """Means of each band in cells of time [d]."""
    cell = np.floor((points.time - points.time[0]) / width).astype(np.int64)
    _, first, number = np.unique(
        cell * len(points.bands) + points.band, return_index=True, return_inverse=True
    )
    weight = points.sigma**-2.0
    mass: Floats = np.bincount(number, weight).astype(float)
    time = points.time[0] + np.bincount(number, weight * (points.time - points.time[0])) / mass
    flux = np.bincount(number, weight * points.flux) / mass
    kept = replace(points.at(first), time=time, flux=flux, sigma=1 / np.sqrt(mass))
    return kept.at(np.argsort(time, kind="stable"))


def thinned(values: Floats) -> Floats:
    """Some of very many values, evenly taken, for a median that needs no more."""
    return values[:: values.size // ENOUGH + 1]


def robust_scatter(values: Floats) -> float:
    """Standard deviation from the median absolute deviation."""
    if values.size == 0:
        return 0.0
    values = thinned(values)
    return float(MAD_TO_SIGMA * np.median(np.abs(values - np.median(values))))


def neighbour_scatter(time: Floats, flux: Floats) -> float | None:
    """Noise from points against the line through their neighbours; None where too few have near ones.

    Differences of two neighbours would take the branches of eclipses for noise.
    """
    if time.size < 3:
        return None
    span = time[2:] - time[:-2]
    near = (span < 2 * NEIGHBOUR_GAP) & (span > 0)
    if near.sum() < max(20, 0.2 * time.size):
        return None
    part = (time[1:-1] - time[:-2])[near] / span[near]
    line = flux[:-2][near] * (1 - part) + flux[2:][near] * part
    away = (flux[1:-1][near] - line) / np.sqrt(1 + part**2 + (1 - part) ** 2)
    return robust_scatter(away)


def isolated(time: Floats, value: Floats, sigma: Floats) -> NDArray[np.bool_]:
    """(n,) True for single points far from both neighbours, which agree with each other and with theirs.

    In an eclipse the neighbours of a low point are low as well, or lie on its branches.
    """
    rows = np.zeros(time.size, bool)
    if time.size < 5:
        return rows
    middle, sides = value[2:-2], (value[:-4], value[1:-3], value[3:-1], value[4:])
    level = np.mean(sides, axis=0)
    spread = np.ptp(sides, axis=0)
    drop = np.abs(middle - level)
    near = time[4:] - time[:-4] < 4 * ISOLATED_GAP
    calm = spread < np.maximum(ALONE * drop, 4 * sigma[2:-2])
    rows[2:-2] = near & (drop > WILD * sigma[2:-2]) & calm
    return rows


def _with_noise(points: LightPoints) -> LightPoints:
    sigma, noise = points.sigma.copy(), np.ones(len(points.bands))
    for number in range(len(points.bands)):
        rows = np.flatnonzero(points.band == number)
        if rows.size:
            sigma[rows], noise[number] = _band_noise(points.at(rows))
    return replace(points, sigma=sigma, noise=noise)


def _band_noise(points: LightPoints) -> tuple[Floats, float]:
    """Errors of one band: as given relative to each other, on the scale of the neighbours' scatter."""
    given = points.sigma
    typical = float(np.nanmedian(thinned(given))) if np.isfinite(given).any() else 0.0
    noise = neighbour_scatter(points.time, points.flux)
    if not noise:
        noise = typical or robust_scatter(points.flux) or 1e-6
    if typical == 0:
        return np.full(given.size, noise), noise
    filled = np.where(np.isfinite(given), given, typical)
    # An error far below the others would let one point outweigh the eclipse.
    return np.clip(filled, 0.3 * typical, None) * (noise / typical), noise
