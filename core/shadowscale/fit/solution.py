"""What a fit found. Imports no solver, so that a session and the desktop can know it cheaply."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from shadowscale.data.photometry import Floats, Ints
from shadowscale.fit.system import System
from shadowscale.geometry.contacts import ContactSolution

FITTED, FIXED, DERIVED, ASSUMED = "fitted", "fixed", "derived", "assumed"
PROFILE = "profile"  # chosen, where limits are those of a likelihood profile


@dataclass(frozen=True)
class Estimate:
    """A value, its 68.3 % limits (both positive; None where held fixed), and how it was had."""

    value: float
    minus: float | None
    plus: float | None
    how: str
    prior: tuple[float, float] | None = None


@dataclass(frozen=True)
class Decision:
    """Something that the data decided: what, the choice, why in plain words, the numbers."""

    what: str
    chosen: str
    words: str
    numbers: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class Alternative:
    """Another solution that the data do not exclude."""

    words: str
    values: Mapping[str, float]
    delta_chi2: float


@dataclass(frozen=True)
class FitSummary:
    """The fit in numbers: chi2 is of the errors as scaled; scales are the factors applied to them."""

    points: int
    free: int
    chi2: float
    reduced_chi2: float
    rms_light: Mapping[str, float]  # per band, in flux
    rms_velocity: Mapping[str, float]  # "star 1", "star 2" [km/s]
    error_scale: Mapping[str, float]  # per band, factor on the given errors
    jitter: Mapping[str, float]  # per "source, star n" [km/s], added in quadrature
    raw_reduced_chi2: Mapping[str, float]  # per band and velocity set, with the errors as given
    method: str
    converged: bool
    iterations: int


@dataclass(frozen=True, eq=False)
class LightResult:
    """Photometry row by row, aligned with the table.

    model : (n,) flux with levels; level : (n,) the level and trend; phase : (n,) cycles, -0.25...0.75;
    why : (n,) as in the table, with outliers that the fit set aside; reasons as in the table.
    """

    model: Floats
    level: Floats
    phase: Floats
    why: Ints
    reasons: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class VelocityResult:
    """Velocities row by row, aligned with the table [km/s]; offsets of sources included in the model."""

    model1: Floats
    model2: Floats
    phase: Floats
    why1: Ints
    why2: Ints
    reasons: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class Solution:
    """A solution with everything the sheet needs.

    Attributes
    ----------
    system : System
        Values at the solution; `system.free` names the rows of `covariance`.
    covariance : (m, m) float64
        Of the free keys, in the register's units.
    estimates : mapping of key to Estimate
        Basic and derived quantities, of the system, the bands and the sources.
    correlation_names, correlations : names and (c, c) float64
        Of the fitted quantities and the main derived ones.
    absent : mapping of quantity to plain words
        What the data cannot give, and why.
    """

    system: System
    covariance: Floats
    estimates: Mapping[str, Estimate]
    correlation_names: tuple[str, ...]
    correlations: Floats
    fit: FitSummary
    light: LightResult
    velocity: VelocityResult | None
    contact: ContactSolution | None
    decisions: tuple[Decision, ...] = ()
    alternatives: tuple[Alternative, ...] = ()
    absent: Mapping[str, str] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
