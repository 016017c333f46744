"""Usual names of photometric bands and their effective wavelengths.

All values are rounded and from memory (common practice); they serve only to start limb darkening
where nothing better is given.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from types import MappingProxyType

WAVELENGTHS: Mapping[str, float] = MappingProxyType(  # [nm] effective, from memory
    {
        # Johnson, Cousins
        "U": 366.0,
        "B": 438.0,
        "V": 545.0,
        "R": 641.0,
        "I": 798.0,
        "Rc": 641.0,
        "Ic": 798.0,
        "Rj": 700.0,
        "Ij": 900.0,
        # near infrared
        "Y": 1020.0,
        "J": 1235.0,
        "H": 1662.0,
        "K": 2190.0,
        "Ks": 2159.0,
        # Stroemgren (its u is taken for the Sloan band)
        "v": 411.0,
        "b": 467.0,
        "y": 547.0,
        # Sloan
        "u": 355.0,
        "g": 477.0,
        "r": 623.0,
        "i": 762.0,
        "z": 913.0,
        # space
        "Kepler": 630.0,
        "K2": 630.0,
        "TESS": 787.0,
        "CoRoT": 650.0,
        "CHEOPS": 600.0,
        "G": 622.0,
        "BP": 511.0,
        "RP": 777.0,
        "Hp": 510.0,
        "BT": 420.0,
        "VT": 532.0,
        # wide or none
        "clear": 600.0,
        "CV": 600.0,
        "white": 600.0,
        "L": 550.0,
        "TG": 530.0,
        "TB": 460.0,
        "TR": 600.0,
    }
)

_OTHER_NAMES: Mapping[str, str] = MappingProxyType(
    {
        "rcousins": "Rc",
        "icousins": "Ic",
        "kp": "Kepler",
        "kep": "Kepler",
        "tmag": "TESS",
        "gaia": "G",
        "gbp": "BP",
        "grp": "RP",
        "bpmag": "BP",
        "rpmag": "RP",
        "none": "clear",
        "open": "clear",
        "unfiltered": "clear",
        "cr": "clear",
        "c": "clear",
        "lum": "L",
        "luminance": "L",
        "hipparcos": "Hp",
    }
)
_SYSTEMS = re.compile(
    r"(?i)^(johnson|cousins|bessell?|sloan|sdss|gaia|stro?e?mgren|generic|tycho2?|2mass|ps1?|panstarrs)[\W_]*"
)


def band_name(text: str) -> str | None:
    """The usual name of a band from the many ways to write it; None if it is not known.

    Upper and lower case differ (`R`, `r`); a trailing prime (`g'`) is ignored, and so is a
    leading name of a photometric system (`Johnson V`, `SDSS r`).
    """
    plain = _SYSTEMS.sub("", text.strip().strip("'\"")).rstrip("'\N{PRIME} _")
    for name in (text.strip(), plain):
        if name in WAVELENGTHS:
            return name
    lower = plain.lower() or text.strip().lower()
    if lower in _OTHER_NAMES:
        return _OTHER_NAMES[lower]
    if len(lower) < 2:
        return None
    return next((name for name in WAVELENGTHS if name.lower() == lower), None)


def wavelength_of(band: str) -> float | None:
    """Effective wavelength of a band [nm], None where its name is not known."""
    name = band_name(band)
    return None if name is None else WAVELENGTHS[name]
