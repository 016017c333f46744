"""Numbers and the opening sentences of the report."""

from __future__ import annotations

from collections.abc import Iterator

from shadowscale.fit.solution import Estimate
from shadowscale.judge.finding import ABSENT, FAIL, WARN
from shadowscale.quantities import rounded
from shadowscale.sheet.sheet import Sheet
from shadowscale.sheet.symbols import unit_words

MINUS, PLUS_MINUS = "\N{MINUS SIGN}", "\N{PLUS-MINUS SIGN}"


def number(value: float, digits: int = 6) -> str:
    """A number as people read it."""
    return f"{value:.{digits}g}".replace("-", MINUS)


def value_and_error(estimate: Estimate) -> tuple[str, str]:
    """Value and error, the error to two digits; no error where the value is held."""
    found = rounded(estimate.value, estimate.minus, estimate.plus)
    if found is None:
        return number(estimate.value), ""
    value, low, high = found
    shown = f"{PLUS_MINUS} {low}" if low == high else f"+{high} {MINUS}{low}"
    return value.replace("-", MINUS), shown


def glance(sheet: Sheet) -> str:
    """What the system is, in two or three sentences."""
    return " ".join(_glance(sheet))


def _glance(sheet: Sheet) -> Iterator[str]:
    value = {name: entry.estimate.value for name, entry in sheet.quantities.items()}
    orbit = (
        "a circular orbit"
        if value["eccentricity"] == 0
        else f"an orbit of eccentricity {value['eccentricity']:.3f}"
    )
    if {"M1", "M2", "R1", "R2"} <= set(value):
        yield (
            f"Two stars of {value['M1']:.3g} and {value['M2']:.3g} {unit_words('solMass')}, with radii "
            f"of {value['R1']:.3g} and {value['R2']:.3g} {unit_words('solRad')}, go round each other "
            f"in {value['period']:.6g} d on {orbit}."
        )
    else:
        yield (
            f"Two stars with radii of {value['r1']:.3g} and {value['r2']:.3g} of the semi-major axis "
            f"go round each other in {value['period']:.6g} d on {orbit}; without velocities of both "
            "stars the scale of the system is open."
        )
    yield _kinds(sheet, value)
    yield _doubts(sheet)


def _kinds(sheet: Sheet, value: dict[str, float]) -> str:
    words = []
    for eclipse, name in ((1, "primary"), (2, "secondary")):
        if f"T14_{eclipse}" not in value:
            continue
        hours = 24 * value[f"T14_{eclipse}"]
        larger_behind = (value["r1"] > value["r2"]) == (eclipse == 1)
        kind = "partial"
        if f"T23_{eclipse}" in value:
            kind = "annular" if larger_behind else "total"
        depth = value.get(f"depth{eclipse}")
        deep = f", {100 * depth:.3g}\N{NO-BREAK SPACE}% deep" if depth is not None else ""
        words.append(f"{name} eclipse is {kind} and takes {hours:.3g} hours{deep}")
    return f"The {' ; the '.join(words)}.".replace(" ;", ";") if words else ""


def _doubts(sheet: Sheet) -> str:
    checks = [each for each in sheet.audit if not each.check.startswith(ABSENT)]
    failed = sum(each.verdict == FAIL for each in checks)
    warned = sum(each.verdict == WARN for each in checks)
    if failed or warned:
        parts = [f"{failed} failed"] if failed else []
        parts += [f"{warned} should be read before the numbers are used"] if warned else []
        return f"Of {len(checks)} checks {' and '.join(parts)}."
    return f"All {len(checks)} checks of the audit are passed." if checks else ""
