"""What the timing part finds; light types without solvers, so that everyone may know them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from shadowscale.geometry.contacts import EclipseTiming

Floats = NDArray[np.float64]
Span = tuple[float, float]


@dataclass(frozen=True)
class PeriodCandidate:
    """A period that was weighed: its epoch of primary minimum, its score (1: the best), plain words."""

    period: float
    epoch: float
    score: float
    words: str


@dataclass(frozen=True)
class PeriodSearch:
    """The period found, what else was weighed, and how it was settled.

    Attributes
    ----------
    period, period_error : float [d]
    epoch : float [d]
        Time of a primary minimum near the middle of the data.
    candidates : tuple of PeriodCandidate
        Best first; the chosen one leads.
    words : str
        How the period was settled against its double and its half.
    ambiguous : bool
        True where the data do not tell the period from `other`.
    other : float or None [d]
        The period that fits as well, if any.
    numbers : mapping
        What the decision rests on, by name.
    left : (shortest, longest) or None [d]
        Periods that were not searched before a stop; None where all were.
    """

    period: float
    epoch: float
    period_error: float
    candidates: tuple[PeriodCandidate, ...]
    words: str
    ambiguous: bool = False
    other: float | None = None
    numbers: Mapping[str, float] | None = None
    left: Span | None = None


@dataclass(frozen=True, eq=False)
class MeasuredEclipses:
    """Both eclipses of a folded light curve.

    Attributes
    ----------
    period, epoch : float [d]
        The epoch is the middle of the deeper eclipse.
    primary, secondary : EclipseTiming
        Phases in cycles from `epoch`, the secondary between 0 and 1; None if no second eclipse is seen.
        Their depth is that of the first band with points in both.
    level : mapping of band to float
        Flux outside eclipse.
    depths, depth_errors : mapping of band to (primary, secondary)
        Light lost, fraction of the light outside eclipse; None where the band has no points in the eclipse.
    primary_window, secondary_window : (from, to) [cycles]
        Phases that hold the eclipse and some light around it.
    scatter : mapping of band to float
        Scatter of the points about the measured shape, fraction of the light.
    notes : tuple of str
        Plain words on what was assumed or could not be seen.
    """

    period: float
    epoch: float
    primary: EclipseTiming
    secondary: EclipseTiming | None
    level: Mapping[str, float]
    depths: Mapping[str, tuple[float | None, float | None]]
    depth_errors: Mapping[str, tuple[float | None, float | None]]
    primary_window: Span
    secondary_window: Span | None
    scatter: Mapping[str, float]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Minimum:
    """One observed eclipse, timed; or, with `why_not`, one that could not be.

    Attributes
    ----------
    cycle : int
        Whole cycles since the epoch; a secondary belongs to the primary before it.
    eclipse : int
        1 primary, 2 secondary.
    time, error : float [d]
        The adopted time, of the template where there is one, else the folding method's.
    method : str
        `template` or `folding`.
    folding_time, folding_error : float or None [d]
        By folding the branches (Kwee & van Woerden 1956, several folds; error of Deeg 2021).
    points : int
        Points in the eclipse.
    why_not : str
        Empty for a minimum that was timed.
    """

    cycle: int
    eclipse: int
    band: str
    time: float
    error: float
    method: str
    points: int
    folding_time: float | None = None
    folding_error: float | None = None
    why_not: str = ""


@dataclass(frozen=True, eq=False)
class Ephemeris:
    """A linear (or quadratic) ephemeris through times of minimum.

    Attributes
    ----------
    epoch, period : float [d]
    change : float or None [d]
        Coefficient of cycle squared, half the period's change a cycle.
    secondary_phase : float or None [cycles]
    errors : mapping of `epoch period change secondary_phase` to float
        Scaled by the square root of `reduced_chi2` where that is above 1.
    covariance : (m, m) float64
        Of the fitted ones in the order epoch, period, change, secondary_phase.
    residuals : (n,) float64 [d]
        Observed minus computed, aligned with `minima`.
    """

    epoch: float
    period: float
    change: float | None
    secondary_phase: float | None
    errors: Mapping[str, float]
    covariance: Floats
    minima: tuple[Minimum, ...]
    residuals: Floats
    reduced_chi2: float
