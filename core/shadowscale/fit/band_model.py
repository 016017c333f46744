"""One band's model at given values, ready for the compiled kernels."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from math import nan, pi, sqrt
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import C_KM_S, DAY
from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.light import _band, _grid, _smooth
from shadowscale.light.laws import LAWS
from shadowscale.orbit._kernels import CONSTANTS_SIZE, orbit_constants
from shadowscale.orbit.elements import cos_squared
from shadowscale.quantities import Key, key

Floats = NDArray[np.float64]
INCREDIBLE_ECCENTRICITY = 0.95
LEAST_BRIGHTNESS = 1e-12


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


class Shape(NamedTuple):
    """What makes one band's light over phase; places as `shadowscale.light._band.prepare_band` has them."""

    given: tuple[float, ...]  # without period and epoch
    law: int
    limb1: tuple[float, ...]
    limb2: tuple[float, ...]
    amplitudes: tuple[float, ...]

    @classmethod
    def at(cls, system: System, values: Mapping[str, float], band: str) -> Shape:
        """Of a band of `system` with `values` in place of its own."""
        law = LAWS[system.law]
        keys = keys_of(band, len(law.coefficients))
        amplitudes = tuple([values.get(name, 0.0) for name in keys.effects])
        if not any(amplitudes) and "fitted" not in system.effects.values():
            amplitudes = ()
        # In cycles of the period that the fit starts with: the derivative to the period is that of the phases.
        half_exposure = system.exposure / DAY / system.values["period"] / 2
        given = (
            half_exposure, values[keys.third], values["radius_sum"], values["radius_ratio"],
            max(values[keys.brightness], LEAST_BRIGHTNESS), values["ecosw"], values["esinw"],
            cos2i_of(values), light_time_of(values) if system.light_time else 0.0,
        )  # fmt: skip
        limb1, limb2 = (
            tuple([values[name] for name in names]) for names in (keys.limb1, keys.limb2)
        )
        return cls(given, law.code, limb1, limb2, amplitudes)


class Eclipse(NamedTuple):
    """First to fourth and second to third contact [cycles]; light lost at the middle. NaN: there is none."""

    duration: float = nan
    inner_duration: float = nan
    depth: float = nan


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
        shape = Shape.at(system, values, band)
        return cls.of(shape, values["period"], values["epoch"], derivatives=derivatives)

    @classmethod
    def of(
        cls, shape: Shape, period: float, epoch: float, *, derivatives: bool = False
    ) -> BandModel:
        """Prepare a band of that shape."""
        arrays = _band.prepare_band(
            np.array((period, epoch, *shape.given), dtype=np.float64), shape.law,
            np.array(shape.limb1, dtype=np.float64), np.array(shape.limb2, dtype=np.float64),
            np.array(shape.amplitudes, dtype=np.float64), derivatives,
        )  # fmt: skip
        return cls(*arrays)

    def light(self, time: Floats) -> Floats:
        """(n,) light at `time` in any order, one outside eclipse where there are no small effects."""
        time = np.ascontiguousarray(time, dtype=np.float64)
        if not time.flags.writeable:  # kernels take one kind of array
            time = time.copy()
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

    def eclipse(self, number: int) -> Eclipse:
        """The primary (0) or secondary (1) eclipse."""
        span, pieces = (
            self.pieces[_grid.SPANS + number],
            self.pieces[: int(self.pieces[_grid.COUNTS, 0])],
        )
        if span[1] < span[0]:
            return Eclipse()
        own = pieces[pieces[:, 4] == number]
        middle = self.curve[_band.EPOCH] + self.curve[_band.PERIOD] * span[3]
        return Eclipse(
            float(span[1] - span[0]),
            float(2.0 * own[1, 1]) if len(own) == 3 else nan,
            1.0 - float(self.light(np.array([middle]))[0]),
        )

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
