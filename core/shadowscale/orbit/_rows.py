"""Compiled: velocities of many instants with their derivatives."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import compiled
from shadowscale.orbit._kernels import velocity_point

Floats = NDArray[np.float64]


@compiled
def velocity_rows(
    time: Floats, period: float, epoch: float, constants: Floats, out: Floats
) -> None:
    """w of each time and w to period, epoch, ecosw, esinw, into out (n, 5)."""
    for i in range(time.size):
        cycles = (time[i] - epoch) / period
        row = out[i]
        velocity_point(cycles, constants, row)
        by_cycles, by_ecosw, by_esinw = row[1], row[2], row[3]
        row[1] = -by_cycles * cycles / period
        row[2] = -by_cycles / period
        row[3] = by_ecosw
        row[4] = by_esinw
