"""From wishes and a start to the system that is fitted: which quantities it has, which are free."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import EFFECTS, Plan
from shadowscale.fit.system import System
from shadowscale.light.laws import LAWS
from shadowscale.quantities import Key, key, parse_key

if TYPE_CHECKING:
    from shadowscale.fit.limb import LimbChoice

GEOMETRY = ("period", "epoch", "radius_sum", "radius_ratio", "inclination")
SHAPE = ("ecosw", "esinw")


def means(name: str, text: str) -> bool:
    """Whether a user's `name` (`third_light`, `third_light[V]`) means the key `text`."""
    if name == text:
        return True
    wished, found = parse_key(name), parse_key(text)
    return (
        wished.name == found.name
        and wished.label in (None, found.label)
        and wished.number in (None, found.number)
    )


def is_basic(name: str) -> bool:
    """Whether the model is written in the quantity of a user's name."""
    return parse_key(name).quantity.basic


def is_third_light(text: str) -> bool:
    """Whether a key is the third light of some band."""
    return parse_key(text).name == "third_light"


def named(names: Iterable[str], text: str) -> str | None:
    """The user's name that means the key, the most precise first."""
    fitting = [name for name in names if means(name, text)]
    return max(fitting, key=len) if fitting else None


def tied_keys(plan: Plan, values: Iterable[str]) -> dict[str, str]:
    """Which of the keys follow which: the wishes spelled out for bands, sources and coefficients."""
    keys, found = tuple(values), {}
    for text in keys:
        if (wish := named(plan.ties, text)) is None:
            continue
        own, leader = parse_key(text), parse_key(plan.ties[wish])
        followed = str(Key(leader.name, leader.label or own.label, own.number))
        if followed in keys:
            found[text] = followed
    return found


def build_system(
    plan: Plan,
    photometry: Photometry,
    velocities: Velocities | None,
    *,
    start: Mapping[str, float],
    limb: Mapping[tuple[int, str], LimbChoice],
    eccentric: bool,
    levels: str,
    wavelengths: Mapping[str, float],
) -> System:
    """The system at `start` (geometry, `surface_brightness_ratio[band]`, velocities), ready to be fitted."""
    values: dict[str, float] = {name: float(start[name]) for name in (*GEOMETRY, *SHAPE)}
    free: list[str] = list(GEOMETRY)
    if eccentric:
        free += SHAPE
    _add_velocities(values, free, velocities, start)
    for band in photometry.bands:
        _add_band(values, free, plan, band, start=start, limb=limb)
    asked = [*plan.free, *(prior.name for prior in plan.priors if is_basic(prior.name))]
    for name in values:
        if (wish := named(plan.fixed, name)) is not None and not name.startswith("limb_darkening"):
            values[name] = plan.fixed[wish][0]
            free = [each for each in free if each != name]
        elif (
            name not in free
            and not name.startswith("limb_darkening")
            and named(asked, name) is not None
        ):
            free.append(name)
    stars = [star for star in (1, 2) if f"K{star}" in values]
    ties = tied_keys(plan, values)
    system = System(
        values=values,
        free=tuple(name for name in free if name not in ties),
        law=plan.law,
        bands=photometry.bands,
        sources=() if velocities is None else velocities.sources,
        priors=plan.priors,
        exposure=plan.exposure,
        levels=levels,
        effects={name: plan.effects.get(name, "off") for name in EFFECTS},
        light_time=plan.light_time == "auto" and len(stars) == 2,
        wavelengths=dict(wavelengths),
        ties=ties,
    )
    return system.with_values({})


def _add_velocities(
    values: dict[str, float],
    free: list[str],
    velocities: Velocities | None,
    start: Mapping[str, float],
) -> None:
    if velocities is None:
        return
    for star, used in ((1, velocities.used1), (2, velocities.used2)):
        if not used.any():
            continue
        for name in (f"K{star}", f"gamma{star}"):
            values[name] = float(start[name])
            free.append(name)
        present = [
            name
            for n, name in enumerate(velocities.sources)
            if (used & (velocities.source == n)).any()
        ]
        for source in present[1:]:
            text = key(f"offset{star}", source)
            values[text] = float(start.get(text, 0.0))
            free.append(text)


def _add_band(
    values: dict[str, float],
    free: list[str],
    plan: Plan,
    band: str,
    *,
    start: Mapping[str, float],
    limb: Mapping[tuple[int, str], LimbChoice],
) -> None:
    brightness, third = key("surface_brightness_ratio", band), key("third_light", band)
    values[brightness] = float(start[brightness])
    values[third] = float(start.get(third, 0.0))
    free += [brightness, third]
    for star in (1, 2):
        choice = limb[star, band]
        for number in range(len(LAWS[plan.law].coefficients)):
            text = str(Key(f"limb_darkening{star}", band, number + 1))
            values[text] = choice.coefficients[number]
            if choice.free:
                free.append(text)
    for effect in EFFECTS:
        state = plan.effects.get(effect, "off")
        for star in (1, 2):
            if state != "off":
                values[key(f"{effect}{star}", band)] = float(
                    start.get(key(f"{effect}{star}", band), 0.0)
                )
            # Both stars' tides, and both beamings, have one shape: only their sum can be fitted.
            if state == "fitted" and (star == 1 or effect == "reflection"):
                free.append(key(f"{effect}{star}", band))
