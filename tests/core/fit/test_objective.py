"""Chi-squared and its slope: against the model by hand, and against differences."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from derivatives import central_difference
from fit_examples import (
    EPOCH,
    PERIOD,
    invented,
    observed,
    observed_velocities,
    outside_velocity,
    photometry_of,
)
from shadowscale.fit.derived import derived_value
from shadowscale.fit.model import model_light
from shadowscale.fit.objective import Constraint, Objective
from shadowscale.fit.plan import EFFECTS, Plan, Prior
from shadowscale.fit.priors import prior_constraints
from shadowscale.fit.problem import Problem
from shadowscale.fit.system import System


def _objective(
    system: System, *, levels: str = "one", constraints: Sequence[Constraint] = ()
) -> Objective:
    """Two bands of 150 points in six nights, velocities of two sources, a little away from the truth."""
    truth = system
    photometry = observed(truth, count=150, sigma=2e-3, cycles=6)
    velocities = observed_velocities(truth, count=14, offsets={"north": 0.0, "south": 2.0})
    offsets = {f"offset{star}[south]": 1.5 for star in (1, 2)}
    away = replace(
        system.with_values({**offsets, "radius_sum": 0.272, "radius_ratio": 0.76, "K1": 97.0}),
        sources=("north", "south"), levels=levels,
    )  # fmt: skip
    free = tuple(name for name in away.values)
    away = replace(away, free=free)
    problem = Problem(photometry, velocities)
    weighting = replace(
        problem.weighting(), light_scale={"V": 1.5, "I": 0.8}, jitter={(1, 0): 0.4, (2, 1): 0.9}
    )
    return problem.objective(away, weighting, constraints)


def _pair(**changes: object) -> System:
    effects = {f"{effect}{star}": 0.002 for effect in EFFECTS for star in (1, 2)}
    form = {"law": "power-2", "bands": {"V": 0.62, "I": 0.8}, "third": 0.05, "ecosw": 0.05,
            "esinw": 0.08, "inclination": 87.5, "effects": effects}  # fmt: skip
    return invented(**(form | changes))  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("levels", "changes"),
    [
        ("one", {}),
        ("night", {"exposure": 1800.0}),
        ("trend", {"light_time": True}),
        ("one", {"law": "four-parameter", "limb": ((0.5, 0.1, 0.1, 0.0), (0.4, 0.1, 0.2, 0.0))}),
    ],
    ids=["plain", "nights and exposure", "trends and light time", "four-parameter"],
)
def test_slope_of_chi_squared(levels: str, changes: dict[str, object]) -> None:
    """-1/2 of its derivative, levels solved anew at each point: against differences."""
    objective = _objective(_pair(**changes), levels=levels)
    vector = objective.vector
    x = vector.pack(vector.system.values)
    here = objective(x)
    sigma = 1 / np.sqrt(np.diag(here.matrix))
    for number, name in enumerate(vector.names):
        step = 0.05 * sigma[number]
        measured = central_difference(lambda p: objective(p).chi2, x, number, step=step)
        claimed = -2 * here.downhill[number]
        # in units of what a sigma changes
        assert claimed * sigma[number] == pytest.approx(
            float(measured) * sigma[number], rel=2e-3, abs=0.02
        ), name


def test_chi_squared_by_hand() -> None:
    """Each part from its definition, with numpy."""
    objective = _objective(_pair())
    vector = objective.vector
    x = vector.pack(vector.system.values)
    system = vector.system.with_values(vector.unpack(x))
    expected = 0.0
    for data in objective.bands:
        light = model_light(system, data.band, data.time)
        level = np.sum(data.weight * light * data.flux) / np.sum(data.weight * light**2)
        scale = objective.light_scale[data.band]
        expected += np.sum(data.weight * (data.flux - level * light) ** 2) / scale**2
    for data in objective.stars:
        offset = np.where(data.source == 1, 1.5, 0.0)
        extra = np.array([objective.jitter.get((data.star, int(s)), 0.0) for s in data.source])
        residual = data.velocity - outside_velocity(system, data.star, data.time) - offset
        expected += np.sum(residual**2 / (0.5**2 + extra**2))

    assert objective(x).chi2 == pytest.approx(expected, rel=1e-9)


def test_slopes_of_nights_are_solved_with_their_levels() -> None:
    """A night's level and slope as numpy's weighted least squares finds them."""
    objective = _objective(_pair(), levels="trend")
    vector = objective.vector
    x = vector.pack(vector.system.values)
    data = objective.bands[0]
    light = model_light(vector.system.with_values(vector.unpack(x)), data.band, data.time)
    _, levels, expected = objective.light_parts(x)[data.band]
    for number in range(data.segments):
        rows = slice(data.starts[number], data.starts[number + 1])
        root = np.sqrt(data.weight[rows])
        design = np.column_stack([light[rows], light[rows] * data.trend[rows]]) * root[:, None]
        solved = np.linalg.lstsq(design, data.flux[rows] * root, rcond=None)[0]
        np.testing.assert_allclose(levels[number], solved, rtol=1e-8, atol=1e-9)
        model = light[rows] * (solved[0] + solved[1] * data.trend[rows])
        np.testing.assert_allclose(expected[rows], model, rtol=1e-9)


def test_priors_add_their_squares() -> None:
    system = replace(_pair(), free=("radius_sum",))
    priors = (
        Prior("radius_sum", (0.26,), (0.01,)), Prior("inclination", (88.0,), (0.5,)),
        Prior("light_ratio[V]", (0.5,), (0.1,)), Prior("M1", (1.5,), (0.2,)),
    )  # fmt: skip
    bare = _objective(_pair())
    vector = bare.vector
    x = vector.pack(vector.system.values)
    rules = prior_constraints(Plan(priors=priors), vector.system)
    objective = replace(bare, constraints=rules)
    there = vector.system.with_values(vector.unpack(x))
    expected = ((0.272 - 0.26) / 0.01) ** 2 + ((87.5 - 88.0) / 0.5) ** 2
    expected += ((derived_value(there, "light_ratio[V]") - 0.5) / 0.1) ** 2
    expected += ((derived_value(there, "M1") - 1.5) / 0.2) ** 2

    assert len(rules) == 4
    assert objective(x).chi2 - bare(x).chi2 == pytest.approx(expected, rel=1e-6)
    assert system.free == ("radius_sum",)


@pytest.mark.parametrize("name", ["radius_sum", "inclination", "light_ratio[V]", "M1", "logg2"])
def test_slopes_of_priors(name: str) -> None:
    """A prior's share of the slope, against differences."""
    bare = _objective(_pair())
    vector = bare.vector
    x = vector.pack(vector.system.values)
    value = vector.system.values.get(name) or derived_value(vector.system, name)
    plan = Plan(priors=(Prior(name, (1.01 * value,), (0.02 * value,)),))
    objective = replace(bare, constraints=prior_constraints(plan, vector.system))
    claimed = objective(x).downhill - bare(x).downhill
    whole = np.abs(claimed).max()
    for number in np.flatnonzero(np.abs(claimed) > 1e-6 * whole):
        step = 1e-5 * max(abs(x[number]), 1e-2)

        def share(point: np.ndarray) -> float:
            return objective(point).chi2 - bare(point).chi2

        measured = central_difference(share, x, number, step=step)
        assert -2 * claimed[number] == pytest.approx(float(measured), rel=1e-3)


def test_no_orbit_no_chi_squared() -> None:
    """Where the stars would touch at periastron there is no model: chi-squared is infinite, not an error."""
    objective = _objective(_pair())
    vector = objective.vector
    x = vector.pack(vector.system.values)
    x[vector.index["ecosw"]] = 0.9

    assert objective(x).chi2 == np.inf


def test_a_night_without_light_outside_has_its_level() -> None:
    """One point alone in its night: its level is what the point says, and it adds nothing."""
    system = replace(invented(velocities=False), free=("radius_sum",), levels="night")
    time = np.array([0.0, 0.01, 0.02, 1.0]) + EPOCH + 0.3 * PERIOD
    photometry = photometry_of(time, [1.0, 1.001, 0.999, 1.7], 1e-3, night=np.array([0, 0, 0, 1]))
    problem = Problem(photometry, None)
    objective = problem.objective(system, problem.weighting(), ())
    chi2, levels, _ = objective.light_parts(objective.vector.pack(system.values))["V"]

    assert levels[:, 0].tolist() == pytest.approx([1.0, 1.7])
    assert chi2 == pytest.approx(2.0)
