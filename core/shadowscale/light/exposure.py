"""Averaging the light over an exposure.

Gauss-Legendre nodes across the exposure, spent only on the exposures that touch an eclipse.
A contact inside an exposure leaves a kink of the 3/2 power in the light, for which the error of
n nodes falls as n^-5: the number of nodes follows from the ratio of exposure to ingress.
"""

from __future__ import annotations

from math import ceil, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import DAY

Floats = NDArray[np.float64]

MOST_NODES = 25


def exposure_nodes(exposure: float, period: float, *, ingress: float) -> tuple[Floats, Floats]:
    """Nodes and weights of the average over one exposure.

    Parameters
    ----------
    exposure : float [s]
    period : float [d]
    ingress : float [cycles]
        The shorter time that one star's limb takes to cross the other's.

    Returns
    -------
    offsets : (n,) float64 [cycles]
        From the middle of the exposure; a single zero where there is no exposure time.
    weights : (n,) float64
        Of sum one.
    """
    length = exposure / DAY / period
    if length <= 0.0:
        return np.zeros(1), np.ones(1)
    ratio = length / max(ingress, 1e-6)
    count = min(MOST_NODES, max(3, ceil(3 + 7 * sqrt(min(ratio, 10.0)))))
    nodes, weights = np.polynomial.legendre.leggauss(count)
    return nodes * length / 2, weights / 2
