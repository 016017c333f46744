"""Chi-squared of light, velocities and priors together: its slope, its levels, its value alone."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from derivatives import check_derivatives
from fit_examples import invented, observed, observed_velocities
from shadowscale.fit.objective import Constraint
from shadowscale.fit.problem import Problem

BANDS = {"V": 0.62, "R": 0.7}
GEOMETRY = ("period", "epoch", "radius_sum", "radius_ratio", "inclination", "ecosw", "esinw")
VELOCITIES = ("K1", "K2", "gamma1", "gamma2", "offset1[south]", "offset2[south]")
EFFECTS = {"ellipsoidal1": 0.012, "reflection2": 0.006, "beaming1": 0.001}


def everything_free(**form):
    """A system of two bands and two sources, every quantity free."""
    system = invented(bands=BANDS, third=0.03, light_time=True, ecosw=0.02, esinw=-0.03, **form)
    values = {**system.values, "offset1[south]": 0.4, "offset2[south]": -0.2}
    own = tuple(name for name in values if "[" in name and not name.startswith("offset"))
    return replace(
        system, values=values, free=(*GEOMETRY, *own, *VELOCITIES), sources=("north", "south")
    )


def objective_of(system, constraints=()):
    photometry = observed(system, count=400)
    velocities = observed_velocities(system, offsets={"north": 0.0, "south": 0.4})
    problem = Problem(photometry, velocities)
    weighting = replace(problem.weighting(), light_scale={"V": 1.3}, jitter={(1, 1): 0.7})
    return problem.objective(system, weighting, constraints)


def near(objective, seed=3):
    """Coordinates a few sigma from where the data were made."""
    x = objective.vector.pack(objective.vector.system.values)
    sigma = 1 / np.sqrt(np.diag(objective(x).matrix))
    return x + 2 * sigma * np.random.default_rng(seed).standard_normal(x.size) * (
        sigma < 0.05
    ), sigma


@pytest.mark.parametrize(
    "form",
    [
        {},
        {"effects": EFFECTS},
        {"exposure": 1200.0},
        {"law": "quadratic", "limb": ((0.4, 0.26), (0.46, 0.22))},
    ],
    ids=["plain", "small effects", "exposures", "quadratic"],
)
@pytest.mark.parametrize("levels", ["one", "trend"])
def test_slope_is_that_of_chi_squared(form, levels):
    objective = objective_of(replace(everything_free(**form), levels=levels))
    x, sigma = near(objective)

    slope = -2 * objective(x).downhill * sigma

    check_derivatives(
        lambda steps: objective.chi2(x + sigma * steps), slope, np.zeros(x.size),
        step=0.02, tolerance=2e-3,
    )  # fmt: skip


TIES = {
    "K2": "K1",
    "gamma2": "gamma1",
    "offset2[south]": "offset1[south]",
    "third_light[R]": "third_light[V]",
    "limb_darkening2[V].1": "limb_darkening1[V].1",
    "limb_darkening2[V].2": "limb_darkening1[V].2",
    "ellipsoidal2[V]": "ellipsoidal1[V]",
    "reflection2[R]": "reflection1[R]",
}


@pytest.mark.parametrize("exposure", [0.0, 1200.0])
def test_slope_with_ties_is_that_of_chi_squared(exposure):
    both = {**EFFECTS, "ellipsoidal2": 0.01, "reflection1": 0.005}
    system = everything_free(effects=both, exposure=exposure)
    free = tuple(name for name in system.free if name not in TIES)
    objective = objective_of(replace(system, free=free, ties=TIES).with_values({}))
    x, sigma = near(objective)

    slope = -2 * objective(x).downhill * sigma

    check_derivatives(
        lambda steps: objective.chi2(x + sigma * steps), slope, np.zeros(x.size),
        step=0.02, tolerance=2e-3,
    )  # fmt: skip
    values = objective.vector.unpack(x)
    assert all(values[name] == values[leader] for name, leader in TIES.items())


def test_slope_of_priors():
    rules = (
        Constraint("radius_sum", 0.268, 0.001),
        Constraint("limb_darkening1[V].1", 0.5, 0.05, coordinate=True),
        Constraint("K2/K1", 1.1, 0.01, function=lambda values: values["K2"] / values["K1"]),
    )
    system = everything_free()
    with_priors, without = objective_of(system, rules), objective_of(system)
    x, sigma = near(without)

    slope = -2 * (with_priors(x).downhill - without(x).downhill) * sigma

    check_derivatives(
        lambda steps: with_priors.chi2(x + sigma * steps) - without.chi2(x + sigma * steps),
        slope, np.zeros(x.size), step=0.02, tolerance=1e-5,
    )  # fmt: skip


@pytest.mark.parametrize("levels", ["one", "night", "trend"])
def test_chi_squared_alone_is_the_same(levels):
    rules = (Constraint("radius_ratio", 0.7, 0.1),)
    objective = objective_of(replace(everything_free(effects=EFFECTS), levels=levels), rules)
    x, _ = near(objective)

    assert objective.chi2(x) == pytest.approx(objective(x).chi2, rel=1e-12)


@pytest.mark.parametrize("levels", ["one", "night", "trend"])
def test_parts_add_up(levels):
    objective = objective_of(replace(everything_free(), levels=levels))
    x, _ = near(objective)

    parts = objective.light_parts(x)

    total = 0.0
    for data in objective.bands:
        chi2, found, expected = parts[data.band]
        assert found.shape == (data.segments, 2)
        assert chi2 == pytest.approx(np.sum(data.weight * (data.flux - expected) ** 2), rel=1e-10)
        total += chi2 * objective.light_scale.get(data.band, 1.0) ** -2
    for data in objective.stars:
        total += np.sum(
            (objective.velocity_residuals(x, data) / objective.velocity_errors(data)) ** 2
        )
    assert objective(x).chi2 == pytest.approx(total, rel=1e-10)


def test_stars_that_touch_are_infinitely_unlikely():
    objective = objective_of(everything_free())
    x = objective.vector.pack(objective.vector.system.values)
    x[objective.vector.index["radius_sum"]] = 0.99

    assert objective.chi2(x) == np.inf
    assert objective(x).chi2 == np.inf
