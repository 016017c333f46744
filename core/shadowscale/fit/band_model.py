"""One band's model at given values, ready for the compiled kernels."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from math import pi, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import C_KM_S, DAY
from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.light import _band, _grid, _smooth
from shadowscale.light._kernels import mean_intensity_point
from shadowscale.light.laws import LAWS
from shadowscale.orbit._kernels import CONSTANTS_SIZE, orbit_constants
from shadowscale.orbit.elements import cos_squared
from shadowscale.quantities import Key, key

Floats = NDArray[np.float64]
INCREDIBLE_ECCENTRICITY = 0.95
LEAST_BRIGHTNESS = 1e-12
INSTANT = 1e-4  # exposures shorter than this part of an ingress change the light by less than 1e-7


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
    return cos_squared(values["inclination"])


def light_time_of(values: Mapping[str, float]) -> float:
    """(a2 - a1)/(c P) [cycles per a]; zero without both velocity amplitudes."""
    if "K1" not in values or "K2" not in values:
        return 0.0
    root = sqrt(max(1e-12, 1.0 - values["ecosw"] ** 2 - values["esinw"] ** 2))
    sine = sqrt(max(1e-12, 1.0 - cos2i_of(values)))
    return root * (values["K2"] - values["K1"]) / (2 * pi * C_KM_S * sine)


@dataclass(frozen=True)
class BandKeys:
    """Keys of what one band has of its own."""

    brightness: str
    third: str
    limb1: tuple[str, ...]
    limb2: tuple[str, ...]
    effects: tuple[str, ...]


@cache
def keys_of(band: str, coefficients: int) -> BandKeys:
    """The keys of a band whose law has so many coefficients."""
    limb1, limb2 = (
        tuple(str(Key(f"limb_darkening{star}", band, n + 1)) for n in range(coefficients))
        for star in (1, 2)
    )
    return BandKeys(
        key("surface_brightness_ratio", band), key("third_light", band), limb1, limb2,
        tuple(key(f"{effect}{star}", band) for effect in EFFECTS for star in (1, 2)),
    )  # fmt: skip


@dataclass(frozen=True, eq=False)
class BandModel:
    """One band's model at given values: its loss of light and small effects over phase.

    The arrays are those of `shadowscale.light._band`.
    """

    curve: Floats
    pieces: Floats
    cells: Floats
    effects: Floats

    @classmethod
    def at(
        cls, system: System, values: Mapping[str, float], band: str, *, derivatives: bool = False
    ) -> BandModel:
        """Prepare a band of `system` with `values` in place of its own."""
        law = LAWS[system.law]
        count = len(law.coefficients)
        keys = keys_of(band, count)
        limb1, mean1 = _limb(law.code, values, keys.limb1)
        limb2, mean2 = _limb(law.code, values, keys.limb2)
        total, ratio = values["radius_sum"], values["radius_ratio"]
        brightness = max(values[keys.brightness], LEAST_BRIGHTNESS)
        share1 = float(1.0 / (1.0 + brightness * ratio**2 * mean2[0] / mean1[0]))
        light_time = light_time_of(values) if system.light_time else 0.0
        # In cycles of the period that the fit starts with: the derivative to the period is that of the phases.
        half_exposure = system.exposure / DAY / system.values["period"] / 2
        constants = constants_of(values)
        curve = np.empty(_band.curve_size(count))
        curve[: _band.MEANS] = (
            values["period"], values["epoch"], half_exposure, values[keys.third], ratio, brightness,
        )  # fmt: skip
        curve[_band.MEANS : _band.MEANS + count] = mean1[1:] / mean1[0]
        curve[_band.MEANS + count :] = mean2[1:] / mean2[0]
        pieces = np.empty((_grid.PIECES_SIZE, 5))
        number = _grid.lay_pieces(
            constants, light_time, total, ratio, values["ecosw"], values["esinw"],
            half_exposure > 0.0, pieces,
        )  # fmt: skip
        if half_exposure < INSTANT * _grid.shortest_piece(pieces):
            curve[_band.HALF_EXPOSURE] = half_exposure = 0.0
        cells = np.empty((number, _grid.ORDER, _grid.grid_columns(count, derivatives=derivatives)))
        _grid.fill_cells(
            pieces, constants, light_time, total, ratio, share1, brightness, law.code, limb1, limb2,
            mean1, mean2, half_exposure > 0.0, cells,
        )  # fmt: skip
        effects = _effects(system, values, keys, constants, light_time, half_exposure, share1)
        return cls(curve, pieces, cells, effects)

    def light(self, time: Floats) -> Floats:
        """(n,) light at `time` in any order, one outside eclipse where there are no small effects."""
        time = np.ascontiguousarray(time, dtype=np.float64)
        if not _band.in_order(time):
            return self._unsorted(time)
        flux = np.empty(time.size)
        _band.band_values(time, self.curve, self.pieces, self.cells, self.effects, flux)
        return flux

    def derivatives(self, time: Floats) -> Floats:
        """(n, columns) derivatives of the light to the local quantities at sorted times.

        The model must have been prepared with derivatives.
        """
        rows = np.empty((time.size, self.columns))
        _band.band_rows(time, self.curve, self.pieces, self.cells, self.effects, rows)
        return rows

    @property
    def columns(self) -> int:
        """How many local quantities have derivatives."""
        shared = _band.SHARED + self.curve.size - _band.MEANS
        return shared + (_smooth.EFFECTS if self.effects.size else 0)

    def _unsorted(self, time: Floats) -> Floats:
        flux = np.full(time.size, np.nan)
        order = np.argsort(time, kind="stable")
        order = order[np.isfinite(time[order])]
        flux[order] = self.light(time[order])
        return flux


def _limb(code: int, values: Mapping[str, float], keys: tuple[str, ...]) -> tuple[Floats, Floats]:
    """Coefficients of one star, and its disc mean with gradient."""
    coefficients = np.array([values[name] for name in keys], dtype=np.float64)
    mean = np.empty(1 + coefficients.size)
    mean_intensity_point(code, coefficients, mean)
    return coefficients, mean


def _effects(
    system: System,
    values: Mapping[str, float],
    keys: BandKeys,
    constants: Floats,
    light_time: float,
    half_exposure: float,
    share1: float,
) -> Floats:
    """The small effects over phase; no cells where they are off."""
    amplitudes = np.array([values.get(name, 0.0) for name in keys.effects])
    if not amplitudes.any() and "fitted" not in system.effects.values():
        return np.empty((0, _grid.ORDER, _smooth.EFFECT_COLUMNS))
    count = _smooth.effect_cells(sqrt(values["ecosw"] ** 2 + values["esinw"] ** 2))
    cells = np.empty((count, _grid.ORDER, _smooth.EFFECT_COLUMNS))
    _smooth.fill_effects(
        constants, light_time, half_exposure, share1, amplitudes, 1.0 - cos2i_of(values),
        values["ecosw"], cells,
    )  # fmt: skip
    return cells
