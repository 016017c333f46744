"""The table of quantities, row by row, as words and numbers."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from math import isfinite

from shadowscale.fit.build import means, named, tied_keys
from shadowscale.fit.check import kind
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.solution import ASSUMED, DERIVED, FITTED, Estimate
from shadowscale.fit.system import System
from shadowscale.quantities import BAND, Quantity, parse_key
from shadowscale.session.session import Session
from shadowscale.view.grades import NOT_SAID, bar, grade, relative_error, strongest_correlations
from shadowscale.view.shown import shown_estimates
from shadowscale.view.written import plain_value, symbol, unit_sign, value_and_error

FREE, HELD, WITH_PRIOR, TIED = "free", "held", "with prior", "tied"
GROUPS = ("Stars and orbit", "Light", "Velocities", "What follows")
_VELOCITY = ("K1", "K2", "gamma1", "gamma2", "offset1", "offset2")


@dataclass(frozen=True)
class Row:
    """One quantity of the table; texts are ready for the screen.

    relative, of_what : the error over the value, or over what `of_what` names; bar : 0 to 1, for a glance
    grade : `well`, `fairly`, `badly` or empty; `strongest` names the strongest correlation
    """

    key: str
    symbol: str
    group: str
    meaning: str
    effect: str
    value: float
    value_text: str
    error_text: str
    unit: str
    state: str
    basic: bool
    lower: float
    upper: float
    step: float
    bounds_text: str
    relative: float | None = None
    of_what: str = ""
    bar: float = 0.0
    grade: str = NOT_SAID
    strongest: str = ""
    correlation: float = 0.0
    partner: str = ""
    tied_to: str = ""


def quantity_rows(session: Session) -> tuple[Row, ...]:
    """Basic quantities of the system, then derived ones of the solution."""
    system, solution = session.system, session.solution
    if system is None:
        return ()
    estimates = shown_estimates(session)
    strongest = {} if solution is None else strongest_correlations(solution)
    rows = [_basic_row(system, name, estimates.get(name)) for name in system.values]
    rows += [
        _row(
            system,
            name,
            estimate=estimate,
            state=estimate.how if estimate.how == ASSUMED else DERIVED,
        )
        for name, estimate in estimates.items()
        if not parse_key(name).quantity.basic
    ]
    rows = [_with_correlation(row, strongest) for row in rows]
    return tuple(sorted(rows, key=lambda row: GROUPS.index(row.group)))


def with_value(session: Session, name: str, value: float) -> Session:
    """The session with one basic quantity set by hand: a held one stays held there, a free one starts there.

    Raises
    ------
    ValueError
        If the value is outside the quantity's bounds; the message says which.
    """
    system = session.system
    if system is None:
        raise ValueError("there is no model yet: solve first, or place the markers")
    quantity = parse_key(name).quantity
    if not quantity.lower <= value <= quantity.upper:
        raise ValueError(f"{quantity.meaning} must lie in {bounds(quantity)}, found {value:g}")
    if name in system.ties:
        leader = system.ties[name]
        raise ValueError(f"{name} is tied to {leader}: change {leader}, or untie it first")
    plan = session.plan
    if name in system.free:
        plan = replace(plan, start={**plan.start, name: value})
    else:
        plan = replace(plan, fixed={**plan.fixed, name: _fixed_values(system, name, value)})
    return replace(session, system=system.with_values({name: value}), plan=plan)


def with_state(session: Session, name: str, state: str) -> Session:
    """The session with one basic quantity free, held at its present value, or with its prior."""
    system = session.system
    if system is None:
        return session
    held = _plan_name(name)
    plan = session.plan
    fixed = {key: values for key, values in plan.fixed.items() if key not in (name, held)}
    free = tuple(key for key in plan.free if key not in (name, held))
    priors = tuple(prior for prior in plan.priors if prior.name not in (name, held))
    plan = replace(plan, ties=_ties_without(session, system, held))
    if state == HELD:
        fixed[held] = _fixed_values(system, name, system.values[name])
    elif state == FREE:
        free = (*free, held)
    elif session.solution is not None and name in session.solution.estimates:
        estimate = session.solution.estimates[name]
        sigma = max(estimate.plus or 0.0, parse_key(name).quantity.step)
        priors = (*priors, Prior(held, (estimate.value,), (sigma,)))
    return replace(
        session,
        plan=replace(plan, fixed=fixed, free=free, priors=priors),
        system=_freed(system, name, state),
    )


def leaders(session: Session, name: str) -> tuple[str, ...]:
    """What a basic quantity can be tied to anew, as the plan names it; nothing where another follows it."""
    system, own = session.system, _plan_name(name)
    if system is None or any(_plan_name(leader) == own for leader in system.ties.values()):
        return ()
    tied = {_plan_name(key) for key in system.ties}
    names = dict.fromkeys(_plan_name(key) for key in system.values)
    names.pop(_plan_name(system.ties[name]) if name in system.ties else own)
    return tuple(
        other
        for other in names
        if other != own and other not in tied and kind(parse_key(other)) == kind(parse_key(own))
    )


def with_tie(session: Session, name: str, leader: str) -> Session:
    """The session with one basic quantity tied to another, one of its `leaders`.

    Raises
    ------
    ValueError
        If it cannot follow that one.
    """
    if leader not in leaders(session, name):
        raise ValueError(f"{name} cannot be tied to {leader}")
    freed = with_state(session, name, FREE)
    own, system = _plan_name(name), freed.system
    assert system is not None  # or it had no leaders
    plan = replace(
        freed.plan,
        free=tuple(each for each in freed.plan.free if each != own),
        ties={**freed.plan.ties, own: leader},
    )
    ties = {**system.ties, **tied_keys(Plan(ties={own: leader}), system.values)}
    free = tuple(key for key in system.free if key not in ties)
    system = replace(system, ties=ties, free=free).with_values({})
    return replace(freed, plan=plan, system=system)


def _ties_without(session: Session, system: System, own: str) -> dict[str, str]:
    """The plan's ties but for one name's; what a wish for every band tied else stays so, by name."""
    kept = {name: leader for name, leader in session.plan.ties.items() if not means(name, own)}
    for key, leader in system.ties.items():
        name = _plan_name(key)
        if name != own and named(kept, name) is None:
            kept[name] = _plan_name(leader)
    return kept


def with_prior(session: Session, name: str, value: float, *, sigma: float) -> Session:
    """The session with a Gaussian prior on one quantity."""
    kept = tuple(prior for prior in session.plan.priors if prior.name != name)
    plan = replace(session.plan, priors=(*kept, Prior(name, (value,), (sigma,))))
    return replace(session, plan=plan)


def bounds(quantity: Quantity) -> str:
    """The hard limits in words; empty where there are none."""
    low, high = quantity.lower, quantity.upper
    if not isfinite(low) and not isfinite(high):
        return ""
    shown = [f"{end:g}" if isfinite(end) else "\N{INFINITY}" for end in (low, high)]
    return f"{shown[0]} \N{HORIZONTAL ELLIPSIS} {shown[1]}".replace("-", "\N{MINUS SIGN}")


def _basic_row(system: System, name: str, estimate: Estimate | None) -> Row:
    value = system.values[name]
    state = FREE if name in system.free else HELD
    if any(prior.name in (name, _plan_name(name), parse_key(name).name) for prior in system.priors):
        state = WITH_PRIOR if state == FREE else HELD
    if name in system.ties:
        state = TIED
    if estimate is None or estimate.value != value:
        estimate = Estimate(value, None, None, FITTED)
    return replace(
        _row(system, name, estimate=estimate, state=state), tied_to=system.ties.get(name, "")
    )


def _row(system: System, name: str, *, estimate: Estimate, state: str) -> Row:
    quantity = parse_key(name).quantity
    value, error = value_and_error(name, estimate)
    if not error:
        value = plain_value(quantity, estimate.value).replace("-", "\N{MINUS SIGN}")
    relative, of_what = relative_error(system, quantity, estimate)
    return Row(
        key=name,
        symbol=symbol(name),
        group=_group(quantity),
        meaning=quantity.meaning,
        effect=quantity.effect or quantity.source,
        value=estimate.value,
        value_text=value,
        error_text=error,
        unit=unit_sign(quantity.unit),
        state=state,
        basic=quantity.basic,
        lower=quantity.lower,
        upper=quantity.upper,
        step=quantity.step,
        bounds_text=bounds(quantity) if quantity.basic else "",
        relative=relative,
        of_what=of_what,
        bar=bar(relative),
        grade=grade(relative),
    )


def _with_correlation(row: Row, strongest: Mapping[str, tuple[float, str]]) -> Row:
    found = strongest.get(row.key)
    if found is None:
        return row
    value, other = found
    text = f"{value:+.2f} {_beside(row.key, other)}".replace("-", "\N{MINUS SIGN}")
    return replace(
        row, strongest=text if abs(value) >= 0.1 else "", correlation=value, partner=other
    )


def _beside(key: str, other: str) -> str:
    """The other's symbol; its band or source goes without saying where it is the same."""
    label = parse_key(key).label
    text = symbol(other)
    return text.removesuffix(f" {label}") if parse_key(other).label == label else text


def _group(quantity: Quantity) -> str:
    if not quantity.basic:
        return GROUPS[3]
    if quantity.name in _VELOCITY:
        return GROUPS[2]
    return GROUPS[1] if quantity.scope == BAND else GROUPS[0]


def _plan_name(name: str) -> str:
    """The name that the plan uses: limb darkening is held by star and band, all coefficients."""
    key = parse_key(name)
    return name if key.number is None else str(replace(key, number=None))


def _fixed_values(system: System, name: str, value: float) -> tuple[float, ...]:
    key = parse_key(name)
    if key.number is None or key.label is None:
        return (value,)
    values = list(system.limb_darkening(int(key.name[-1]), key.label))
    values[key.number - 1] = value
    return tuple(values)


def _freed(system: System, name: str, state: str) -> System:
    """The system with the key's freedom changed at once, so that the table shows it before the fit ends."""
    stem = _plan_name(name)
    keys = [key for key in system.values if _plan_name(key) == stem]
    free = tuple(key for key in system.free if key not in keys)
    if state != HELD:
        free += tuple(keys)
    ties = {key: leader for key, leader in system.ties.items() if key not in keys}
    return replace(system, free=free, ties=ties)
