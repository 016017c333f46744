"""The measurements that take part in a fit, as contiguous arrays."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.light import _band


@dataclass(frozen=True, eq=False)
class BandData:
    """One band's used rows, in order of segment and time.

    starts : (s+1,) first row of each segment, whose level (and slope) is solved on its own
    trend : (n,) time within the segment, -1...1
    rows : (n,) places in the table
    """

    band: str
    time: Floats
    flux: Floats
    weight: Floats
    starts: Ints
    trend: Floats
    rows: Ints

    @property
    def segments(self) -> int:
        """How many levels are solved."""
        return self.starts.size - 1

    @cached_property
    def reference(self) -> Floats:
        """(s,) a flux near the level of each segment: its median."""
        return np.array(
            [
                np.median(self.flux[low:high]) if high > low else 1.0
                for low, high in pairwise(self.starts)
            ]
        )

    @cached_property
    def blocks(self) -> Floats:
        """Sums over blocks of rows, for chi-squared of what lies outside eclipse."""
        blocks = np.empty((_band.SUMS, self.time.size // _band.BLOCK))
        _band.block_sums(self.flux, self.weight, self.starts, self.trend, self.reference, blocks)
        return blocks


@dataclass(frozen=True, eq=False)
class StarVelocities:
    """One star's used velocities."""

    star: int
    time: Floats
    velocity: Floats
    error: Floats
    source: Ints
    rows: Ints


def band_data(photometry: Photometry, band: int, *, levels: str, why: Ints) -> BandData:
    """Used rows (`why` zero) of one band; one segment, or a segment a night."""
    rows = np.flatnonzero((photometry.band == band) & (why == 0))
    night = photometry.night[rows]
    if levels == "one":
        night = np.zeros_like(night)
    order = np.lexsort((photometry.time[rows], night))
    rows, night = rows[order], night[order]
    starts = np.concatenate([[0], np.flatnonzero(np.diff(night)) + 1, [rows.size]]).astype(np.int64)
    time = np.ascontiguousarray(photometry.time[rows])
    return BandData(
        band=photometry.bands[band],
        time=time,
        flux=np.ascontiguousarray(photometry.flux[rows]),
        weight=1.0 / photometry.flux_error[rows] ** 2,
        starts=starts,
        trend=_trend(time, starts),
        rows=rows,
    )


def _trend(time: Floats, starts: Ints) -> Floats:
    """Time within each segment, -1...1 from its first to its last row."""
    trend = np.zeros_like(time)
    for low, high in pairwise(starts):
        if high > low:
            first, last = time[low], time[high - 1]
            half = max((last - first) / 2, 1e-9)
            trend[low:high] = (time[low:high] - (first + last) / 2) / half
    return trend


def star_velocities(velocities: Velocities, star: int, why: Ints) -> StarVelocities:
    """Used velocities (`why` zero) of one star."""
    rows: NDArray[np.int64] = np.flatnonzero(why == 0)
    value = velocities.rv1 if star == 1 else velocities.rv2
    error = velocities.rv1_error if star == 1 else velocities.rv2_error
    return StarVelocities(
        star, velocities.time[rows], value[rows], error[rows], velocities.source[rows], rows
    )
