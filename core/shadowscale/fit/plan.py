"""What the user wishes of a solution; the command line's options and the desktop's controls, as data."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

ORBITS = ("circular", "eccentric", "auto")
INTERVALS = ("covariance",)
LEVELS = ("auto", "one", "night", "trend")
EFFECTS = ("ellipsoidal", "reflection", "beaming")
EFFECT_STATES = ("off", "predicted", "fitted")
LIGHT_TIME = ("auto", "off")
# Measured elsewhere, each with a value and a sigma.
MEASURED = (
    "teff1",
    "teff2",
    "apparent_magnitude",
    "bolometric_correction1",
    "bolometric_correction2",
    "extinction",
)


@dataclass(frozen=True)
class Prior:
    """A Gaussian prior on one quantity, fitted or derived; limb darkening has one value a coefficient."""

    name: str
    values: tuple[float, ...]
    sigmas: tuple[float, ...]


@dataclass(frozen=True)
class Plan:
    """Wishes for a solution. Everything has a default; None means: find it.

    Attributes
    ----------
    period, epoch : float or None [d]
    exposure : float [s]
    law : str
        A name of `shadowscale.light.laws.LAWS`.
    orbit : str
        One of `ORBITS`.
    wavelengths : mapping of band to [nm]
    limb_table : str or None
        Path of a table of published coefficients.
    free, fixed, priors
        Per quantity, names as in `shadowscale.quantities` (a name without a band means every band);
        `fixed` maps the name to its value(s).
    ties : mapping of name to name
        A quantity that has the value of another of its kind, and that other, which leads.
    teff1, teff2 : (value, sigma) or None [K]
    levels : str
        `one` level a band, one a `night`, or a level and a slope a night (`trend`); `auto`: the data decide.
    effects : mapping of effect to `off`, `predicted` or `fitted`
    start : mapping of key to value
        Where the fit starts; what is missing is found from the data.
    apparent_magnitude, bolometric_correction1, bolometric_correction2, extinction : (value, sigma) or None [mag]
        For the distance, which is given only where all are.
    """

    period: float | None = None
    epoch: float | None = None
    exposure: float = 0.0
    law: str = "power-2"
    orbit: str = "auto"
    wavelengths: Mapping[str, float] = field(default_factory=dict)
    limb_table: str | None = None
    free: tuple[str, ...] = ()
    fixed: Mapping[str, tuple[float, ...]] = field(default_factory=dict)
    priors: tuple[Prior, ...] = ()
    ties: Mapping[str, str] = field(default_factory=dict)
    intervals: str = "covariance"
    seed: int = 0
    teff1: tuple[float, float] | None = None
    teff2: tuple[float, float] | None = None
    levels: str = "auto"
    light_time: str = "auto"
    effects: Mapping[str, str] = field(default_factory=dict)
    start: Mapping[str, float] = field(default_factory=dict)
    apparent_magnitude: tuple[float, float] | None = None
    bolometric_correction1: tuple[float, float] | None = None
    bolometric_correction2: tuple[float, float] | None = None
    extinction: tuple[float, float] | None = None
