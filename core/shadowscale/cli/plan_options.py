"""The options of `solve` that say what is wished, and the plan they make."""

from __future__ import annotations

from argparse import Namespace
from dataclasses import fields
from typing import Any

from shadowscale.cli.parser import Parser, choice, measured, number, numbers, pairs
from shadowscale.errors import UsageError
from shadowscale.fit.plan import (
    EFFECT_STATES,
    EFFECTS,
    INTERVALS,
    LEVELS,
    LIGHT_TIME,
    MEASURED,
    ORBITS,
    Plan,
    Prior,
)
from shadowscale.quantities import QUANTITIES, parse_key

BASIC = tuple(name for name, quantity in QUANTITIES.items() if quantity.basic)
LIMB = ("limb_darkening1", "limb_darkening2")


def add_plan_options(parser: Parser) -> None:
    """The options, in the order of the documentation."""
    start = parser.add_argument_group("where to start")
    start.add_argument("--period", metavar="DAYS", help="found from the photometry where missing")
    start.add_argument(
        "--epoch", metavar="TIME", help="time of a primary minimum, full Julian date"
    )
    model = parser.add_argument_group("model")
    model.add_argument("--exposure", metavar="SECONDS", help="exposure time, default 0")
    model.add_argument("--law", metavar="NAME", help="limb darkening, default power-2")
    model.add_argument(
        "--wavelength", metavar="BAND=NM", action="append", default=[], help="of a band [nm]"
    )
    model.add_argument("--limb-table", metavar="FILE", help="published limb-darkening coefficients")
    model.add_argument("--orbit", metavar="KIND", help=_listed(ORBITS, "auto"))
    model.add_argument("--levels", metavar="KIND", help=_listed(LEVELS, "auto"))
    model.add_argument("--light-time", metavar="KIND", help=_listed(LIGHT_TIME, "auto"))
    model.add_argument(
        "--effect",
        metavar="NAME=STATE",
        action="append",
        default=[],
        help=f"{', '.join(EFFECTS)}: {', '.join(EFFECT_STATES)}",
    )
    wishes = parser.add_argument_group("single quantities (may be repeated)")
    for option, form, words in (
        ("--free", "NAME", "fit this one, too"),
        ("--fix", "NAME=VALUE", "hold this one; limb_darkening1[V]=0.40,0.25"),
        (
            "--prior",
            "NAME=VALUE,SIGMA",
            "what is known of it from elsewhere; limb_darkening1[V]=0.40,0.02,0.25,0.03",
        ),
        ("--tie", "NAME=NAME", "the first has the value of the second; gamma2=gamma1"),
    ):
        wishes.add_argument(option, metavar=form, action="append", default=[], help=words)
    results = parser.add_argument_group("results")
    results.add_argument("--intervals", metavar="NAME", help=_listed(INTERVALS, "covariance"))
    results.add_argument("--seed", metavar="N", help="every random step repeats")
    for option, words in (
        ("--teff1", "effective temperature of star 1, for luminosities"),
        ("--teff2", "effective temperature of star 2"),
        ("--apparent-magnitude", "for the distance, with the next three"),
        ("--bolometric-correction1", "of star 1 in the band of that magnitude"),
        ("--bolometric-correction2", "of star 2"),
        ("--extinction", "in that band"),
    ):
        results.add_argument(option, metavar="VALUE,SIGMA", help=words)


def plan_from(arguments: Namespace) -> Plan:
    """The plan that the options make.

    Raises
    ------
    UsageError
        Naming the option, what was found and what is allowed.
    """
    from shadowscale.light.laws import LAWS

    plain: dict[str, Any] = {
        "period": _optional(arguments, "period", above=0.0),
        "epoch": _optional(arguments, "epoch"),
        "law": _choice(arguments, "law", tuple(LAWS)),
        "orbit": _choice(arguments, "orbit", ORBITS),
        "levels": _choice(arguments, "levels", LEVELS),
        "light_time": _choice(arguments, "light_time", LIGHT_TIME),
        "intervals": _choice(arguments, "intervals", INTERVALS),
        "limb_table": arguments.limb_table,
        "exposure": _exposure(arguments.exposure),
        "seed": _seed(arguments.seed),
        **{name: measured(_option(name), getattr(arguments, name)) for name in MEASURED},
    }
    return Plan(
        **{name: value for name, value in plain.items() if value is not None},
        wavelengths=_wavelengths(arguments.wavelength),
        effects=_effects(arguments.effect),
        free=tuple(_basic("--free", text) for text in arguments.free),
        fixed=_fixed(arguments.fix),
        priors=tuple(_prior(text) for text in arguments.prior),
        ties=_ties(arguments.tie),
    )


def given_options(arguments: Namespace) -> list[str]:
    """The plan options that were given, as typed."""
    names = {"fix", "prior", "tie", "effect", "wavelength"} | {item.name for item in fields(Plan)}
    return sorted(_option(name) for name in names if getattr(arguments, name, None))


def _option(name: str) -> str:
    return "--" + name.replace("_", "-")


def _listed(words: tuple[str, ...], default: str) -> str:
    return f"{', '.join(words)}; default {default}"


def _optional(arguments: Namespace, name: str, *, above: float | None = None) -> float | None:
    text = getattr(arguments, name)
    return None if text is None else number(_option(name), text, above=above)


def _choice(arguments: Namespace, name: str, allowed: tuple[str, ...]) -> str | None:
    text = getattr(arguments, name)
    return None if text is None else choice(_option(name), text, allowed)


def _exposure(text: str | None) -> float | None:
    if text is None:
        return None
    seconds = number("--exposure", text)
    if seconds < 0:
        raise UsageError("--exposure", text, expected="seconds, 0 or more")
    return seconds


def _seed(text: str | None) -> int | None:
    if text is None:
        return None
    if not text.isdecimal():
        raise UsageError("--seed", text, expected="a whole number, 0 or more")
    return int(text)


def _wavelengths(items: list[str]) -> dict[str, float]:
    found = pairs("--wavelength", items, form="BAND=NANOMETRES")
    return {band: number("--wavelength", text, above=0.0) for band, text in found.items()}


def _effects(items: list[str]) -> dict[str, str]:
    found = pairs("--effect", items, form="NAME=STATE")
    return {
        choice("--effect", name, EFFECTS): choice("--effect", state, EFFECT_STATES)
        for name, state in found.items()
    }


def _named(option: str, text: str, allowed: tuple[str, ...]) -> str:
    """The name of a quantity, checked against the register."""
    try:
        parsed = parse_key(text)
    except ValueError:
        raise UsageError(option, text, allowed) from None
    if parsed.name not in allowed:
        derived = "a quantity that is fitted; of a derived one all that can be said is --prior"
        known = parsed.name in QUANTITIES
        raise UsageError(option, text, allowed, expected=derived if known else "")
    return str(parsed)


def _basic(option: str, text: str) -> str:
    return _named(option, text, BASIC)


def _fixed(items: list[str]) -> dict[str, tuple[float, ...]]:
    found: dict[str, tuple[float, ...]] = {}
    for name, text in pairs("--fix", items, form="NAME=VALUE").items():
        wanted = _basic("--fix", name)
        values = numbers("--fix", text)
        if len(values) > 1 and parse_key(wanted).name not in LIMB:
            raise UsageError("--fix", f"{name}={text}", expected="one value")
        _in_bounds("--fix", wanted, values)
        found[wanted] = values
    return found


def _ties(items: list[str]) -> dict[str, str]:
    found = pairs("--tie", items, form="NAME=NAME")
    return {_basic("--tie", name): _basic("--tie", leader) for name, leader in found.items()}


def _prior(text: str) -> Prior:
    """NAME=VALUE,SIGMA; limb darkening takes a pair for each coefficient."""
    form = "NAME=VALUE,SIGMA"
    ((name, rest),) = pairs("--prior", [text], form=form).items()
    wanted = _named("--prior", name, tuple(QUANTITIES))
    found = numbers("--prior", rest)
    many = parse_key(wanted).name in LIMB
    if len(found) % 2 or (len(found) != 2 and not many):
        raise UsageError("--prior", text, expected=form + (" for each coefficient" if many else ""))
    values, sigmas = found[0::2], found[1::2]
    if min(sigmas) <= 0:
        raise UsageError("--prior", text, expected=f"{form} with SIGMA above 0")
    return Prior(wanted, values, sigmas)


def _in_bounds(option: str, name: str, values: tuple[float, ...]) -> None:
    quantity = QUANTITIES[parse_key(name).name]
    for value in values:
        if not quantity.lower <= value <= quantity.upper:
            expected = f"{quantity.name} from {quantity.lower:g} to {quantity.upper:g}"
            raise UsageError(option, f"{value:g}", expected=expected)
