"""Contact times and the classical solution that follows from them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class EclipseTiming:
    """One eclipse as measured, or as the markers lie; phases in cycles from the epoch.

    Attributes
    ----------
    middle, duration : float [cycles]
        Middle, and first to fourth contact.
    ingress, egress : float [cycles]
        First to second and third to fourth contact; in a partial eclipse half the duration each.
    depth : float
        Light lost at the middle, fraction of the light outside eclipse.
    flat : bool
        Inner contacts were seen (total or annular).
    covariance : (5, 5) float64
        Of middle, duration, ingress, egress, depth.
    """

    middle: float
    duration: float
    ingress: float
    egress: float
    depth: float
    flat: bool
    covariance: Floats

    @property
    def contacts(self) -> tuple[float, float, float, float]:
        """Phases of first to fourth contact."""
        first = self.middle - self.duration / 2
        fourth = self.middle + self.duration / 2
        return first, first + self.ingress, fourth - self.egress, fourth


@dataclass(frozen=True, eq=False)
class ContactSolution:
    """What contact times and depths alone say: a result of its own, and the start of the full fit.

    values, errors : mapping of quantity name to float
        `r1 r2 inclination radius_sum radius_ratio ecosw esinw T14_1 T23_1 T14_2 T23_2 depth1 depth2`
        and, with depths, `light_ratio`; days for durations, degrees; a quantity that the contacts
        cannot give is missing from both.
    names, covariance : names and (m, m) float64
        Of the quantities in `values` that have errors.
    others : tuple of mappings
        Further solutions of the same times and depths (k and 1/k above all).
    notes : tuple of str
        What is undetermined, in plain words.
    """

    primary: EclipseTiming
    secondary: EclipseTiming | None
    values: Mapping[str, float]
    errors: Mapping[str, float]
    names: tuple[str, ...]
    covariance: Floats
    others: tuple[Mapping[str, float], ...] = ()
    notes: tuple[str, ...] = field(default=())
