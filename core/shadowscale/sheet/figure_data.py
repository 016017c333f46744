"""What the figures show: points and curves in the observer's own quantity, nothing left to compute.

The types import no solver, so that another process can draw them soon after it starts.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from shadowscale.geometry.contacts import EclipseContacts
from shadowscale.timing.results import Minimum

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]
WHOLE = (-0.25, 0.75)


@dataclass(frozen=True, eq=False)
class BandPoints:
    """One band: phase, y, residual of its rows; which take part; the model's curve."""

    band: str
    phase: Floats
    y: Floats
    residual: Floats
    used: Bools
    curve_phase: Floats
    curve: Floats


@dataclass(frozen=True, eq=False)
class StarPoints:
    """One star: phase, velocity without the source's offset, error, residual, source; which take part."""

    star: int
    phase: Floats
    velocity: Floats
    error: Floats
    residual: Floats
    source: NDArray[np.int64]
    used: Bools
    curve_phase: Floats
    curve: Floats
    gamma: float


@dataclass(frozen=True, eq=False)
class Shown:
    """A solution as the figures need it.

    Attributes
    ----------
    magnitudes : bool
        Whether light is shown in magnitudes, as it was given.
    values : mapping of key to float
        Of all quantities.
    law : str
        Of limb darkening, whose coefficients have names.
    correlation_names : tuple of str
    correlations : (n, n) float64
    eclipses : mapping of number to contacts [cycles]
        Those that happen.
    secondary_phase : float
        Middle of the secondary eclipse or where it would be [cycles].
    sources : tuple of str
        Of the velocities.
    minima : tuple of Minimum
        Single eclipses that could be timed.
    """

    magnitudes: bool
    values: Mapping[str, float]
    law: str
    correlation_names: tuple[str, ...]
    correlations: Floats
    eclipses: Mapping[int, EclipseContacts]
    secondary_phase: float
    bands: tuple[BandPoints, ...]
    stars: tuple[StarPoints, ...]
    sources: tuple[str, ...]
    minima: tuple[Minimum, ...]


def eclipse_window(eclipse: EclipseContacts) -> tuple[float, float]:
    """Phases that show an eclipse with its shoulders."""
    margin = 0.22 * eclipse.duration
    return eclipse.first - margin, eclipse.fourth + margin


def around(phase: Floats, window: tuple[float, float]) -> Floats:
    """Phases moved by whole cycles next to the middle of a window."""
    middle = sum(window) / 2
    moved: Floats = phase - np.round(phase - middle)
    return moved
