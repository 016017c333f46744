"""Chi-squared of light, velocities and priors together, with its normal equations."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from math import cos, radians
from typing import Any

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.band_model import BandModel, constants_of, light_time_of, possible
from shadowscale.fit.least_squares import Normal
from shadowscale.fit.observed import BandData, StarVelocities
from shadowscale.fit.vector import LocalMap, Vector, band_keys
from shadowscale.light import _band
from shadowscale.orbit._rows import velocity_rows
from shadowscale.quantities import key

Floats = NDArray[np.float64]

LIGHT_TIME = 7  # its number among a band's local quantities
NOTHING = np.empty(0, dtype=np.int64)


@dataclass(frozen=True)
class Constraint:
    """A Gaussian prior.

    name : the key it stands on, or a derived quantity's name
    coordinate : True if it stands on the solver's coordinate of that key (limb darkening's
        sampling pair) and not on the key's value
    function : for derived quantities, of all basic values
    common, common_sigma : an error shared with all priors of the same `common` name, beside `sigma`
    """

    name: str
    value: float
    sigma: float
    coordinate: bool = False
    function: Callable[[Mapping[str, float]], float] | None = None
    common: str = ""
    common_sigma: float = 0.0


@dataclass(frozen=True, eq=False)
class _Band:
    """What stays the same for one band: its data, how x moves it, and scratch arrays."""

    data: BandData
    local: LocalMap
    light_time: Floats | None  # (m,) zeros with -1 and 1 where K1 and K2 stand
    active: NDArray[np.int64]
    scratch: Floats
    places: Floats
    levels: Floats

    @classmethod
    def of(cls, data: BandData, vector: Vector) -> _Band:
        local = vector.local(band_keys(vector.system, data.band))
        size = int(np.diff(data.starts).max(initial=0))
        light_time = None
        if vector.system.light_time and {"K1", "K2"} & set(vector.names):
            # Light time follows the velocity amplitudes.
            light_time = np.zeros(len(vector.names))
            for name, sign in (("K1", -1.0), ("K2", 1.0)):
                if name in vector.columns:
                    light_time[vector.columns[name]] += sign
            local = replace(
                local, wanted=np.append(local.wanted, LIGHT_TIME),
                fixed=np.vstack([local.fixed, np.zeros_like(light_time)]),
            )  # fmt: skip
        return cls(
            data, local, light_time, np.empty(size, dtype=np.int64), np.empty((3, size)),
            np.empty((_band.PLACES, size)), np.empty((data.segments, 2)),
        )  # fmt: skip

    def evaluate(self, model: BandModel, wanted: NDArray[np.int64], slopes: bool) -> Normal:
        """Chi-squared of light with errors as given, and normal equations of the wanted quantities."""
        data = self.data
        matrix, gradient = np.empty((wanted.size, wanted.size)), np.empty(wanted.size)
        chi2 = _band.band_chi2(
            data.time, data.flux, data.weight, data.starts, data.trend, slopes, data.reference,
            data.blocks, model.curve, model.pieces, model.cells, model.effects, wanted, self.active,
            self.scratch, self.places, matrix, gradient, self.levels,
        )  # fmt: skip
        return Normal(chi2, gradient, matrix)


@dataclass(eq=False)
class Objective:
    """What is minimised: a callable from the vector x to `Normal`.

    light_scale maps a band to the factor on its errors; jitter maps (star, source) to km/s.
    """

    vector: Vector
    bands: Sequence[BandData]
    stars: Sequence[StarVelocities] = ()
    constraints: Sequence[Constraint] = ()
    light_scale: Mapping[str, float] = field(default_factory=dict)
    jitter: Mapping[tuple[int, int], float] = field(default_factory=dict)
    _weights: dict[int, Floats] = field(default_factory=dict)

    def __call__(self, x: Floats) -> Normal:
        """Chi-squared and normal equations at x; chi-squared is inf where no orbit exists."""
        size = x.size
        values = self.vector.unpack(x)
        matrix, downhill = np.zeros((size, size)), np.zeros(size)
        if not possible(values):
            return Normal(np.inf, downhill, matrix)
        chi2 = 0.0
        for band in self._bands:
            light = self._light(values, x, band)
            scale = self.light_scale.get(band.data.band, 1.0) ** -2
            chi2 += scale * light.chi2
            matrix += scale * light.matrix
            downhill += scale * light.downhill
        parts = [self._star(values, data) for data in self.stars]
        if self.constraints:
            parts.append(self._priors(values, x))
        for part in parts:
            chi2 += part.chi2
            matrix += part.matrix
            downhill += part.downhill
        return Normal(chi2 if np.isfinite(chi2) else np.inf, downhill, matrix)

    def chi2(self, x: Floats) -> float:
        """Chi-squared alone, for whoever needs no derivatives; inf where no orbit exists."""
        values = self.vector.unpack(x)
        if not possible(values):
            return np.inf
        chi2 = 0.0
        for band in self._bands:
            scale = self.light_scale.get(band.data.band, 1.0) ** -2
            chi2 += scale * self._light_chi2(values, band)
        for data in self.stars:
            residual = self._star_residuals(values, data)
            chi2 += float(residual @ (residual * self._velocity_weights(data)))
        if self.constraints:
            chi2 += float(np.sum(self._prior_residuals(values, x) ** 2))
        return chi2 if np.isfinite(chi2) else np.inf

    def light_parts(self, x: Floats) -> dict[str, tuple[float, Floats, Floats]]:
        """Per band: unscaled chi-squared, levels (s, 2), and the expected flux (n,) with levels."""
        values = self.vector.unpack(x)
        parts = {}
        for band in self._bands:
            data = band.data
            chi2 = self._light_chi2(values, band)
            levels = band.levels.copy()
            rows = np.repeat(levels, np.diff(data.starts), axis=0)
            model = BandModel.at(self.vector.system, values, data.band)
            expected = (rows[:, 0] + rows[:, 1] * data.trend) * model.light(data.time)
            parts[data.band] = (chi2, levels, expected)
        return parts

    def velocity_residuals(self, x: Floats, data: StarVelocities) -> Floats:
        """(n,) observed less model [km/s]."""
        return self._star_residuals(self.vector.unpack(x), data)

    def velocity_errors(self, data: StarVelocities) -> Floats:
        """(n,) errors with jitter added in quadrature [km/s]."""
        extra = np.array([self.jitter.get((data.star, int(s)), 0.0) for s in data.source])
        errors: Floats = np.sqrt(data.error**2 + extra**2)
        return errors

    @cached_property
    def _bands(self) -> tuple[_Band, ...]:
        return tuple(_Band.of(data, self.vector) for data in self.bands)

    @property
    def _slopes(self) -> bool:
        return self.vector.system.levels == "trend"

    def _light(self, values: Mapping[str, float], x: Floats, band: _Band) -> Normal:
        """One band, with errors as given."""
        model = BandModel.at(self.vector.system, values, band.data.band, derivatives=True)
        light = band.evaluate(model, band.local.wanted, self._slopes)
        to_x = band.local.jacobian(x)
        if band.light_time is not None:
            to_x[-1] = band.light_time * light_time_of({**values, "K1": 0.0, "K2": 1.0})
        return Normal(light.chi2, to_x.T @ light.downhill, to_x.T @ light.matrix @ to_x)

    def _light_chi2(self, values: Mapping[str, float], band: _Band) -> float:
        model = BandModel.at(self.vector.system, values, band.data.band)
        return band.evaluate(model, NOTHING, self._slopes).chi2

    def _velocity_weights(self, data: StarVelocities) -> Floats:
        """(n,) weights with jitter, computed once."""
        found = self._weights.get(id(data))
        if found is None:
            found = self._weights[id(data)] = self.velocity_errors(data) ** -2
        return found

    def _star_residuals(
        self, values: Mapping[str, float], data: StarVelocities, rows: Floats | None = None
    ) -> Floats:
        """(n,) observed less model; `rows` (n, 5) receives w and its derivatives."""
        rows = np.empty((data.time.size, 5)) if rows is None else rows
        velocity_rows(data.time, values["period"], values["epoch"], constants_of(values), rows)
        star = data.star
        amplitude = values[f"K{star}"] if star == 1 else -values[f"K{star}"]
        model = amplitude * rows[:, 0] + values[f"gamma{star}"]
        offsets = [values.get(name, 0.0) for name in self._offset_keys(star)]
        if any(offsets):
            model += np.array(offsets)[data.source]
        residual: Floats = data.velocity - model
        return residual

    def _offset_keys(self, star: int) -> tuple[str, ...]:
        return tuple(key(f"offset{star}", name) for name in self.vector.system.sources)

    def _star(self, values: Mapping[str, float], data: StarVelocities) -> Normal:
        """One star's velocities."""
        rows = np.empty((data.time.size, 5))
        residual = self._star_residuals(values, data, rows)
        index, star = self.vector.columns, data.star
        sign = 1.0 if star == 1 else -1.0
        jacobian = np.zeros((len(self.vector.names), residual.size))
        for number, name in enumerate(("period", "epoch", "ecosw", "esinw"), start=1):
            if name in index:
                np.multiply(rows[:, number], sign * values[f"K{star}"], out=jacobian[index[name]])
        if f"K{star}" in index:
            np.multiply(rows[:, 0], sign, out=jacobian[index[f"K{star}"]])
        if f"gamma{star}" in index:
            jacobian[index[f"gamma{star}"]] = 1.0
        for number, name in enumerate(self._offset_keys(star)):
            if name in index:
                jacobian[index[name]] += data.source == number
        weighted = jacobian * self._velocity_weights(data)
        chi2 = float(residual @ (residual * self._velocity_weights(data)))
        return Normal(chi2, weighted @ residual, weighted @ jacobian.T)

    def _priors(self, values: Mapping[str, float], x: Floats) -> Normal:
        """All Gaussian priors."""
        jacobian = np.zeros((len(self.constraints), x.size))
        limb = self.vector.limb_jacobian(x)
        for row, rule in enumerate(self.constraints):
            at = self.vector.index.get(rule.name)
            if rule.function is not None:
                jacobian[row] = self._slope(rule.function, x)
            elif at is not None and rule.coordinate:
                jacobian[row, at] = 1.0
            elif at is not None and rule.name == "inclination":
                jacobian[row, at] = inclination_slope(values[rule.name], rule.sigma)
            elif at is not None:
                jacobian[row] = limb[at]
        scaled = self._prior_residuals(values, x)
        weighted = self._whitener @ jacobian
        return Normal(float(scaled @ scaled), weighted.T @ scaled, weighted.T @ weighted)

    def _prior_residuals(self, values: Mapping[str, float], x: Floats) -> Floats:
        """(n,) what the priors want less what there is, in independent units of one sigma."""
        residual = [self._prior_residual(rule, values, x) for rule in self.constraints]
        whitened: Floats = self._whitener @ np.array(residual)
        return whitened

    def _prior_residual(self, rule: Constraint, values: Mapping[str, float], x: Floats) -> float:
        if rule.function is not None:
            return rule.value - rule.function(values)
        if rule.coordinate and rule.name in self.vector.index:
            return float(rule.value - x[self.vector.index[rule.name]])
        return rule.value - values[rule.name]

    @cached_property
    def _whitener(self) -> Floats:
        """(n, n) matrix that makes the priors' errors independent and of unit size."""
        rules = self.constraints
        covariance = np.diag([rule.sigma**2 for rule in rules])
        for row, one in enumerate(rules):
            for column, two in enumerate(rules):
                if one.common and one.common == two.common:
                    covariance[row, column] += one.common_sigma * two.common_sigma
        whitener: NDArray[Any] = np.zeros((0, 0))
        if rules:
            whitener = np.linalg.inv(np.linalg.cholesky(covariance))
        return whitener

    def _slope(self, function: Callable[[Mapping[str, float]], float], x: Floats) -> Floats:
        """(m,) gradient of a function of the values, by central differences (it costs no data)."""
        slope = np.zeros(x.size)
        for column in range(x.size):
            step = 1e-6 * max(abs(x[column]), 1e-3)
            up, down = x.copy(), x.copy()
            up[column] += step
            down[column] -= step
            above, below = function(self.vector.unpack(up)), function(self.vector.unpack(down))
            slope[column] = (above - below) / (2 * step)
        return slope


def inclination_slope(inclination: float, sigma: float) -> float:
    """Mean slope of the inclination [deg] to cos^2 i over one `sigma` [deg] of a prior.

    The slope at a point grows without bound towards 90 degrees, where the prior would then seem
    infinitely sharp.
    """
    lower = max(inclination - sigma, 0.0)
    upper = min(inclination + sigma, 90.0)
    return (upper - lower) / (cos(radians(upper)) ** 2 - cos(radians(lower)) ** 2)
