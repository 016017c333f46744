"""The user's priors as constraints of the fit, and that of third light; limb darkening has its own (`fit.limb`).

Eclipses thinned by a third star look like those of other radii, limb darkening and inclination, so
light alone can hardly tell that there is none: taking it as zero because the data do not demand it
would make the errors of the radii far too small. So it is free unless held, under a wide prior.
"""

from __future__ import annotations

from math import hypot

from shadowscale.fit.build import is_third_light, means, named
from shadowscale.fit.derived import ASSUMABLE, derived_value
from shadowscale.fit.objective import Constraint
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.system import System
from shadowscale.quantities import QUANTITIES, parse_key

# A third star that gives nearly half of the light would show in the spectra: that is two sigma here (our
# choice). Most of the error is common to all bands, the rest is the colour of that star.
THIRD_COMMON, THIRD_OWN = 0.2, 0.1


def prior_constraints(plan: Plan, system: System) -> tuple[Constraint, ...]:
    """One constraint a prior and key; priors that the data cannot feel are left to `assumed`."""
    found: list[Constraint] = []
    for prior in plan.priors:
        if prior.name.startswith("limb_darkening") or is_assumed(prior, system):
            continue
        if QUANTITIES[parse_key(prior.name).name].basic:
            found += _on_keys(prior, system)
        else:
            found += _on_derived(prior, system)
    found += [
        Constraint(
            name, 0.0, THIRD_OWN,
            coordinate=True, common="third light", common_sigma=THIRD_COMMON,
        )
        for name in system.free if _is_untold_third_light(plan, name)
    ]  # fmt: skip
    return tuple(found)


def prior_of(plan: Plan, name: str) -> tuple[float, float] | None:
    """Value and sigma of the prior on a key, for the sheet; None without one."""
    parsed = parse_key(name)
    for prior in plan.priors:
        if means(prior.name, name):
            at = min((parsed.number or 1) - 1, len(prior.values) - 1)
            return prior.values[at], prior.sigmas[at]
    return (0.0, hypot(THIRD_COMMON, THIRD_OWN)) if _is_untold_third_light(plan, name) else None


def _is_untold_third_light(plan: Plan, name: str) -> bool:
    """Whether a key is a third light of which the user said nothing; free by name it has no prior."""
    told = (*plan.free, *plan.fixed, *plan.ties, *(prior.name for prior in plan.priors))
    return is_third_light(name) and named(told, name) is None


def is_assumed(prior: Prior, system: System) -> bool:
    """Whether the prior stands in for what no data of this system can give (M1 of a one-lined pair)."""
    return prior.name in ASSUMABLE and not ("K1" in system.values and "K2" in system.values)


def _on_keys(prior: Prior, system: System) -> list[Constraint]:
    return [
        Constraint(name, prior.values[0], prior.sigmas[0])
        for name in system.free
        if means(prior.name, name)
    ]


def _on_derived(prior: Prior, system: System) -> list[Constraint]:
    parsed = parse_key(prior.name)
    labels: tuple[str | None, ...] = (parsed.label,)
    if parsed.label is None and QUANTITIES[parsed.name].scope == "band":
        labels = system.bands
    names = [parsed.name if label is None else f"{parsed.name}[{label}]" for label in labels]

    def constraint(name: str) -> Constraint:
        return Constraint(
            name, prior.values[0], prior.sigmas[0],
            function=lambda values: derived_value(system.with_values(values), name),
        )  # fmt: skip

    return [constraint(name) for name in names]
