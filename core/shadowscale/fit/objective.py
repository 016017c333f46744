"""Chi-squared of light, velocities and priors together, with its normal equations."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from math import cos, radians
from typing import Any

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.band_model import BandModel, Workspace, constants_of, light_time_of, possible
from shadowscale.fit.least_squares import Normal
from shadowscale.fit.observed import BandData, StarVelocities
from shadowscale.fit.vector import Vector, band_keys
from shadowscale.light import _band
from shadowscale.orbit._rows import velocity_rows
from shadowscale.quantities import key

Floats = NDArray[np.float64]


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
    _workspaces: dict[str, Workspace] = field(default_factory=dict)

    def __call__(self, x: Floats) -> Normal:
        """Chi-squared and normal equations at x; chi-squared is inf where no orbit exists."""
        size = x.size
        values = self.vector.unpack(x)
        matrix, downhill = np.zeros((size, size)), np.zeros(size)
        if not possible(values):
            return Normal(np.inf, downhill, matrix)
        chi2 = 0.0
        for data in self.bands:
            light = self._light(values, x, data)
            scale = self.light_scale.get(data.band, 1.0) ** -2
            chi2 += scale * light.chi2
            matrix += scale * light.matrix
            downhill += scale * light.downhill
        for part in [*(self._star(values, data) for data in self.stars), self._priors(values, x)]:
            chi2 += part.chi2
            matrix += part.matrix
            downhill += part.downhill
        return Normal(chi2 if np.isfinite(chi2) else np.inf, downhill, matrix)

    def light_parts(self, x: Floats) -> dict[str, tuple[float, Floats, Floats]]:
        """Per band: unscaled chi-squared, levels (s, 2), and the expected flux (n,) with levels."""
        values = self.vector.unpack(x)
        parts = {}
        for data in self.bands:
            chi2 = self._light(values, x, data).chi2
            work = self._workspaces[data.band]
            parts[data.band] = (chi2, work.levels.copy(), work.expected.copy())
        return parts

    def velocity_residuals(self, x: Floats, data: StarVelocities) -> Floats:
        """(n,) observed less model [km/s]."""
        return self._star_model(self.vector.unpack(x), data)[0]

    def velocity_errors(self, data: StarVelocities) -> Floats:
        """(n,) errors with jitter added in quadrature [km/s]."""
        extra = np.array([self.jitter.get((data.star, int(s)), 0.0) for s in data.source])
        errors: Floats = np.sqrt(data.error**2 + extra**2)
        return errors

    def _light(self, values: Mapping[str, float], x: Floats, data: BandData) -> Normal:
        """One band, with errors as given."""
        system = self.vector.system
        model = BandModel.at(system, values, data.band)
        work = self._workspace(data, model.columns)
        found = model.rows(data.time, work)
        local = np.zeros((model.columns, model.columns))
        gradient = np.zeros(model.columns)
        chi2 = _band.normal_equations(
            work.flux, data.flux, data.weight, data.starts, data.trend, system.levels == "trend",
            work.active, found, work.rows, model.columns, local, gradient, work.levels,
            work.expected,
        )  # fmt: skip
        to_x = self.vector.local(band_keys(system, data.band)[: model.columns], x)
        self._light_time_rows(values, to_x)
        return Normal(chi2, to_x.T @ gradient, to_x.T @ local @ to_x)

    def _light_time_rows(self, values: Mapping[str, float], to_x: Floats) -> None:
        """Light time follows the velocity amplitudes."""
        if not self.vector.system.light_time:
            return
        rate = light_time_of({**values, "K1": 0.0, "K2": 1.0})
        for name, sign in (("K1", -1.0), ("K2", 1.0)):
            if name in self.vector.index:
                to_x[7, self.vector.index[name]] = sign * rate

    def _workspace(self, data: BandData, columns: int) -> Workspace:
        work = self._workspaces.get(data.band)
        if work is None:
            size = data.time.size
            work = Workspace(
                np.empty(size), np.empty(size, dtype=np.int64), np.empty((size, columns)),
                np.empty(size), np.empty((data.segments, 2)),
            )  # fmt: skip
            self._workspaces[data.band] = work
        return work

    def _star_model(
        self, values: Mapping[str, float], data: StarVelocities
    ) -> tuple[Floats, Floats, Floats]:
        """Residuals (n,), w and its derivatives (n, 5), and the sign times K."""
        rows = np.empty((data.time.size, 5))
        constants = constants_of(values)
        velocity_rows(data.time, values["period"], values["epoch"], constants, rows)
        star = data.star
        amplitude = values[f"K{star}"] * (1.0 if star == 1 else -1.0)
        sources = self.vector.system.sources
        offsets = np.array([values.get(key(f"offset{star}", name), 0.0) for name in sources])
        model = values[f"gamma{star}"] + offsets[data.source] + amplitude * rows[:, 0]
        return data.velocity - model, rows, np.array(amplitude)

    def _star(self, values: Mapping[str, float], data: StarVelocities) -> Normal:
        """One star's velocities."""
        residual, rows, amplitude = self._star_model(values, data)
        jacobian = np.zeros((residual.size, len(self.vector.names)))
        index, star = self.vector.index, data.star
        columns = {
            "period": amplitude * rows[:, 1],
            "epoch": amplitude * rows[:, 2],
            "ecosw": amplitude * rows[:, 3],
            "esinw": amplitude * rows[:, 4],
            f"K{star}": rows[:, 0] * (1.0 if star == 1 else -1.0),
            f"gamma{star}": np.ones(residual.size),
        }
        for number, name in enumerate(self.vector.system.sources):
            columns[key(f"offset{star}", name)] = (data.source == number).astype(np.float64)
        for name, column in columns.items():
            if name in index:
                jacobian[:, index[name]] = column
        return _normal(residual, jacobian, self.velocity_errors(data))

    def _priors(self, values: Mapping[str, float], x: Floats) -> Normal:
        """All Gaussian priors."""
        residual = np.zeros(len(self.constraints))
        jacobian = np.zeros((residual.size, x.size))
        limb = self.vector.limb_jacobian(x)
        for row, rule in enumerate(self.constraints):
            at = self.vector.index.get(rule.name)
            if rule.function is not None:
                residual[row] = rule.value - rule.function(values)
                jacobian[row] = self._slope(rule.function, x)
            elif at is not None and rule.coordinate:
                residual[row], jacobian[row, at] = rule.value - x[at], 1.0
            elif at is not None:
                residual[row], jacobian[row] = rule.value - values[rule.name], limb[at]
                if rule.name == "inclination":
                    jacobian[row, at] = inclination_slope(values[rule.name], rule.sigma)
            else:
                residual[row] = rule.value - values[rule.name]
        scaled, weighted = self._whitener @ residual, self._whitener @ jacobian
        return Normal(float(scaled @ scaled), weighted.T @ scaled, weighted.T @ weighted)

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


def _normal(residual: Floats, jacobian: Floats, error: Floats) -> Normal:
    """Normal equations of explicit residuals."""
    scaled, weighted = residual / error, jacobian / error[:, None]
    return Normal(float(scaled @ scaled), weighted.T @ scaled, weighted.T @ weighted)
