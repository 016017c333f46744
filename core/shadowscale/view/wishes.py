"""The plan as controls show it: words for its values, and small changes of it."""

from __future__ import annotations

from dataclasses import replace

from shadowscale.fit.plan import Plan
from shadowscale.session.session import Session

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
    """`free` or `held`, as the plan has third light in that band."""
    names = (f"third_light[{band}]", "third_light")
    return "free" if any(name in plan.free for name in names) else "held"


def with_third_light(plan: Plan, band: str, *, free: bool) -> Plan:
    """The plan with third light of one band free, or held at its present value."""
    name = f"third_light[{band}]"
    others = tuple(each for each in plan.free if each not in (name, "third_light"))
    fixed = {each: values for each, values in plan.fixed.items() if each != name}
    return replace(plan, free=(*others, name) if free else others, fixed=fixed)


def asks_for_solution(before: Session, after: Session) -> bool:
    """Whether what changed between two sessions changes what a fit would find."""
    if before.photometry is not after.photometry or before.velocities is not after.velocities:
        return after.photometry is not None
    if replace(before.plan, start={}) != replace(after.plan, start={}):
        return True
    spans = [session.markers.excluded if session.markers else () for session in (before, after)]
    return spans[0] != spans[1]
