"""Whether a plan can be meant: names, numbers and choices, against the data that are there."""

from __future__ import annotations

from collections.abc import Mapping
from difflib import get_close_matches

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.errors import NotConstrainedError, UsageError
from shadowscale.fit.build import is_basic, means
from shadowscale.fit.derived import assumed_inputs, derived_value
from shadowscale.fit.least_squares import covariance
from shadowscale.fit.plan import (
    EFFECT_STATES,
    EFFECTS,
    INTERVALS,
    LEVELS,
    LIGHT_TIME,
    ORBITS,
    Plan,
    Prior,
)
from shadowscale.fit.problem import Fitted
from shadowscale.fit.system import System
from shadowscale.light.laws import LAWS
from shadowscale.quantities import BAND, QUANTITIES, SOURCE, Key, parse_key

OTHER_CLOCK = 100_000.0  # [d] no data are so far from their epoch, but JD and MJD are
LEAST_MOTION = 2.0  # sigmas of a K below which a star is not seen to move
UNEXPLAINED = 0.7  # share of a star's velocity scatter that an orbit may leave


def check_plan(plan: Plan, photometry: Photometry, velocities: Velocities | None) -> None:
    """UsageError where the plan names a quantity, band, source or choice that is not there."""
    _check_choices(plan, photometry.bands)
    _check_clock(plan, photometry)
    sources = () if velocities is None else velocities.sources
    for option, name, basic_only in _names(plan):
        _check_name(option, name, basic_only=basic_only, bands=photometry.bands, sources=sources)
    for name, values in plan.fixed.items():
        _check_fixed(name, values)
    for prior in plan.priors:
        _check_prior(prior)
    for name, leader in plan.ties.items():
        _check_tie(plan, name, leader)
    both = [p.name for p in plan.priors for name in plan.fixed if _same(p.name, name)]
    if both:
        raise UsageError("--prior", both[0], expected="a quantity that is not held by --fix")


def _same(one: str, two: str) -> bool:
    return means(one, two) or means(two, one)


def _names(plan: Plan) -> list[tuple[str, str, bool]]:
    return [
        *(("--free", name, True) for name in plan.free),
        *(("--fix", name, True) for name in plan.fixed),
        *(("--prior", prior.name, False) for prior in plan.priors),
        *(("--tie", name, True) for pair in plan.ties.items() for name in pair),
    ]


def _check_choices(plan: Plan, bands: tuple[str, ...]) -> None:
    choices: list[tuple[str, str, tuple[str, ...]]] = [
        ("--law", plan.law, tuple(LAWS)),
        ("--orbit", plan.orbit, ORBITS),
        ("--levels", plan.levels, LEVELS),
        ("--light-time", plan.light_time, LIGHT_TIME),
        ("--intervals", plan.intervals, INTERVALS),
        *(("--effect", name, EFFECTS) for name in plan.effects),
        *(("--wavelength", band, bands) for band in plan.wavelengths),
        *(("--effect", state, EFFECT_STATES) for state in plan.effects.values()),
    ]
    for option, found, allowed in choices:
        if found not in allowed:
            raise UsageError(option, found, allowed)


def _check_clock(plan: Plan, photometry: Photometry) -> None:
    if plan.epoch is None or photometry.time.size == 0:
        return
    middle = float(np.median(photometry.time))
    if abs(plan.epoch - middle) > OTHER_CLOCK:
        wanted = f"a time on the clock of the photometry, which lies around {middle:.1f}"
        raise UsageError("--epoch", f"{plan.epoch:.10g}", expected=wanted)


def _check_name(
    option: str, name: str, *, basic_only: bool, bands: tuple[str, ...], sources: tuple[str, ...]
) -> None:
    basic = tuple(text for text, quantity in QUANTITIES.items() if quantity.basic)
    allowed = basic if basic_only else tuple(QUANTITIES)
    try:
        parsed = parse_key(name)
    except ValueError:
        raise UsageError(option, name, allowed) from None
    if parsed.name not in allowed:
        near = get_close_matches(parsed.name, allowed, n=1)
        hint = f"; {near[0]!r} is one" if near else ""
        raise UsageError(option, name, expected=f"a quantity that the model is written in{hint}")
    if parsed.number is not None:
        raise UsageError(option, name, expected="all coefficients of a star and band together")
    labels = {BAND: bands, SOURCE: sources}.get(parsed.quantity.scope, ())
    if parsed.label is not None and parsed.label not in labels:
        raise UsageError(option, name, tuple(f"{parsed.name}[{label}]" for label in labels))


def _check_fixed(name: str, values: tuple[float, ...]) -> None:
    quantity = parse_key(name).quantity
    shown = ",".join(f"{value:g}" for value in values)
    if not name.startswith("limb_darkening") and len(values) != 1:
        raise UsageError("--fix", f"{name}={shown}", expected="one value")
    for value in values:
        if not quantity.lower <= value <= quantity.upper:
            limits = f"a value within {quantity.lower:g}...{quantity.upper:g}"
            raise UsageError("--fix", f"{name}={shown}", expected=limits)


def _check_tie(plan: Plan, name: str, leader: str) -> None:
    shown = f"{name}={leader}"
    one, two = parse_key(name), parse_key(leader)
    if kind(one) != kind(two):
        raise UsageError("--tie", shown, expected="two quantities of the same kind")
    if _same(name, leader):
        raise UsageError("--tie", shown, expected="another quantity to follow")
    if any(_same(leader, other) for other in plan.ties):
        raise UsageError("--tie", shown, expected="to follow a quantity that is not tied itself")
    told = (*plan.free, *plan.fixed, *(prior.name for prior in plan.priors))
    if any(_same(name, other) for other in told):
        wanted = "a quantity that --free, --fix and --prior do not name"
        raise UsageError("--tie", shown, expected=wanted)


def kind(key: Key) -> tuple[str, str]:
    """What two quantities must share to be tied: the name but for the star, and the unit."""
    return key.name.rstrip("12"), key.quantity.unit


def _check_prior(prior: Prior) -> None:
    shown = f"{prior.name}={','.join(f'{v:g}' for v in (*prior.values, *prior.sigmas))}"
    if len(prior.values) != len(prior.sigmas) or not prior.values:
        raise UsageError("--prior", shown, expected="a sigma for every value")
    if not all(np.isfinite(s) and s > 0 for s in prior.sigmas) or not np.all(
        np.isfinite(prior.values)
    ):
        raise UsageError("--prior", shown, expected="finite values and sigmas above 0")


def check_wishes(plan: Plan, system: System) -> None:
    """UsageError where a wish touches nothing in the system that the data allow."""
    for option, name, _ in _names(plan):
        if is_basic(name):
            found = any(means(name, key) for key in system.values)
        else:
            found = _can_be_had(name, plan, system)
        if not found:
            wanted = "" if "K1" in system.values else " (velocities are missing)"
            raise UsageError(option, name, expected=f"a quantity that these data can give{wanted}")
    for name, leader in plan.ties.items():
        if any(means(name, key) and key not in system.ties for key in system.values):
            wanted = "a quantity to follow that these data can give"
            raise UsageError("--tie", f"{name}={leader}", expected=wanted)


def _can_be_had(name: str, plan: Plan, system: System) -> bool:
    assumed: Mapping[str, float] = {
        each: value for each, (value, _) in assumed_inputs(plan, system).items()
    }
    return bool(np.isfinite(derived_value(system, name, assumed)))


def check_velocities_follow(fitted: Fitted) -> None:
    """NotConstrainedError where a star does not move, or not with the eclipses."""
    for data in fitted.objective.stars:
        spread = float(np.std(data.velocity))
        left = float(np.std(fitted.objective.velocity_residuals(fitted.minimum.x, data)))
        noise = float(np.median(fitted.objective.velocity_errors(data)))
        if (
            data.time.size >= 4
            and left > UNEXPLAINED * spread
            and spread > 4.0 * float(np.median(data.error))
        ):
            raise NotConstrainedError(
                f"the velocities of star {data.star} do not follow the period of the eclipses",
                {
                    "scatter [km/s]": spread,
                    "left by the orbit [km/s]": left,
                    "errors [km/s]": noise,
                },
                "check period, epoch, time system and which column is which star",
            )
        _check_motion(fitted, data.star)


def _check_motion(fitted: Fitted, star: int) -> None:
    name = f"K{star}"
    if name not in fitted.system.free:
        return
    at = fitted.objective.vector.index[name]
    sigma = float(np.sqrt(max(covariance(fitted.minimum.normal)[0][at, at], 0.0)))
    found = fitted.system.values[name]
    if found < LEAST_MOTION * sigma:
        raise NotConstrainedError(
            f"no motion of star {star} is seen in its velocities",
            {f"{name} [km/s]": found, "its error [km/s]": sigma},
            "more precise velocities, or none: then the light is solved alone",
        )
