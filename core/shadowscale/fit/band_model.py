"""One band's model at given values, ready for the compiled kernels."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import cos, pi, radians, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import C_KM_S
from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.light import _band
from shadowscale.light._table import fill_table, table_columns, table_rows
from shadowscale.light.exposure import exposure_nodes
from shadowscale.light._kernels import mean_intensity_point
from shadowscale.light.laws import LAWS
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
    """One band's model at given values, ready for the compiled kernels."""

    scalars: tuple[float, ...]  # period, epoch, light time, r1+r2, k
    constants: Floats
    brightness: float
    share1: float
    third: float
    windows: Floats
    offsets: Floats
    weights: Floats
    tables: tuple[Floats, Floats]
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
        ratio, radius_sum = values["radius_ratio"], values["radius_sum"]
        constants = constants_of(values)
        light_time = light_time_of(values) if system.light_time else 0.0
        tables, means = [], []
        for star, size in ((1, ratio), (2, 1.0 / ratio)):
            coefficients = np.array(
                [
                    values[key(f"limb_darkening{star}", band, n + 1)]
                    for n in range(len(law.coefficients))
                ]
            )
            table = np.empty((table_rows(size), table_columns(coefficients.size)))
            fill_table(size, law.code, coefficients, table)
            mean = np.empty(1 + coefficients.size)
            mean_intensity_point(law.code, coefficients, mean)
            tables.append(table)
            means.append(mean)
        brightness = max(values[key("surface_brightness_ratio", band)], 1e-12)
        light_ratio = brightness * ratio**2 * means[1][0] / means[0][0]
        offsets, weights, margin = _exposure(system.exposure, values)
        windows = np.empty(4)
        _band.eclipse_windows(
            constants, light_time, radius_sum, values["ecosw"], values["esinw"], margin, windows
        )
        amplitudes = np.array(
            [values.get(key(f"{effect}{star}", band), 0.0) for effect in EFFECTS for star in (1, 2)]
        )
        effects_on = bool(np.any(amplitudes != 0.0)) or "fitted" in system.effects.values()
        shared = _band.SHARED + 2 * len(law.coefficients)
        return cls(
            (values["period"], values["epoch"], light_time, radius_sum, ratio), constants,
            brightness, 1.0 / (1.0 + light_ratio), values[key("third_light", band)], windows,
            offsets, weights, (tables[0], tables[1]), (means[0], means[1]), effects_on, amplitudes,
            1.0 - cos2i_of(values), values["ecosw"],
            shared + (_band.EFFECTS if effects_on else 0),
        )  # fmt: skip

    def rows(self, time: Floats, work: Workspace) -> int:
        """Light and derivatives at `time` into the workspace; returns how many rows have derivatives."""
        period, epoch, light_time, radius_sum, ratio = self.scalars
        found: int = _band.band_rows(
            time, period, epoch, self.constants, light_time, radius_sum, ratio, self.brightness,
            self.share1, self.third, self.windows, self.offsets, self.weights, *self.tables,
            *self.means, self.effects_on, self.amplitudes, self.sin2i, self.ecosw, work.flux,
            work.active, work.rows,
        )  # fmt: skip
        return found

    def light(self, time: Floats) -> Floats:
        """(n,) light at `time`, one outside eclipse where there are no small effects."""
        period, epoch, light_time, radius_sum, ratio = self.scalars
        flux = np.empty(time.size)
        _band.band_values(
            np.ascontiguousarray(time, dtype=np.float64), period, epoch, self.constants, light_time,
            radius_sum, ratio, self.share1, self.third, self.windows, self.offsets, self.weights,
            *self.tables, self.effects_on, self.amplitudes, self.sin2i, self.ecosw, flux,
        )  # fmt: skip
        return flux


def _exposure(exposure: float, values: Mapping[str, float]) -> tuple[Floats, Floats, float]:
    """Nodes and weights of the exposure, and how far outside an eclipse they reach [cycles]."""
    smaller = (
        min(1.0, values["radius_ratio"]) / (1.0 + values["radius_ratio"]) * values["radius_sum"]
    )
    offsets, weights = exposure_nodes(exposure, values["period"], ingress=2 * smaller / (2 * pi))
    return offsets, weights, float(offsets[-1])
