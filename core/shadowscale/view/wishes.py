"""The plan as controls show it: words for its values, and small changes of it."""

from __future__ import annotations

from dataclasses import replace

from shadowscale.fit.build import means, named
from shadowscale.fit.plan import Plan
from shadowscale.quantities import key
from shadowscale.session.session import Markers, Session
from shadowscale.view.curves import contact_system
from shadowscale.view.written import read_number

GEOMETRY = ("radius_sum", "radius_ratio", "inclination", "ecosw", "esinw")
LAW_NAMES = ("linear", "quadratic", "square-root", "logarithmic", "power-2", "four-parameter")
ORBIT_WORDS = {"auto": "as the data decide", "circular": "circular", "eccentric": "eccentric"}
LEVEL_WORDS = {
    "auto": "as the data decide",
    "one": "one a band",
    "night": "one a night",
    "trend": "level and slope a night",
}
EFFECT_WORDS = {
    "ellipsoidal": "Each star is drawn out by the other's tide.",
    "reflection": "Each star returns some of the other's light.",
    "beaming": "An approaching star looks brighter.",
}


def third_light_wish(plan: Plan, band: str) -> str:
    """`free`, `none` or `held` at another value, as the plan has third light in that band."""
    wish = named(plan.fixed, key("third_light", band))
    if wish is None:
        return "free"
    return "none" if plan.fixed[wish] == (0.0,) else "held"


def with_third_light(plan: Plan, band: str, *, held: float | None) -> Plan:
    """The plan with third light of one band held at a value, or free where `held` is None."""
    name = key("third_light", band)
    fixed = {each: values for each, values in plan.fixed.items() if not means(each, name)}
    free = tuple(each for each in plan.free if not means(each, name))
    return replace(plan, free=free, fixed=fixed if held is None else {**fixed, name: (held,)})


def asks_for_solution(before: Session, after: Session) -> bool:
    """Whether what changed between two sessions asks for a new fit."""
    return outdates(before, after) or _contacts(before.markers) != _contacts(after.markers)


def outdates(before: Session, after: Session) -> bool:
    """Whether a solution of one session is none of the other: contacts are only where a fit begins."""
    if before.photometry is not after.photometry or before.velocities is not after.velocities:
        return after.photometry is not None
    if replace(before.plan, start={}) != replace(after.plan, start={}):
        return True
    return _stretches(before.markers) != _stretches(after.markers)


def for_refit(session: Session) -> Session:
    """The session with a plan that starts where the work stands: its ephemeris, and what the markers say."""
    system, plan = session.system, session.plan
    if system is None:
        return session
    start = dict(plan.start)
    moved = contact_system(session)
    if moved is not None:
        start |= {name: moved.values[name] for name in GEOMETRY if name in moved.free}
    fresh = replace(
        plan,
        period=plan.period or system.value("period"),
        epoch=plan.epoch or system.value("epoch"),
        start=start,
    )
    return replace(session, plan=fresh)


def read_pair(text: str) -> tuple[float, float] | None:
    """A value with its sigma as a person types it: `6350 110`, `6350 +- 110`; None for an empty text.

    Raises
    ------
    ValueError
        If there are not two numbers, or sigma is not positive.
    """
    words = text.replace("\N{PLUS-MINUS SIGN}", " ").replace("+-", " ").replace("+/-", " ").split()
    if not words:
        return None
    if len(words) != 2:
        raise ValueError(f"expected a value and its sigma, such as 6350 110, found {text!r}")
    value, sigma = read_number(words[0]), read_number(words[1])
    if sigma <= 0:
        raise ValueError(f"sigma must be positive, found {sigma:g}")
    return value, sigma


def written_pair(pair: tuple[float, float] | None) -> str:
    """The text that `read_pair` reads back."""
    return "" if pair is None else f"{pair[0]:g} \N{PLUS-MINUS SIGN} {pair[1]:g}"


def with_wavelength(plan: Plan, band: str, nanometres: float) -> Plan:
    """The plan with the wavelength of one band [nm]; 0: as the band's name has it."""
    others = {name: value for name, value in plan.wavelengths.items() if name != band}
    return replace(plan, wavelengths={**others, band: nanometres} if nanometres > 0 else others)


def _contacts(markers: Markers | None) -> tuple[object, ...]:
    return () if markers is None else (markers.primary, markers.secondary)


def _stretches(markers: Markers | None) -> tuple[object, ...]:
    """Which points take part; the windows say so only where stretches say which count beside them."""
    if markers is None:
        return ((), (), ())
    windows = (markers.primary_window, markers.secondary_window) if markers.level else ()
    return (markers.excluded, markers.level, windows)
