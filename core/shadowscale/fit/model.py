"""The model of a system, for whoever draws or simulates it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.band_model import BandModel, constants_of
from shadowscale.fit.system import System
from shadowscale.orbit._rows import velocity_rows

Floats = NDArray[np.float64]


def model_light(system: System, band: str, times: Floats) -> Floats:
    """Light of one band at `times`, as a fraction of the light outside eclipse.

    Parameters
    ----------
    system : System
    band : str
        One of `system.bands`; KeyError otherwise.
    times : (n,) float64 [d]

    Returns
    -------
    (n,) float64
        Averaged over the system's exposure time; small effects included where they are on.
    """
    return BandModel.at(system, system.values, band).light(np.asarray(times, dtype=np.float64))


def model_light_at_phases(system: System, band: str, phases: Floats) -> Floats:
    """As `model_light`, at phases [cycles] from primary eclipse."""
    times = system.value("epoch") + np.asarray(phases) * system.value("period")
    return model_light(system, band, times)


def model_velocities(system: System, star: int, times: Floats) -> Floats:
    """Radial velocity [km/s] of star 1 or 2 at `times` (n,) [d], without offsets of sources.

    KeyError where the system has no amplitude for that star.
    """
    if star not in (1, 2):
        raise ValueError(f"star: expected 1 or 2, found {star!r}")
    times = np.array(times, dtype=np.float64)  # kernels take one kind of array: writable ones
    rows = np.empty((times.size, 5))
    values = system.values
    velocity_rows(times, values["period"], values["epoch"], constants_of(values), rows)
    sign = 1.0 if star == 1 else -1.0
    model: Floats = values[f"gamma{star}"] + sign * values[f"K{star}"] * rows[:, 0]
    return model
