"""Numbers and units as a screen shows them."""

from __future__ import annotations

import re
from collections.abc import Mapping
from math import floor, isfinite, log10
from types import MappingProxyType

from shadowscale.fit.solution import Estimate
from shadowscale.quantities import Quantity, parse_key, rounded

UNIT_SIGNS: Mapping[str, str] = MappingProxyType(
    {
        "": "",
        "solMass": "M\N{SUN}",
        "solRad": "R\N{SUN}",
        "solLum": "L\N{SUN}",
        "deg": "\N{DEGREE SIGN}",
        "kg/m3": "kg/m\N{SUPERSCRIPT THREE}",
        "dex(cm/s2)": "cgs",
    }
)
GREEK: Mapping[str, str] = MappingProxyType(  # the register spells them for typewriters
    {
        "w": "\N{GREEK SMALL LETTER OMEGA}",
        "gamma": "\N{GREEK SMALL LETTER GAMMA}",
        "rho": "\N{GREEK SMALL LETTER RHO}",
    }
)


def unit_sign(unit: str) -> str:
    """A unit as the screen shows it."""
    return UNIT_SIGNS.get(unit, unit)


def symbol(text: str) -> str:
    """Short name of a key: `third_light[V]` becomes `l3 V`."""
    key = parse_key(text)
    parts = [_with_greek(key.quantity.symbol)]
    if key.number is not None:
        parts[0] += "." + str(key.number)
    if key.label is not None:
        parts.append(key.label)
    return " ".join(parts)


def _with_greek(text: str) -> str:
    for letters, sign in GREEK.items():
        text = re.sub(rf"\b{letters}(?=\d?$)", sign, text)
    return text


def plain_value(quantity: Quantity, value: float) -> str:
    """A value without an error, with the decimals that the quantity's step asks for."""
    if not isfinite(value):
        return "\N{EM DASH}"
    return f"{value:.{_step_places(quantity) + 1}f}"


def value_and_error(text: str, estimate: Estimate) -> tuple[str, str]:
    """The two columns of a table: the value, and its error (empty where it is held)."""
    quantity = parse_key(text).quantity
    found = rounded(estimate.value, estimate.minus, estimate.plus)
    if found is None:
        return plain_value(quantity, estimate.value), ""
    value, low, high = found
    shown = f"\N{PLUS-MINUS SIGN}{low}" if low == high else f"+{high} \N{MINUS SIGN}{low}"
    return value.replace("-", "\N{MINUS SIGN}"), shown


def one_line(text: str, estimate: Estimate) -> str:
    """Value, error and unit in one line."""
    value, error = value_and_error(text, estimate)
    unit = unit_sign(parse_key(text).quantity.unit)
    return " ".join(part for part in (value, error, unit) if part)


def phase_text(phase: float) -> str:
    """A phase as a marker shows it."""
    return f"{phase:.5f}".replace("-", "\N{MINUS SIGN}")


def read_number(text: str) -> float:
    """A number as a person types it: decimal comma and the typographic minus are understood.

    Raises
    ------
    ValueError
        If the text is no number; the message says what was found.
    """
    plain = (
        text.strip().replace("\N{MINUS SIGN}", "-").replace(",", ".").replace("\N{DEGREE SIGN}", "")
    )
    try:
        value = float(plain.split()[0]) if plain else float("nan")
    except ValueError:
        raise ValueError(f"expected a number, found {text!r}") from None
    if not isfinite(value):
        raise ValueError(f"expected a number, found {text!r}")
    return value


def time_zero(first: float) -> int:
    """The whole days to take off full Julian dates so that an axis stays readable."""
    return 0 if abs(first) < 1e5 else floor(first / 1000.0) * 1000


def duration_text(seconds: float) -> str:
    """A time left, in words."""
    if seconds < 60:
        return f"{max(seconds, 0):.0f} s"
    return f"{seconds // 60:.0f} min {seconds % 60:.0f} s"


def _step_places(quantity: Quantity) -> int:
    return max(0, -floor(log10(quantity.step) + 1e-9))
