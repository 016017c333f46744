"""One band's model at given values, ready for the compiled kernels."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import cos, pi, radians, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import C_KM_S, DAY
from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.light import _band
from shadowscale.light import _grid as _grid_module
from shadowscale.light._kernels import mean_intensity_point
from shadowscale.light._table import fill_table, table_columns, table_rows
from shadowscale.light.laws import LAWS, Law
from shadowscale.orbit._kernels import CONSTANTS_SIZE, orbit_constants
from shadowscale.quantities import key

Floats = NDArray[np.float64]
INCREDIBLE_ECCENTRICITY = 0.95


@dataclass(eq=False)
class Workspace:
    """Arrays of one band that are used again at every evaluation."""

    flux: Floats
    active: NDArray[np.int64]
    rows: Floats
    expected: Floats
    levels: Floats


def possible(values: Mapping[str, float]) -> bool:
    """Whether the values describe an orbit in which the stars do not touch."""
    eccentricity = sqrt(values["ecosw"] ** 2 + values["esinw"] ** 2)
    return (
        eccentricity < INCREDIBLE_ECCENTRICITY
        and values["radius_sum"] < 1.0 - eccentricity
        and values["radius_ratio"] > 0.0
        and values["period"] > 0.0
    )


def constants_of(values: Mapping[str, float]) -> Floats:
    """The orbit's constants for the compiled kernels."""
    out = np.empty(CONSTANTS_SIZE)
    orbit_constants(values["ecosw"], values["esinw"], cos2i_of(values), out)
    return out


def cos2i_of(values: Mapping[str, float]) -> float:
    """cos^2 i."""
    return cos(radians(values["inclination"])) ** 2


def light_time_of(values: Mapping[str, float]) -> float:
    """(a2 - a1)/(c P) [cycles per a]; zero without both velocity amplitudes."""
    if "K1" not in values or "K2" not in values:
        return 0.0
    root = sqrt(max(1e-12, 1.0 - values["ecosw"] ** 2 - values["esinw"] ** 2))
    sine = sqrt(max(1e-12, 1.0 - cos2i_of(values)))
    return root * (values["K2"] - values["K1"]) / (2 * pi * C_KM_S * sine)


@dataclass(frozen=True, eq=False)
class BandModel:
    """One band's model at given values: its loss of light on a grid of phases, and the rest."""

    period: float
    epoch: float
    light_time: float
    ratio: float
    constants: Floats
    brightness: float
    share1: float
    third: float
    half_exposure: float  # [cycles]
    grid: Floats
    means: tuple[Floats, Floats]
    effects_on: bool
    amplitudes: Floats
    sin2i: float
    ecosw: float
    columns: int

    @classmethod
    def at(cls, system: System, values: Mapping[str, float], band: str) -> BandModel:
        """Prepare a band of `system` with `values` in place of its own."""
        law = LAWS[system.law]
        ratio = values["radius_ratio"]
        tables, means = zip(
            *(_limb(law, values, star=star, band=band, size=size)
              for star, size in ((1, ratio), (2, 1.0 / ratio))), strict=True,
        )  # fmt: skip
        brightness = max(values[key("surface_brightness_ratio", band)], 1e-12)
        share1 = 1.0 / (1.0 + brightness * ratio**2 * means[1][0] / means[0][0])
        light_time = light_time_of(values) if system.light_time else 0.0
        constants = constants_of(values)
        half_exposure = system.exposure / DAY / values["period"] / 2
        grid = _grid(
            constants, light_time, values, share1=share1, brightness=brightness, means=means,
            tables=tables, averaged=half_exposure > 0.0,
        )  # fmt: skip
        amplitudes = np.array(
            [values.get(key(f"{effect}{star}", band), 0.0) for effect in EFFECTS for star in (1, 2)]
        )
        effects_on = bool(np.any(amplitudes != 0.0)) or "fitted" in system.effects.values()
        shared = _band.SHARED + 2 * len(law.coefficients)
        return cls(
            values["period"], values["epoch"], light_time, ratio, constants, brightness, share1,
            values[key("third_light", band)], half_exposure, grid, means, effects_on, amplitudes,
            1.0 - cos2i_of(values), values["ecosw"],
            shared + (_band.EFFECTS if effects_on else 0),
        )  # fmt: skip

    def rows(self, time: Floats, work: Workspace) -> int:
        """Light and derivatives at `time` into the workspace; returns how many rows have derivatives."""
        found: int = _band.band_rows(
            time, self.period, self.epoch, self.half_exposure, self.third, self.grid, self.constants,
            self.light_time, self.share1, self.brightness, self.ratio, *self.means, self.effects_on,
            self.amplitudes, self.sin2i, self.ecosw, work.flux, work.active, work.rows,
        )  # fmt: skip
        return found

    def light(self, time: Floats) -> Floats:
        """(n,) light at `time`, one outside eclipse where there are no small effects."""
        flux = np.empty(time.size)
        columns = _grid_columns(self.means)
        _band.band_values(
            np.ascontiguousarray(time, dtype=np.float64), self.period, self.epoch, self.half_exposure,
            self.third, self.grid, columns, self.constants, self.light_time, self.share1,
            self.effects_on, self.amplitudes, self.sin2i, self.ecosw, flux,
        )  # fmt: skip
        return flux


def _limb(
    law: Law, values: Mapping[str, float], *, star: int, band: str, size: float
) -> tuple[Floats, Floats]:
    """Table of the hidden fraction of one star, and its disc mean with gradient."""
    coefficients = np.array(
        [values[key(f"limb_darkening{star}", band, n + 1)] for n in range(len(law.coefficients))],
        dtype=np.float64,
    )
    table = np.empty((table_rows(size), table_columns(coefficients.size)))
    fill_table(size, law.code, coefficients, table)
    mean = np.empty(1 + coefficients.size)
    mean_intensity_point(law.code, coefficients, mean)
    return table, mean


def _grid_columns(means: tuple[Floats, Floats]) -> int:
    return _grid_module.FIXED + 2 * (means[0].size - 1)


def _grid(
    constants: Floats,
    light_time: float,
    values: Mapping[str, float],
    *,
    share1: float,
    brightness: float,
    means: tuple[Floats, Floats],
    tables: tuple[Floats, Floats],
    averaged: bool,
) -> Floats:
    """The loss of light over the phases of both eclipses."""
    total, ratio = values["radius_sum"], values["radius_ratio"]
    header = np.empty((_grid_module.HEADER, 6))
    rows = _grid_module.lay_pieces(
        constants, light_time, total, ratio, values["ecosw"], values["esinw"], header
    )
    grid = np.empty((rows, (3 if averaged else 2) * _grid_columns(means)))
    grid[: header.shape[0], :6] = header
    _grid_module.fill_grid(
        constants, light_time, total, ratio, share1, brightness, *means, *tables, averaged, grid
    )
    return grid
