"""Model curves over phase, for pictures."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.model import model_light_at_phases, model_velocities
from shadowscale.fit.system import System

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class ModelCurves:
    """Light of each band (n,) and velocities of the measured stars (n,) [km/s] at `phases` (n,)."""

    phases: Floats
    light: Mapping[str, Floats]
    rv1: Floats | None
    rv2: Floats | None


def model_curves(system: System, phases: Floats) -> ModelCurves:
    """The model at `phases` (n,) [cycles] from primary eclipse."""
    phases = np.asarray(phases, dtype=np.float64)
    times = system.value("epoch") + phases * system.value("period")
    velocities = [
        model_velocities(system, star, times) if f"K{star}" in system.values else None
        for star in (1, 2)
    ]
    light = {band: model_light_at_phases(system, band, phases) for band in system.bands}
    return ModelCurves(phases, light, velocities[0], velocities[1])
