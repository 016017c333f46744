"""The register of quantities: one definition of each, for engine, command line, desktop and sheet.

A *key* names one number of a system: the quantity's name, for a band or a source followed by its
label in square brackets (`third_light[V]`, `offset1[north]`), for a limb-darkening coefficient also
by its number (`limb_darkening1[V].1`).
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from math import inf, isfinite
from types import MappingProxyType

SYSTEM, BAND, SOURCE = "system", "band", "source"
MOST_DECIMALS = 12


@dataclass(frozen=True)
class Quantity:
    """What is to be known of one quantity, whoever shows it.

    Attributes
    ----------
    unit : str
        In astropy's spelling; empty for pure numbers.
    lower, upper : float
        Hard limits of what the model accepts.
    step : float
        A change that a person would notice; the fine step of sliders and keys.
    scope : str
        `system`, `band` (one per band) or `source` (one per source of velocities).
    basic : bool
        True if the model is written in it, so that it can be fitted, held or tied; the rest is derived.
    effect : str
        One plain sentence: what it does to the curve.
    source : str
        For derived quantities the formula's origin.
    """

    name: str
    symbol: str
    tex: str
    unit: str
    lower: float
    upper: float
    step: float
    meaning: str
    scope: str = SYSTEM
    basic: bool = False
    effect: str = ""
    source: str = ""


def _register(*quantities: Quantity) -> Mapping[str, Quantity]:
    return MappingProxyType({quantity.name: quantity for quantity in quantities})


_KEPLER = "Kepler's third law with IAU 2015 B3 nominal constants (Prsa et al. 2016, AJ 152, 41)"
_CONTACTS = "exact contacts of the projected orbit"

QUANTITIES: Mapping[str, Quantity] = _register(
    # The model is written in these.
    Quantity(
        "period",
        "P",
        "P",
        "d",
        1e-3,
        1e6,
        1e-5,
        "orbital period",
        basic=True,
        effect="A wrong period makes the eclipses drift in phase from night to night.",
    ),
    Quantity(
        "epoch",
        "T0",
        "T_0",
        "d",
        -inf,
        inf,
        1e-4,
        "time of mid primary eclipse",
        basic=True,
        effect="Moves all eclipses earlier or later together.",
    ),
    Quantity(
        "radius_sum",
        "r1+r2",
        "r_1+r_2",
        "",
        1e-4,
        0.99,
        1e-4,
        "sum of the fractional radii",
        basic=True,
        effect="Makes both eclipses longer.",
    ),
    Quantity(
        "radius_ratio",
        "k",
        "k",
        "",
        5e-3,
        200.0,
        1e-3,
        "ratio of the radii, star 2 over star 1",
        basic=True,
        effect="Shares the sum between the stars: ingress and egress grow as the radii become equal.",
    ),
    Quantity(
        "inclination",
        "i",
        "i",
        "deg",
        5.0,  # below it separate stars make no eclipse
        90.0,
        0.01,
        "inclination of the orbit",
        basic=True,
        effect="Lower inclination makes the eclipses shorter, shallower and V-shaped.",
    ),
    Quantity(
        "ecosw",
        "e cos w",
        r"e\cos\omega",
        "",
        -0.99,
        0.99,
        1e-4,
        "eccentricity times cosine of the argument of periastron",
        basic=True,
        effect="Moves the secondary eclipse away from phase one half.",
    ),
    Quantity(
        "esinw",
        "e sin w",
        r"e\sin\omega",
        "",
        -0.99,
        0.99,
        1e-3,
        "eccentricity times sine of the argument of periastron",
        basic=True,
        effect="Makes one eclipse longer than the other.",
    ),
    Quantity(
        "K1",
        "K1",
        "K_1",
        "km/s",
        0.0,
        2000.0,
        0.1,
        "velocity semi-amplitude of star 1",
        basic=True,
        effect="Stretches the velocity curve of star 1.",
    ),
    Quantity(
        "K2",
        "K2",
        "K_2",
        "km/s",
        0.0,
        2000.0,
        0.1,
        "velocity semi-amplitude of star 2",
        basic=True,
        effect="Stretches the velocity curve of star 2.",
    ),
    Quantity(
        "gamma1",
        "gamma1",
        r"\gamma_1",
        "km/s",
        -5000.0,
        5000.0,
        0.1,
        "systemic velocity from star 1",
        basic=True,
        effect="Moves the velocity curve of star 1 up or down.",
    ),
    Quantity(
        "gamma2",
        "gamma2",
        r"\gamma_2",
        "km/s",
        -5000.0,
        5000.0,
        0.1,
        "systemic velocity from star 2",
        basic=True,
        effect="Moves the velocity curve of star 2 up or down.",
    ),
    Quantity(
        "offset1",
        "offset1",
        r"\Delta_1",
        "km/s",
        -5000.0,
        5000.0,
        0.1,
        "velocity offset of a source against the first, star 1",
        SOURCE,
        basic=True,
        effect="Moves the velocities of one source against those of the first.",
    ),
    Quantity(
        "offset2",
        "offset2",
        r"\Delta_2",
        "km/s",
        -5000.0,
        5000.0,
        0.1,
        "velocity offset of a source against the first, star 2",
        SOURCE,
        basic=True,
        effect="Moves the velocities of one source against those of the first.",
    ),
    Quantity(
        "surface_brightness_ratio",
        "J",
        "J",
        "",
        0.0,
        1e4,
        1e-3,
        "surface-brightness ratio at the disc centres, star 2 over star 1",
        BAND,
        basic=True,
        effect="Sets the depth of the secondary eclipse against the primary.",
    ),
    Quantity(
        "third_light",
        "l3",
        r"\ell_3",
        "",
        -0.5,
        0.99,
        1e-3,
        "third light as a fraction of the total outside eclipse",
        BAND,
        basic=True,
        effect="Makes both eclipses shallower without changing when they begin and end.",
    ),
    Quantity(
        "limb_darkening1",
        "u1",
        "u_1",
        "",
        -10.0,
        10.0,
        0.01,
        "limb darkening of star 1",
        BAND,
        basic=True,
        effect="Rounds the bottom of primary eclipse and softens its shoulders.",
    ),
    Quantity(
        "limb_darkening2",
        "u2",
        "u_2",
        "",
        -10.0,
        10.0,
        0.01,
        "limb darkening of star 2",
        BAND,
        basic=True,
        effect="Rounds the bottom of secondary eclipse and softens its shoulders.",
    ),
    Quantity(
        "ellipsoidal1",
        "A_ell1",
        "A_{e1}",
        "",
        -0.5,
        0.5,
        1e-4,
        "ellipsoidal amplitude of star 1, fraction of its own light",
        BAND,
        basic=True,
        effect="Brightens the curve at both quadratures.",
    ),
    Quantity(
        "ellipsoidal2",
        "A_ell2",
        "A_{e2}",
        "",
        -0.5,
        0.5,
        1e-4,
        "ellipsoidal amplitude of star 2, fraction of its own light",
        BAND,
        basic=True,
        effect="Brightens the curve at both quadratures.",
    ),
    Quantity(
        "reflection1",
        "A_ref1",
        "A_{r1}",
        "",
        -0.5,
        0.5,
        1e-4,
        "light of star 2 returned by star 1 at full phase, fraction of the stars' light",
        BAND,
        basic=True,
        effect="Brightens the shoulders of primary eclipse.",
    ),
    Quantity(
        "reflection2",
        "A_ref2",
        "A_{r2}",
        "",
        -0.5,
        0.5,
        1e-4,
        "light of star 1 returned by star 2 at full phase, fraction of the stars' light",
        BAND,
        basic=True,
        effect="Brightens the shoulders of secondary eclipse.",
    ),
    Quantity(
        "beaming1",
        "A_beam1",
        "A_{b1}",
        "",
        -0.1,
        0.1,
        1e-5,
        "Doppler-beaming amplitude of star 1, fraction of its own light",
        BAND,
        basic=True,
        effect="Brightens the quadrature at which star 1 approaches.",
    ),
    Quantity(
        "beaming2",
        "A_beam2",
        "A_{b2}",
        "",
        -0.1,
        0.1,
        1e-5,
        "Doppler-beaming amplitude of star 2, fraction of its own light",
        BAND,
        basic=True,
        effect="Brightens the quadrature at which star 2 approaches.",
    ),
    # The rest follows from them.
    Quantity(
        "r1",
        "r1",
        "r_1",
        "",
        0.0,
        1.0,
        1e-4,
        "fractional radius of star 1, R1/a",
        source="r1 = (r1+r2)/(1+k)",
    ),
    Quantity(
        "r2",
        "r2",
        "r_2",
        "",
        0.0,
        1.0,
        1e-4,
        "fractional radius of star 2, R2/a",
        source="r2 = k (r1+r2)/(1+k)",
    ),
    Quantity(
        "impact1",
        "b1",
        "b_1",
        "",
        0.0,
        inf,
        1e-3,
        "impact parameter of primary eclipse in radii of star 1",
        source="cos i (1-e^2)/(1+e sin w)/r1",
    ),
    Quantity(
        "impact2",
        "b2",
        "b_2",
        "",
        0.0,
        inf,
        1e-3,
        "impact parameter of secondary eclipse in radii of star 1",
        source="cos i (1-e^2)/(1-e sin w)/r1",
    ),
    Quantity(
        "eccentricity",
        "e",
        "e",
        "",
        0.0,
        0.99,
        1e-4,
        "eccentricity",
        source="from e cos w and e sin w",
    ),
    Quantity(
        "omega",
        "w",
        r"\omega",
        "deg",
        0.0,
        360.0,
        0.1,
        "argument of periastron of star 1's orbit",
        source="from e cos w and e sin w",
    ),
    Quantity("mass_ratio", "q", "q", "", 0.0, inf, 1e-3, "mass ratio M2/M1", source="K1/K2"),
    Quantity(
        "a",
        "a",
        "a",
        "solRad",
        0.0,
        inf,
        0.01,
        "semi-major axis of the relative orbit",
        source=_KEPLER,
    ),
    Quantity("M1", "M1", "M_1", "solMass", 0.0, inf, 0.001, "mass of star 1", source=_KEPLER),
    Quantity("M2", "M2", "M_2", "solMass", 0.0, inf, 0.001, "mass of star 2", source=_KEPLER),
    Quantity(
        "R1",
        "R1",
        "R_1",
        "solRad",
        0.0,
        inf,
        0.001,
        "radius of star 1",
        source="R1 = r1 a",
    ),
    Quantity(
        "R2",
        "R2",
        "R_2",
        "solRad",
        0.0,
        inf,
        0.001,
        "radius of star 2",
        source="R2 = r2 a",
    ),
    Quantity(
        "logg1",
        "log g1",
        r"\log g_1",
        "dex(cm/s2)",
        -inf,
        inf,
        0.001,
        "surface gravity of star 1",
        source="Southworth, Wheatley & Sams 2007, MNRAS 379, L11, or g = G M/R^2",
    ),
    Quantity(
        "logg2",
        "log g2",
        r"\log g_2",
        "dex(cm/s2)",
        -inf,
        inf,
        0.001,
        "surface gravity of star 2",
        source="Southworth, Wheatley & Sams 2007, MNRAS 379, L11, or g = G M/R^2",
    ),
    Quantity(
        "density1",
        "rho1",
        r"\rho_1",
        "kg/m3",
        0.0,
        inf,
        1.0,
        "mean density of star 1",
        source="3 pi/(G P^2 r1^3 (1+q))",
    ),
    Quantity(
        "density2",
        "rho2",
        r"\rho_2",
        "kg/m3",
        0.0,
        inf,
        1.0,
        "mean density of star 2",
        source="3 pi q/(G P^2 r2^3 (1+q))",
    ),
    Quantity(
        "vsync1",
        "v1 sync",
        r"v_{\rm sync,1}",
        "km/s",
        0.0,
        inf,
        0.1,
        "synchronous projected rotation velocity of star 1",
        source="2 pi R1 sin i/P",
    ),
    Quantity(
        "vsync2",
        "v2 sync",
        r"v_{\rm sync,2}",
        "km/s",
        0.0,
        inf,
        0.1,
        "synchronous projected rotation velocity of star 2",
        source="2 pi R2 sin i/P",
    ),
    Quantity(
        "teff1",
        "Teff1",
        r"T_{\rm eff,1}",
        "K",
        500.0,
        300000.0,
        10.0,
        "effective temperature of star 1",
    ),
    Quantity(
        "teff2",
        "Teff2",
        r"T_{\rm eff,2}",
        "K",
        500.0,
        300000.0,
        10.0,
        "effective temperature of star 2",
    ),
    Quantity(
        "L1",
        "L1",
        "L_1",
        "solLum",
        0.0,
        inf,
        0.01,
        "luminosity of star 1",
        source="4 pi R^2 sigma Teff^4",
    ),
    Quantity(
        "L2",
        "L2",
        "L_2",
        "solLum",
        0.0,
        inf,
        0.01,
        "luminosity of star 2",
        source="4 pi R^2 sigma Teff^4",
    ),
    Quantity(
        "Mbol1",
        "Mbol1",
        r"M_{\rm bol,1}",
        "mag",
        -inf,
        inf,
        0.01,
        "absolute bolometric magnitude of star 1",
        source="IAU 2015 Resolution B2",
    ),
    Quantity(
        "Mbol2",
        "Mbol2",
        r"M_{\rm bol,2}",
        "mag",
        -inf,
        inf,
        0.01,
        "absolute bolometric magnitude of star 2",
        source="IAU 2015 Resolution B2",
    ),
    Quantity(
        "distance",
        "d",
        "d",
        "pc",
        0.0,
        inf,
        1.0,
        "distance",
        source="from magnitude, bolometric corrections and extinction",
    ),
    Quantity(
        "T14_1",
        "T14 primary",
        "T_{14,1}",
        "d",
        0.0,
        inf,
        1e-4,
        "primary eclipse, first to fourth contact",
        source=_CONTACTS,
    ),
    Quantity(
        "T23_1",
        "T23 primary",
        "T_{23,1}",
        "d",
        0.0,
        inf,
        1e-4,
        "primary eclipse, second to third contact",
        source=_CONTACTS,
    ),
    Quantity(
        "T14_2",
        "T14 secondary",
        "T_{14,2}",
        "d",
        0.0,
        inf,
        1e-4,
        "secondary eclipse, first to fourth contact",
        source=_CONTACTS,
    ),
    Quantity(
        "T23_2",
        "T23 secondary",
        "T_{23,2}",
        "d",
        0.0,
        inf,
        1e-4,
        "secondary eclipse, second to third contact",
        source=_CONTACTS,
    ),
    Quantity(
        "depth1",
        "depth 1",
        "d_1",
        "",
        0.0,
        1.0,
        1e-4,
        "light lost at mid primary eclipse, fraction of the light outside eclipse (first band)",
        source="the model at the middle of the eclipse",
    ),
    Quantity(
        "depth2",
        "depth 2",
        "d_2",
        "",
        0.0,
        1.0,
        1e-4,
        "light lost at mid secondary eclipse, fraction of the light outside eclipse (first band)",
        source="the model at the middle of the eclipse",
    ),
    Quantity(
        "light_ratio",
        "l2/l1",
        r"\ell_2/\ell_1",
        "",
        0.0,
        inf,
        1e-3,
        "light of star 2 over that of star 1",
        BAND,
        source="J k^2 Lambda2/Lambda1",
    ),
    Quantity(
        "mean_surface_brightness_ratio",
        "<J>",
        r"\langle J\rangle",
        "",
        0.0,
        inf,
        1e-3,
        "disc-averaged surface-brightness ratio, star 2 over star 1",
        BAND,
        source="J Lambda2/Lambda1",
    ),
)

_KEY = re.compile(
    r"^(?P<name>[A-Za-z][A-Za-z0-9_]*)(?:\[(?P<label>[^\[\]]+)\])?(?:\.(?P<number>[1-9]))?$"
)


@dataclass(frozen=True)
class Key:
    """A key taken apart: `limb_darkening1[V].2` is name, label `V`, number 2."""

    name: str
    label: str | None = None
    number: int | None = None

    def __str__(self) -> str:
        text = self.name if self.label is None else f"{self.name}[{self.label}]"
        return text if self.number is None else f"{text}.{self.number}"

    @property
    def quantity(self) -> Quantity:
        """The register's entry."""
        return QUANTITIES[self.name]


@cache
def parse_key(text: str) -> Key:
    """Take a key apart; ValueError if it has not the form of one or names no quantity."""
    match = _KEY.match(text.strip())
    if match is None or match["name"] not in QUANTITIES:
        raise ValueError(f"{text!r} is not the name of a quantity")
    number = match["number"]
    return Key(match["name"], match["label"], None if number is None else int(number))


@cache
def key(name: str, label: str | None = None, number: int | None = None) -> str:
    """Put a key together."""
    return str(Key(name, label, number))


def quantity_of(text: str) -> Quantity:
    """The register's entry for a key."""
    return parse_key(text).quantity


def decimals_for(error: float, digits: int = 2) -> int:
    """Decimal places that show an error with `digits` significant digits; below 0: tens, hundreds ..."""
    if not isfinite(error) or error <= 0:
        return 6
    exponent = int(f"{error:.{digits - 1}e}".split("e")[1])
    return digits - 1 - exponent


def rounded(
    value: float, minus: float | None = None, plus: float | None = None
) -> tuple[str, str, str] | None:
    """Value, lower and upper error as text: two significant digits of the smaller error, the value to match.

    None where there is no error. This is the rule of everything that people read.
    """
    errors = [
        error for error in (minus, plus) if error is not None and isfinite(error) and error > 0
    ]
    if not errors:
        return None
    places = min(decimals_for(min(errors)), MOST_DECIMALS)
    shown = (round(each or 0.0, places) for each in (value, minus, plus))
    first, low, high = (f"{each:.{max(places, 0)}f}" for each in shown)
    return first, low, high


def written(value: float, minus: float | None = None, plus: float | None = None) -> str:
    """A value with its error in plain text, by the rule of `rounded`."""
    found = rounded(value, minus, plus)
    if found is None:
        return f"{value:.6g}"
    body, low, high = found
    return f"{body} \N{PLUS-MINUS SIGN} {low}" if low == high else f"{body} +{high} -{low}"
