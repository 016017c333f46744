"""Errors and correlations against independent ways of getting them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache
from math import pi, radians, sqrt, tan

import numpy as np
import pytest
from numpy.typing import NDArray

from fit_examples import (
    EPOCH,
    PERIOD,
    Solved,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    outside_velocity,
    photometry_of,
    sigma_of,
    solved,
    velocities_of,
)
from shadowscale.data.photometry import Photometry
from shadowscale.fit.least_squares import covariance
from shadowscale.fit.limb import grey_errors
from shadowscale.fit.model import model_light, model_velocities
from shadowscale.fit.problem import Problem
from shadowscale.fit.solution import PROFILE, Solution
from shadowscale.fit.system import System
from shadowscale.fit.vector import Vector
from shadowscale.light.laws import LAWS

Floats = NDArray[np.float64]

# ---------------------------------------------------------------- Fisher matrix by differences

STEPS = {"period": 1e-6, "epoch": 1e-5, "inclination": 1e-3}


def _fisher(found: Solved) -> Floats:
    """Covariance of the free keys: every model differenced, one level a band eliminated, priors added."""
    solution = found.solution
    system, free = solution.system, solution.system.free
    information = np.zeros((len(free), len(free)))
    for number, band in enumerate(system.bands):
        rows = (found.photometry.band == number) & (solution.light.why == 0)
        time, error = found.photometry.time[rows], found.photometry.flux_error[rows]
        error = error * solution.fit.error_scale[band]

        def light(values: System, band: str = band, time: Floats = time) -> Floats:
            return model_light(values, band, time)

        slopes = _differences(system, free, light)
        design = np.column_stack([slopes, light(system)]) / error[:, None]
        whole = design.T @ design
        information += whole[:-1, :-1] - np.outer(whole[:-1, -1], whole[:-1, -1]) / whole[-1, -1]
    if found.velocities is not None:
        for star in (1, 2):
            time = found.velocities.time

            def velocity(values: System, star: int = star, time: Floats = time) -> Floats:
                return outside_velocity(values, star, time)

            scaled = _differences(system, free, velocity) / found.velocities.rv1_error[:, None]
            information += scaled.T @ scaled
    return np.linalg.inv(information + _limb_prior(system, free))


def _differences(system: System, free: tuple[str, ...], curve: object) -> Floats:
    columns = []
    for name in free:
        step = STEPS.get(name, 1e-5 * max(1.0, abs(system.values[name])))
        above = system.with_values({name: system.values[name] + step})
        below = system.with_values({name: system.values[name] - step})
        columns.append((curve(above) - curve(below)) / (2 * step))  # type: ignore[operator]
    return np.column_stack(columns)


def _limb_prior(system: System, free: tuple[str, ...]) -> Floats:
    """The Gaussian prior on h1 and h2, as information on the coefficients.

    Of each, stars and bands share one error; every one has its own beside it.
    """
    law = LAWS[system.law]
    pairs = [(star, band) for star in (1, 2) for band in system.bands]
    slopes = np.zeros((2, len(pairs), len(free)))
    for number, (star, band) in enumerate(pairs):
        at = [free.index(f"limb_darkening{star}[{band}].{n}") for n in (1, 2)]
        centre = np.array(system.limb_darkening(star, band))
        for column in range(2):
            shift = np.zeros(2)
            shift[column] = 1e-6
            up, down = law.to_sampling(centre + shift), law.to_sampling(centre - shift)
            slopes[:, number, at[column]] = (up - down) / 2e-6
    common, own = grey_errors(blind=True)
    spread = own**2 * np.eye(len(pairs)) + common**2
    return np.asarray(sum(rows.T @ np.linalg.solve(spread, rows) for rows in slopes))


@cache
def _two_bands() -> Solved:
    """Everything free at once: eccentric, third light in both bands, velocities of both stars."""
    truth = invented(bands={"V": 0.62, "I": 0.74}, third=0.05, ecosw=0.03, esinw=0.05)
    photometry = observed(truth, count=900, sigma=5e-4, middles=(0.0, 0.519))
    plan = ephemeris(free=("third_light",), orbit="eccentric", levels="one")
    return solved(truth, plan, photometry=photometry, velocities=observed_velocities(truth))


@pytest.mark.parametrize("example", [ordinary, _two_bands])
def test_covariance_is_the_inverse_of_the_fisher_matrix(example: object) -> None:
    """Source: Fisher information of the published model, by differences of `model_light` and of
    velocities with Kepler's equation solved by scipy."""
    found: Solved = example()  # type: ignore[operator]
    ours, theirs = found.solution.covariance, _fisher(found)
    sigma = np.sqrt(np.diag(theirs))

    np.testing.assert_allclose(np.sqrt(np.diag(ours)), sigma, rtol=0.01)
    np.testing.assert_allclose(
        ours / np.outer(sigma, sigma), theirs / np.outer(sigma, sigma), rtol=0, atol=0.02
    )


@pytest.mark.parametrize("example", [ordinary, _two_bands])
def test_truth_lies_within_the_errors(example: object) -> None:
    """Chi-squared of the truth in the joint covariance (limb darkening has a prior elsewhere: left out)."""
    found: Solved = example()  # type: ignore[operator]
    solution = found.solution
    rows = [n for n, name in enumerate(solution.system.free) if "limb" not in name]
    names = [solution.system.free[row] for row in rows]
    away = np.array([solution.system.values[name] - found.truth.values[name] for name in names])
    chi2 = float(away @ np.linalg.solve(solution.covariance[np.ix_(rows, rows)], away))

    assert chi2 < len(names) + 3.5 * sqrt(2 * len(names))
    assert chi2 > len(names) - 3.5 * sqrt(2 * len(names))


def test_errors_and_correlations_belong_to_the_covariance() -> None:
    solution = ordinary().solution
    sigma = np.sqrt(np.diag(solution.covariance))
    for name, error in zip(solution.system.free, sigma, strict=True):
        assert sigma_of(solution.estimates[name]) == pytest.approx(error, rel=0.02)
    names = solution.correlation_names
    at = [names.index(name) for name in solution.system.free]
    expected = solution.covariance / np.outer(sigma, sigma)

    np.testing.assert_allclose(solution.correlations[np.ix_(at, at)], expected, atol=1e-9)
    np.testing.assert_allclose(np.diag(solution.correlations), 1.0)


# ---------------------------------------------------------------- sampling


def _log_likelihood(
    found: Solved, photometry: Photometry
) -> Callable[[Floats], tuple[float, System | None]]:
    """Of the light at values of what is free, the level eliminated; and the system there, if it can be."""
    solution = found.solution
    names = solution.system.free
    error = photometry.flux_error * solution.fit.error_scale["V"]
    weight = (solution.light.why == 0) / error**2

    def at(x: Floats) -> tuple[float, System | None]:
        values = dict(zip(names, x.tolist(), strict=True))
        if not (0 < values["inclination"] < 90 and 0.05 < values["radius_ratio"] < 20):
            return -np.inf, None
        system = solution.system.with_values(values)
        light = model_light(system, "V", photometry.time)
        level = np.sum(weight * light * photometry.flux) / np.sum(weight * light**2)
        return -0.5 * float(np.sum(weight * (photometry.flux - level * light) ** 2)), system

    return at


def _chain(
    log_posterior: Callable[[Floats], float],
    solution: Solution,
    spread: Floats,
    *,
    steps: int,
    discard: int,
) -> Floats:
    """emcee's samples (n, m) of what is free, from walkers spread around the solution."""
    import emcee

    middle = np.array([solution.system.values[name] for name in solution.system.free])
    start = np.random.default_rng(5).multivariate_normal(middle, spread, 32)
    moves = [(emcee.moves.DEMove(), 0.5), (emcee.moves.StretchMove(), 0.5)]
    sampler = emcee.EnsembleSampler(32, middle.size, log_posterior, moves=moves)
    sampler._random.seed(17)
    sampler.run_mcmc(start, steps)
    return sampler.get_chain(discard=discard, flat=True)


def _sampled() -> tuple[Solved, tuple[str, ...], Floats]:
    """Eight free quantities of 400 points and 15 velocities, and emcee's samples of them."""
    held = {"period": PERIOD, "epoch": EPOCH, "third_light": 0.0}
    fixed = {name: (value,) for name, value in held.items()}
    fixed |= {"limb_darkening1": (0.62, 0.55), "limb_darkening2": (0.68, 0.60)}
    truth = invented(radius_ratio=0.9, inclination=87.0)
    photometry = observed(truth, count=400, sigma=2e-3)
    velocities = observed_velocities(truth, count=15)
    plan = ephemeris(fixed=fixed, orbit="circular", levels="one", light_time="off")
    found = solved(truth, plan, photometry=photometry, velocities=velocities)
    solution = found.solution
    names = solution.system.free
    light = _log_likelihood(found, photometry)

    def log_posterior(x: Floats) -> float:
        total, system = light(x)
        if system is not None:
            for star, seen in ((1, velocities.rv1), (2, velocities.rv2)):
                model = model_velocities(system, star, velocities.time)
                total -= 0.5 * float(np.sum(((seen - model) / 0.5) ** 2))
        return total

    chain = _chain(log_posterior, solution, solution.covariance, steps=480, discard=100)
    return found, names, chain


def test_covariance_agrees_with_sampling() -> None:
    """Source: the posterior sampled with emcee (Foreman-Mackey et al. 2013, PASP 125, 306)."""
    found, names, chain = _sampled()
    assert len(names) == 8
    ours = found.solution.covariance
    sigma = np.sqrt(np.diag(ours))
    sampled = np.cov(chain.T)
    spread = np.sqrt(np.diag(sampled))

    np.testing.assert_allclose(sigma, spread, rtol=0.15)
    np.testing.assert_allclose(
        ours / np.outer(sigma, sigma), sampled / np.outer(spread, spread), rtol=0, atol=0.15
    )
    best = np.array([found.solution.system.values[name] for name in names])
    np.testing.assert_array_less(np.abs(np.mean(chain, axis=0) - best) / spread, 0.35)


def test_limits_in_a_curved_valley_agree_with_sampling() -> None:
    """Source: the posterior sampled with emcee (Foreman-Mackey et al. 2013, PASP 125, 306), flat in ln k."""
    fixed = {"period": (PERIOD,), "epoch": (EPOCH,), "third_light": (0.0,)}
    fixed |= {"limb_darkening1": (0.62, 0.55), "limb_darkening2": (0.68, 0.60)}
    truth = invented(radius_ratio=0.7, inclination=82.0, bands={"V": 0.9})
    photometry = observed(truth, count=400, sigma=3e-3)
    plan = ephemeris(fixed=fixed, orbit="circular", levels="one", light_time="off")
    found = solved(truth, plan, photometry=photometry)
    names = found.solution.system.free
    likelihood, at = _log_likelihood(found, photometry), names.index("radius_ratio")

    def log_posterior(x: Floats) -> float:
        light, system = likelihood(x)
        return -np.inf if system is None else light - float(np.log(x[at]))

    narrow = found.solution.covariance / 4
    chain = _chain(log_posterior, found.solution, narrow, steps=800, discard=200)
    low, high = np.quantile(chain[:, at], [0.159, 0.841])
    estimate = found.solution.estimates["radius_ratio"]

    assert any(each.chosen == PROFILE for each in found.solution.decisions)
    assert estimate.minus is not None
    assert estimate.plus is not None
    assert estimate.value - estimate.minus == pytest.approx(low, abs=0.15 * (high - low))
    assert estimate.value + estimate.plus == pytest.approx(high, abs=0.15 * (high - low))


# ---------------------------------------------------------------- forecasts in closed form


def _engine_sigma(system: System, free: tuple[str, ...], time: Floats, error: float) -> Floats:
    """Errors of `free` [in the solver's coordinates] of perfect data, from the engine's curvature."""
    system = replace(system, free=free)
    photometry = photometry_of(time, model_light(system, "V", time), error)
    problem = Problem(photometry, None)
    objective = problem.objective(system, problem.weighting(), ())
    matrix, _ = covariance(objective(Vector(system).pack(system.values)))
    return np.sqrt(np.diag(matrix))


def test_error_of_the_time_of_a_total_eclipse() -> None:
    """Mid-time of a trapezoid: (T/Q) sqrt(theta/2), Q = sqrt(Gamma T) depth/sigma (Carter et al. 2008,
    ApJ 689, 499, eq. from memory, checked apart by inverting the Fisher matrix).

    A small dark disc without limb darkening: ingress is that of a disc over a straight edge, whose
    steepness is 32/(3 pi^2) = 1.081 times the trapezoid's in the sum of squares.
    """
    k, total = 0.05, 0.105
    system = invented(
        law="quadratic", limb=((0.0, 0.0), (0.0, 0.0)), bands={"V": 1e-9}, velocities=False,
        inclination=90.0, radius_sum=total, radius_ratio=k,
    )  # fmt: skip
    time = EPOCH + np.linspace(-0.2, 0.2, 40001) * PERIOD
    error = 1e-4
    sigma = _engine_sigma(system, ("epoch", "radius_sum", "radius_ratio"), time, error)[0]
    r1 = total / (1 + k)
    ingress = (np.arcsin(r1 * (1 + k)) - np.arcsin(r1 * (1 - k))) / (2 * pi) * PERIOD
    whole = 2 * np.arcsin(r1) / (2 * pi) * PERIOD  # from half-way in to half-way out
    rate = 40000 / (0.4 * PERIOD)
    quality = sqrt(rate * whole) * k**2 / error
    carter = whole / quality * sqrt(ingress / whole / 2)

    assert sigma == pytest.approx(carter / sqrt(32 / (3 * pi**2)), rel=0.01)


def test_errors_of_even_velocities() -> None:
    """sigma sqrt(2/N) of K and sigma/sqrt(N) of gamma (least squares of an even circular orbit)."""
    count, sigma = 24, 0.5
    time = EPOCH + np.arange(count) / count * PERIOD
    random = np.random.default_rng(8)
    truth = invented()
    curves = [
        model_velocities(truth, star, time) + sigma * random.standard_normal(count)
        for star in (1, 2)
    ]
    held = {"period": (PERIOD,), "epoch": (EPOCH,)}
    found = solved(
        truth, ephemeris(fixed=held, orbit="circular"), photometry=observed(truth),
        velocities=velocities_of(time, curves[0], curves[1], sigma),
    ).solution.estimates  # fmt: skip

    for star in (1, 2):
        assert sigma_of(found[f"K{star}"]) == pytest.approx(sigma * sqrt(2 / count), rel=0.01)
        assert sigma_of(found[f"gamma{star}"]) == pytest.approx(sigma / sqrt(count), rel=0.01)


def test_errors_of_masses_follow_from_those_of_the_elements() -> None:
    """(s_M1/M1)^2 = (2x)^2 f1^2 + (3-2x)^2 f2^2 + (3 cot i s_i)^2 + f_P^2, x = K1/(K1+K2), f fractional
    (circular; standard propagation, it reproduces published errors of LL Aqr, AR Aur, beta Aur)."""
    estimates = ordinary().solution.estimates
    value = {name: estimates[name].value for name in ("K1", "K2", "inclination", "period")}
    sigma = {name: sigma_of(estimates[name]) for name in value}
    x = value["K1"] / (value["K1"] + value["K2"])
    first, second = sigma["K1"] / value["K1"], sigma["K2"] / value["K2"]
    tilt = 3 * radians(sigma["inclination"]) / tan(radians(value["inclination"]))
    rest = tilt**2 + (sigma["period"] / value["period"]) ** 2
    expected = {
        "M1": sqrt((2 * x * first) ** 2 + ((3 - 2 * x) * second) ** 2 + rest),
        "M2": sqrt(((1 + 2 * x) * first) ** 2 + ((2 - 2 * x) * second) ** 2 + rest),
        "a": sqrt(
            (sigma["K1"] ** 2 + sigma["K2"] ** 2) / (value["K1"] + value["K2"]) ** 2 + rest / 9
        ),
    }

    for name, fraction in expected.items():
        assert sigma_of(estimates[name]) / estimates[name].value == pytest.approx(
            fraction, rel=0.02
        )


def test_half_the_errors_make_half_the_sigmas() -> None:
    """Four times the points: half the error of everything that the light gives."""
    truth = invented()
    plan = ephemeris(orbit="circular", fixed={"third_light": (0.0,)})
    few = solved(truth, plan, photometry=observed(truth, count=700))
    many = solved(truth, plan, photometry=observed(truth, count=2800))

    for name in ("epoch", "radius_sum", "radius_ratio"):
        ratio = sigma_of(few.solution.estimates[name]) / sigma_of(many.solution.estimates[name])
        assert ratio == pytest.approx(2.0, rel=0.12)


@pytest.mark.long
def test_errors_cover_the_truth_as_often_as_they_say() -> None:
    """Sixty draws of the noise: 68 % of the truths within the limits, 95 % within twice the limits.

    Binomial spread of sixty draws: 6 % and 2.8 %; three of them are allowed.
    """
    truth = ordinary().truth
    names = ("period", "epoch", "radius_sum", "radius_ratio", "inclination", "K1", "K2", "gamma1")
    pulls = []
    for seed in range(60):
        found = solved(
            truth, photometry=observed(truth, seed=1000 + seed),
            velocities=observed_velocities(truth, seed=2000 + seed),
        )  # fmt: skip
        pulls.append([found.pull(name) for name in names])
    size = np.abs(np.array(pulls))

    np.testing.assert_allclose((size < 1).mean(axis=0), 0.683, atol=0.18)
    np.testing.assert_allclose((size < 2).mean(axis=0), 0.954, atol=0.085)
