"""Whether the words and numbers of a session file make sense, beyond having the right types."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from math import isfinite

from shadowscale.fit.plan import (
    EFFECT_STATES,
    EFFECTS,
    INTERVALS,
    LEVELS,
    LIGHT_TIME,
    MEASURED,
    ORBITS,
    Plan,
)
from shadowscale.fit.system import System
from shadowscale.light.laws import LAWS
from shadowscale.quantities import parse_key
from shadowscale.session.plain import PlainError
from shadowscale.session.session import Session

TABLES = ("light", "rv1", "rv2")


def check_sense(session: Session) -> None:
    """PlainError for the first word or number of a session that cannot be meant."""
    _check_plan(session.plan, "session.plan")
    if session.system is not None:
        _check_system(session.system, "session.system")
    if session.solution is not None:
        _check_system(session.solution.system, "session.solution.system")
    for number, kept in enumerate(session.kept):
        _check_plan(kept.plan, f"session.kept[{number}].plan")
        _check_system(kept.system, f"session.kept[{number}].system")
        _check_system(kept.solution.system, f"session.kept[{number}].solution.system")
    for number, exclusion in enumerate(session.exclusions):
        _word(exclusion.table, TABLES, f"session.exclusions[{number}].table")


def _check_plan(plan: Plan, where: str) -> None:
    for name, allowed in (
        ("law", tuple(LAWS)),
        ("orbit", ORBITS),
        ("intervals", INTERVALS),
        ("levels", LEVELS),
        ("light_time", LIGHT_TIME),
    ):
        _word(getattr(plan, name), allowed, f"{where}.{name}")
    for name, state in plan.effects.items():
        _word(name, EFFECTS, f"{where}.effects")
        _word(state, EFFECT_STATES, f"{where}.effects.{name}")
    for place, number, lowest in _numbers(plan):
        _number(number, lowest, f"{where}.{place}")
    _quantities((*plan.free, *plan.fixed, *plan.start, *plan.ties, *plan.ties.values()), where)
    _quantities((prior.name for prior in plan.priors), f"{where}.priors")


def _numbers(plan: Plan) -> Iterator[tuple[str, float, float | None]]:
    """Place, value and lowest value (None: any) of every number of a plan."""
    yield "exposure", plan.exposure, 0.0
    yield "seed", plan.seed, 0.0
    if plan.period is not None:
        yield "period", plan.period, 1e-6
    if plan.epoch is not None:
        yield "epoch", plan.epoch, None
    for band, wavelength in plan.wavelengths.items():
        yield f"wavelengths.{band}", wavelength, 1e-6
    for name, value in plan.start.items():
        yield f"start.{name}", value, None
    for name, values in plan.fixed.items():
        yield from ((f"fixed.{name}", value, None) for value in values)
    for prior in plan.priors:
        yield from ((f"priors.{prior.name}", value, None) for value in prior.values)
        yield from ((f"priors.{prior.name}.sigmas", value, 1e-300) for value in prior.sigmas)
    for name in MEASURED:
        if (pair := getattr(plan, name)) is not None:
            yield name, pair[0], None
            yield f"{name}[1]", pair[1], 1e-300


def _check_system(system: System, where: str) -> None:
    _word(system.law, tuple(LAWS), f"{where}.law")
    _quantities(system.values, f"{where}.values")
    for name, value in system.values.items():
        _number(value, None, f"{where}.values.{name}")
    for name in system.free:
        _word(name, tuple(system.values), f"{where}.free")
    for name, leader in system.ties.items():
        _word(name, tuple(system.values), f"{where}.ties")
        _word(leader, tuple(system.values), f"{where}.ties.{name}")
    for name in ("period", "epoch", "radius_sum", "radius_ratio", "inclination", "ecosw", "esinw"):
        if name not in system.values:
            raise PlainError(f"{where}.values", f"a value for {name!r}", "none")


def _word(word: str, allowed: tuple[str, ...], where: str) -> None:
    if word not in allowed:
        raise PlainError(where, "one of " + ", ".join(allowed), repr(word))


def _number(value: float, lowest: float | None, where: str) -> None:
    if not isfinite(value):
        raise PlainError(where, "a finite number", str(value))
    if lowest is not None and value < lowest:
        limit = f"{lowest:g} or more" if lowest == 0 else "above 0"
        raise PlainError(where, f"a number {limit}", f"{value:g}")


def _quantities(names: Iterable[str], where: str) -> None:
    for name in names:
        try:
            parse_key(name)
        except ValueError:
            raise PlainError(where, "the name of a quantity", repr(name)) from None
