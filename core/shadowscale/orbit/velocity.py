"""Radial velocities of the stars, receding positive.

rv1 = gamma1 + K1 w,   rv2 = gamma2 - K2 w,   w = cos(nu + omega) + e cos omega
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale._compiled import compiled
from shadowscale.orbit import _kernels
from shadowscale.orbit.elements import Orbit
from shadowscale.orbit.sky import orbit_constants

Floats = NDArray[np.float64]


def radial_velocity(times: ArrayLike, orbit: Orbit, *, star: int, K: float, gamma: float) -> Floats:
    """Radial velocity of one star.

    Parameters
    ----------
    times : (n,) float64 [d]
    orbit : Orbit
    star : int
        1 or 2.
    K, gamma : float [km/s]
        The star's semi-amplitude and its systemic velocity.

    Returns
    -------
    (n,) float64 [km/s]

    Raises
    ------
    ValueError
        If there is no such star.
    """
    if star not in (1, 2):
        raise ValueError(f"star: expected 1 or 2, found {star}")
    shape = velocity_shape(times, orbit)[:, 0]
    return np.asarray(gamma + (K if star == 1 else -K) * shape, dtype=np.float64)


def velocity_shape(times: ArrayLike, orbit: Orbit) -> Floats:
    """w and its derivatives to cycles, ecosw, esinw at fixed times, (n, 4)."""
    cycles = orbit.cycles(times).ravel()
    out = np.empty((cycles.size, _kernels.VELOCITY_SIZE))
    _fill_velocity(cycles, orbit_constants(orbit), out)
    return out


@compiled
def _fill_velocity(cycles: Floats, constants: Floats, out: Floats) -> None:
    for i in range(cycles.size):
        _kernels.velocity_point(cycles[i], constants, out[i])
