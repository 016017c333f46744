"""Compiled: the small effects of one band as polynomials over phase.

They are smooth, so a circle of equal cells serves: cells (number, ORDER, EFFECT_COLUMNS), polynomials
of degree five in t = 0...1 through six nodes, the first cell beginning at phase 0. Columns: 0 their light,
its derivatives 1 to cycles, 2 e cos w, 3 e sin w, 4 cos^2 i, 5 light time, 6 ln(lam2/lam1), then to the
amplitudes ellipsoidal 1, 2, reflection 1, 2, beaming 1, 2.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import fused
from shadowscale.light.proximity import SHAPES_FULL_SIZE, proximity_full
from shadowscale.orbit._kernels import SKY_FULL_SIZE, sky_full

Floats = NDArray[np.float64]

EFFECT_COLUMNS = 16  # 13 of them used
EFFECTS = 6
_USED = 13

# Three Gauss-Legendre nodes average the small effects over an exposure: they turn twice an orbit at
# most, so that half a tenth of a cycle is exact to 1e-9.
_NODES = np.array([-np.sqrt(0.6), 0.0, np.sqrt(0.6)])
_WEIGHTS = np.array([5.0, 8.0, 5.0]) / 18.0
_LAGRANGE = np.linalg.inv(np.vander(np.arange(6.0) - 2.0, increasing=True))


@fused
def effect_cells(eccentricity: float) -> int:
    """How many cells hold the effects to 1e-10 of an amplitude of 0.1."""
    return int(np.ceil(160.0 / (1.0 - eccentricity) ** 1.5))


@fused
def fill_effects(
    constants: Floats,
    light_time: float,
    half_exposure: float,
    share1: float,
    amplitudes: Floats,
    sin2i: float,
    ecosw: float,
    cells: Floats,
) -> None:
    """Fill the polynomials of all phases."""
    count = cells.shape[0]
    values = np.zeros((count, EFFECT_COLUMNS))
    sky = np.empty(SKY_FULL_SIZE)
    shapes = np.empty(SHAPES_FULL_SIZE)
    for node in range(count):
        for each in range(3):
            phase = node / count + half_exposure * _NODES[each]
            sky_full(phase, constants, light_time, sky)
            proximity_full(sky, sin2i, ecosw, shapes)
            _add(share1, amplitudes, shapes, _WEIGHTS[each], values[node])
            if half_exposure == 0.0:
                values[node] /= _WEIGHTS[each]
                break
    cells[:] = 0.0
    for at in range(count):
        for i in range(6):
            for m in range(6):
                weight = _LAGRANGE[i, m]
                node = (at + m - 2) % count
                for j in range(EFFECT_COLUMNS):
                    cells[at, i, j] += weight * values[node, j]


@fused
def _add(share1: float, amplitudes: Floats, shapes: Floats, weight: float, row: Floats) -> None:
    """Add the effects of one instant and their derivatives, times a weight."""
    share2 = 1.0 - share1
    ell = share1 * amplitudes[0] + share2 * amplitudes[1]
    lit1, lit2 = amplitudes[2], amplitudes[3]
    beam1, beam2 = share1 * amplitudes[4], share2 * amplitudes[5]
    for j in range(6):  # the light, then its five derivatives
        first, step = (0, 1) if j == 0 else (4 + j, 5)
        row[j] += weight * (
            ell * shapes[first]
            + lit1 * shapes[first + step]
            + lit2 * shapes[first + 2 * step]
            + beam1 * shapes[first + 3 * step]
            + beam2 * shapes[first + 4 * step]
        )
    by_ratio = (amplitudes[1] - amplitudes[0]) * shapes[0]
    by_ratio += amplitudes[5] * shapes[4] - amplitudes[4] * shapes[3]
    row[6] += weight * by_ratio * share1 * share2
    row[7] += weight * share1 * shapes[0]
    row[8] += weight * share2 * shapes[0]
    row[9] += weight * shapes[1]
    row[10] += weight * shapes[2]
    row[11] += weight * share1 * shapes[3]
    row[12] += weight * share2 * shapes[4]


@fused
def effect_place(cycles: float, count: int) -> float:
    """Cell number plus t of a phase among `count` cells."""
    found: float = min((cycles - np.floor(cycles)) * count, count * (1.0 - 1e-15))
    return found
