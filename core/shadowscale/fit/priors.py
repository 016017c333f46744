"""The user's priors as constraints of the fit; limb darkening has its own (`fit.limb`)."""

from __future__ import annotations

from shadowscale.fit.build import means
from shadowscale.fit.derived import ASSUMABLE, derived_value
from shadowscale.fit.objective import Constraint
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.system import System
from shadowscale.quantities import QUANTITIES, parse_key


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
    return tuple(found)


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
