"""Where the stars are seen: their separation on the sky, who is in front, when they are closest.

    delta = rho sqrt(1 - sin^2(nu + w) sin^2 i),    rho = (1 - e^2)/(1 + e cos nu)

Light time is explained in `shadowscale.orbit._kernels`.
"""

from __future__ import annotations

from math import pi

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale._compiled import compiled
from shadowscale.orbit import _kernels
from shadowscale.orbit.elements import Orbit
from shadowscale.orbit.longitude import cycles_at

Floats = NDArray[np.float64]


def orbit_constants(orbit: Orbit) -> Floats:
    """The orbit's constants for the compiled functions."""
    constants = np.empty(_kernels.CONSTANTS_SIZE)
    _kernels.orbit_constants(orbit.ecosw, orbit.esinw, orbit.cos2i, constants)
    return constants


def sky_separation(times: ArrayLike, orbit: Orbit) -> Floats:
    """Distance of the stars' centres on the sky.

    Parameters
    ----------
    times : (n,) float64 [d]
    orbit : Orbit

    Returns
    -------
    (n,) float64 [a]
    """
    return _track(times, orbit)[:, 0]


def line_of_sight(times: ArrayLike, orbit: Orbit) -> Floats:
    """How much farther away star 2 is than star 1, (n,) [a]; negative where star 1 is behind."""
    return _track(times, orbit)[:, 1]


def sky_derivatives(times: ArrayLike, orbit: Orbit) -> Floats:
    """Separation and its derivatives at fixed observed times.

    Returns
    -------
    (n, 7) float64
        Separation [a], line of sight [a], and the separation's derivatives to cycles, ecosw, esinw,
        cos^2 i and light time [cycles].
    """
    cycles = orbit.cycles(times).ravel()
    out = np.empty((cycles.size, _kernels.SKY_SIZE))
    _kernels.sky_rows(cycles, orbit_constants(orbit), orbit.light_time, out)
    return out


def conjunction_phases(orbit: Orbit) -> tuple[float, float]:
    """Phases of both conjunctions as seen [cycles]: 0, and that of star 2 behind, in 0...1."""
    constants = orbit_constants(orbit)
    emitted = cycles_at(-pi / 2, ecosw=orbit.ecosw, esinw=orbit.esinw)
    return 0.0, seen_cycles(emitted, constants, orbit.light_time) % 1.0


def seen_cycles(emitted: float, constants: Floats, light_time: float) -> float:
    """Observed cycles at which the orbit is seen as it was at `emitted`: light time inverted."""
    seen = emitted
    if light_time != 0.0:
        for _ in range(20):
            _, z = _kernels.sky_point_value(seen, constants, 0.0)
            last, seen = seen, emitted + light_time * (z - constants[_kernels.Z_PRIMARY])
            if abs(seen - last) < 1e-15:
                break
    return float(seen)


def minimum_phases(orbit: Orbit) -> tuple[float, float]:
    """Phases at which the separation is smallest, near primary and secondary conjunction [cycles].

    With e > 0 and i < 90 deg these are not the conjunctions; a light curve's minimum lies here.
    """
    constants = orbit_constants(orbit)
    first, second = (
        _closest(phase, constants, orbit.light_time) for phase in conjunction_phases(orbit)
    )
    return first, second % 1.0


def _closest(start: float, constants: Floats, light_time: float) -> float:
    """Zero of d(delta^2)/d(cycles), by secants from a conjunction."""
    out = np.empty(_kernels.SKY_SIZE)

    def slope(cycles: float) -> float:
        _kernels.sky_point(cycles, constants, light_time, out)
        return float(out[_kernels.DELTA] * out[_kernels.DELTA_CYCLES])

    last, here = start - 1e-5, start
    last_slope, here_slope = slope(last), slope(here)
    for _ in range(50):
        if here_slope == last_slope or abs(here - last) < 1e-15:
            break
        step = -here_slope * (here - last) / (here_slope - last_slope)
        last, last_slope = here, here_slope
        here += min(max(step, -0.02), 0.02)
        here_slope = slope(here)
    return here


def _track(times: ArrayLike, orbit: Orbit) -> Floats:
    """Separation and line of sight, (n, 2)."""
    cycles = orbit.cycles(times).ravel()
    out = np.empty((cycles.size, 2))
    _fill_track(cycles, orbit_constants(orbit), orbit.light_time, out)
    return out


@compiled
def _fill_track(cycles: Floats, constants: Floats, light_time: float, out: Floats) -> None:
    for i in range(cycles.size):
        out[i, 0], out[i, 1] = _kernels.sky_point_value(cycles[i], constants, light_time)
