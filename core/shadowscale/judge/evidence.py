"""What the checks look at: the solution and its tables, with what several checks need made once."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import hypot, isfinite, nan, radians, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import ASSUMED, FIXED, Solution
from shadowscale.judge.windows import EclipseWindow, eclipse_windows
from shadowscale.quantities import key

Bools = NDArray[np.bool_]

TINY, HUGE = 1e-30, 1e30  # beyond them a number is no measurement, and its powers overflow


def _sane(number: float) -> float:
    """NaN for numbers too large to mean anything, 0 for those too small."""
    if not abs(number) < HUGE:
        return nan
    return number if abs(number) > TINY else 0.0


@dataclass(frozen=True, eq=False)
class LightRows:
    """The photometry that the fit used, ordered by band, night and time.

    residual : (n,) observed less model over level, fraction of the light outside eclipse;
    error : (n,) of the same, as scaled by the fit; model : (n,) light without level;
    block : (n,) number of the band and night; starts : first row of each block.
    """

    row: Ints
    time: Floats
    phase: Floats
    band: Ints
    block: Ints
    starts: Ints
    model: Floats
    residual: Floats
    error: Floats

    @property
    def pull(self) -> Floats:
        """(n,) residuals in units of their errors."""
        return self.residual / self.error

    @property
    def size(self) -> int:
        """Number of rows."""
        return int(self.time.size)


@dataclass(frozen=True, eq=False)
class Evidence:
    """A solution with its tables; everything derived is computed once and kept."""

    solution: Solution
    photometry: Photometry
    velocities: Velocities | None

    def value(self, name: str, label: str | None = None) -> float:
        """Value of a quantity, basic or derived; NaN where the solution has none."""
        text = key(name, label)
        estimate = self.solution.estimates.get(text)
        if estimate is not None:
            return _sane(float(estimate.value))
        return _sane(float(self.solution.system.values.get(text, nan)))

    def sigma(self, name: str, label: str | None = None) -> float:
        """Standard error of a quantity, mean of its two sides; NaN where it has none."""
        return self.sigma_of(key(name, label))

    def sigma_of(self, text: str) -> float:
        """Standard error by key."""
        estimate = self.solution.estimates.get(text)
        if estimate is not None and estimate.minus is not None and estimate.plus is not None:
            return _sane((float(estimate.minus) + float(estimate.plus)) / 2)
        variance = self.covariance_of(text, text)
        return _sane(sqrt(variance)) if variance > 0 and isfinite(variance) else nan

    def is_free(self, name: str, label: str | None = None) -> bool:
        """Whether the fit could move that quantity."""
        return key(name, label) in self.place

    @cached_property
    def place(self) -> dict[str, int]:
        """Row of each free key in the covariance."""
        count = self.covariance.shape[0]
        return {name: row for row, name in enumerate(self.solution.system.free) if row < count}

    @cached_property
    def covariance(self) -> Floats:
        """(m, m) covariance of the free keys; empty where it has no sensible shape."""
        found = np.asarray(self.solution.covariance, dtype=float)
        square = found.ndim == 2 and found.shape[0] == found.shape[1]
        return found if square else np.empty((0, 0))

    def covariance_of(self, first: str, second: str) -> float:
        """Covariance of two free keys; NaN where one is not free."""
        if first not in self.place or second not in self.place:
            return nan
        return float(self.covariance[self.place[first], self.place[second]])

    def correlation(self, first: str, second: str) -> float:
        """Correlation of two keys, NaN where the solution does not give it."""
        names = self.solution.correlation_names
        if first in names and second in names:
            return float(self.solution.correlations[names.index(first), names.index(second)])
        product = self.covariance_of(first, first) * self.covariance_of(second, second)
        if not (isfinite(product) and product > 0):
            return nan
        return self.covariance_of(first, second) / sqrt(product)

    @cached_property
    def radii(self) -> tuple[float, float]:
        """Fractional radii of the two stars."""
        total, ratio = self.value("radius_sum"), self.value("radius_ratio")
        if not (ratio > -1 and isfinite(ratio)):
            return nan, nan
        return total / (1 + ratio), total * ratio / (1 + ratio)

    @cached_property
    def eccentricity(self) -> float:
        """Eccentricity from its two components, 0 where they are missing."""
        found = hypot(self.value("ecosw"), self.value("esinw"))
        return found if isfinite(found) else 0.0

    @cached_property
    def windows(self) -> tuple[EclipseWindow, EclipseWindow]:
        """Where in phase the two eclipses lie."""
        return eclipse_windows(
            self.radii,
            radians(self.value("inclination")),
            ecosw=self.value("ecosw"),
            esinw=self.value("esinw"),
        )

    @cached_property
    def mass_ratio(self) -> tuple[float, str]:
        """M2/M1 and how it was had: `measured`, `assumed` or `unknown` (then 1)."""
        estimate = self.solution.estimates.get("mass_ratio")
        if estimate is not None and self.value("mass_ratio") > 0:
            stated = estimate.how in (FIXED, ASSUMED)
            return self.value("mass_ratio"), "assumed" if stated else "measured"
        first, second = self.value("K1"), self.value("K2")
        if self.velocities is not None and first > 0 and second > 0:
            return first / second, "measured"
        return 1.0, "unknown"

    @property
    def bands(self) -> tuple[str, ...]:
        """Names of the bands."""
        return self.photometry.bands

    @cached_property
    def light(self) -> LightRows:
        """The rows that took part in the fit and make sense."""
        return self._rows(self.solution.light.why == 0)

    @cached_property
    def offered(self) -> LightRows:
        """The rows that were offered to the fit, its outliers among them."""
        return self._rows(self.photometry.used)

    def _rows(self, chosen: Bools) -> LightRows:
        table, result = self.photometry, self.solution.light
        scales = [self.solution.fit.error_scale.get(band, 1.0) for band in table.bands] or [1.0]
        with np.errstate(all="ignore"):
            model = result.model / result.level
            residual = (table.flux - result.model) / result.level
            error = np.abs(table.flux_error / result.level) * np.take(scales, table.band)
            good = np.isfinite(model + residual + error + table.time + result.phase)
        good &= (error > TINY) & (error < HUGE) & (np.abs(residual) + np.abs(model) < HUGE)
        rows = np.flatnonzero(good & chosen)
        rows = rows[np.lexsort((table.time[rows], table.night[rows], table.band[rows]))]
        band, night = table.band[rows], table.night[rows]
        new = np.ones(rows.size, dtype=bool)
        new[1:] = (np.diff(band) != 0) | (np.diff(night) != 0)
        return LightRows(
            row=rows,
            time=table.time[rows],
            phase=result.phase[rows],
            band=band,
            block=np.cumsum(new) - 1,
            starts=np.flatnonzero(new),
            model=model[rows],
            residual=residual[rows],
            error=error[rows],
        )

    def inside(self, window: EclipseWindow) -> tuple[Floats, Bools]:
        """Phase from an eclipse's middle for every used row, and which rows lie in the eclipse."""
        offset = window.offset(self.light.phase)
        return offset, np.abs(offset) < window.outer

    @cached_property
    def outside(self) -> Bools:
        """Which used rows lie outside both eclipses."""
        first, second = (self.inside(window)[1] for window in self.windows)
        return ~(first | second)

    @cached_property
    def light_share(self) -> dict[str, tuple[float, float]]:
        """Share of each star in the light of a band, third light counted; NaN where unknown."""
        shares = {}
        for band in self.bands:
            ratio, third = self.value("light_ratio", band), self.value("third_light", band)
            if not isfinite(ratio):
                ratio = self.value("surface_brightness_ratio", band)
                ratio *= self.value("radius_ratio") ** 2
            stars = 1 - (third if isfinite(third) else 0.0)
            first = stars / (1 + ratio) if ratio >= 0 else nan
            shares[band] = (first, first * ratio)
        return shares
