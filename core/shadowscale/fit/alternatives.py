"""Other solutions that the data do not exclude: the mirror k -> 1/k above all."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import hypot, log

from shadowscale.fit.problem import Fitted
from shadowscale.fit.solution import Alternative
from shadowscale.fit.system import System
from shadowscale.geometry.roche import lobe_radius

NOT_EXCLUDED = 9.0  # in chi-squared: three sigma for one quantity
SAME_SIDE = 0.15  # in ln k: nearer minima on one side of k = 1 are one valley
OTHER_SIDE = 0.02
OVERFLOW_HANDICAP = 25.0  # five sigma against a star larger than its Roche lobe


@dataclass(frozen=True, eq=False)
class Branch:
    """Another minimum, and how much worse it is in chi-squared."""

    fitted: Fitted
    delta_chi2: float


def mirrored(system: System) -> dict[str, float]:
    """The values with the radii exchanged; surface brightnesses, and so the depths, stay."""
    return {**system.values, "radius_ratio": 1.0 / system.values["radius_ratio"]}


def preference(fitted: Fitted) -> float:
    """Chi-squared, with a handicap for stars that overflow their Roche lobes: the spheres do not hold there.

    A system without both velocities counts as one of equal masses.
    """
    values = fitted.system.values
    ratio, total = values["radius_ratio"], values["radius_sum"]
    q = 1.0
    if values.get("K1", 0.0) > 0.0 and values.get("K2", 0.0) > 0.0:
        q = values["K1"] / values["K2"]
    nearest = 1.0 - hypot(values["ecosw"], values["esinw"])
    radii = total / (1 + ratio), total * ratio / (1 + ratio)
    full = max(radii[0] / lobe_radius(1 / q), radii[1] / lobe_radius(q)) / nearest
    return fitted.chi2 + (OVERFLOW_HANDICAP if full > 1.0 else 0.0)


def distinct_branches(sorted_fits: Sequence[Fitted]) -> list[Fitted]:
    """The best of each valley, best first."""
    found: list[Fitted] = []
    for each in sorted_fits:
        if all(_apart(each.system, other.system) for other in found):
            found.append(each)
    return found


def _apart(one: System, two: System) -> bool:
    first, second = log(one.values["radius_ratio"]), log(two.values["radius_ratio"])
    limit = OTHER_SIDE if first * second < 0 else SAME_SIDE
    return abs(first - second) > limit


def alternatives(branches: Sequence[Branch]) -> tuple[Alternative, ...]:
    """The branches that chi-squared does not exclude, in words."""
    found = []
    for branch in branches:
        if branch.delta_chi2 > NOT_EXCLUDED:
            continue
        values = branch.fitted.system.values
        ratio = values["radius_ratio"]
        larger = "star 2 the larger" if ratio > 1 else "star 1 the larger"
        shown = ("radius_sum", "radius_ratio", "inclination", "ecosw", "esinw")
        numbers = {name: values[name] for name in shown}
        numbers["r1"] = values["radius_sum"] / (1 + ratio)
        numbers["r2"] = values["radius_sum"] * ratio / (1 + ratio)
        numbers |= {n: v for n, v in values.items() if n.startswith("surface_brightness_ratio")}
        words = (
            f"k = {ratio:.4f} ({larger}) is worse by {branch.delta_chi2:.1f} in chi-squared: "
            "not excluded; a spectroscopic light ratio would decide"
        )
        found.append(Alternative(words, numbers, branch.delta_chi2))
    return tuple(found)
