"""The mirror k -> 1/k and the width of the valley of k in partial eclipses."""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import cache, partial

import numpy as np
import pytest

from fit_examples import Solved, ephemeris, invented, observed, ordinary, sigma_of, solved
from shadowscale.fit.limb import grey_errors
from shadowscale.fit.plan import Prior
from shadowscale.fit.solution import Solution
from shadowscale.light.grey import grey_coefficients
from shadowscale.light.laws import LAWS


@cache
def _partial(ratio: float, sigma: float, inclination: float) -> Solved:
    truth = invented(inclination=inclination, radius_ratio=ratio, bands={"V": 0.9})
    return solved(truth, photometry=observed(truth, sigma=sigma))


def _limb_chi2(solution: Solution) -> float:
    """The share of the prior on limb darkening: around grey atmospheres at the temperatures told."""
    words = next(each.words for each in solution.decisions if each.what == "limb darkening")
    teffs = dict(re.findall(r"star (\d), V: grey atmosphere at (\d+) K", words))
    law = LAWS["power-2"]
    away = []
    for star in (1, 2):
        centre = grey_coefficients(float(teffs[str(star)]), 545.0, "power-2")
        own = np.array(solution.system.limb_darkening(star, "V"))
        away.append(law.to_sampling(own) - law.to_sampling(np.array(centre)))
    common, own = grey_errors(blind=True)
    spread = own**2 * np.eye(2) + common**2
    return float(np.sum(np.array(away) * np.linalg.solve(spread, np.array(away))))


def _chi2(found: Solved, ratio: float, *, same_points: bool = False) -> float:
    """Chi-squared with k held, in the errors of the free solution, priors included.

    NaN where other outliers are set aside, if they are to be the `same_points`.
    """
    third = found.solution.estimates["third_light[V]"]
    fixed = {"radius_ratio": (ratio,)} | ({} if third.minus else {"third_light": (third.value,)})
    plan = ephemeris(fixed=fixed, orbit="circular", levels="one")
    held = solved(found.truth, plan, photometry=found.photometry).solution
    if same_points and held.fit.points != found.solution.fit.points:
        return float("nan")
    scale = held.fit.error_scale["V"] / found.solution.fit.error_scale["V"]
    third = held.estimates["third_light[V]"]
    pull = third.value / third.prior[1] if third.prior else 0.0
    return held.fit.chi2 * scale**2 + _limb_chi2(held) + pull**2


def test_a_total_eclipse_has_no_mirror() -> None:
    assert ordinary().solution.alternatives == ()


def test_the_mirror_is_seen_one_way_or_the_other() -> None:
    """A partial pair whose k and 1/k both fit: listed as another solution, or within the limits of k."""
    found = _partial(0.7, 8e-3, 80.5)
    estimate = found.solution.estimates["radius_ratio"]
    mirror = 1 / estimate.value
    assert _chi2(found, mirror) - _chi2(found, estimate.value) < 4.0
    assert estimate.minus is not None
    assert estimate.plus is not None
    within = estimate.value - 2 * estimate.minus <= mirror <= estimate.value + 2 * estimate.plus
    listed = [
        each for each in found.solution.alternatives
        if abs(np.log(each.values["radius_ratio"] / mirror)) < 0.3
    ]  # fmt: skip

    assert within or listed


@cache
def _two_valleys() -> Solved:
    """A partial pair in noise, k = 1.57: the mirror lies in a valley of its own."""
    truth = invented(radius_sum=0.235, inclination=82.72, radius_ratio=1.568, bands={"V": 0.42})
    plan = ephemeris(fixed={"third_light": (0.0,)})
    return solved(truth, plan, photometry=observed(truth, count=500, sigma=9e-3, wide=0.047))


def test_the_mirror_is_listed_with_its_numbers() -> None:
    """What is listed is another valley, and as much worse in chi-squared as a refit by hand says."""
    found = _two_valleys()
    ratio = found.solution.estimates["radius_ratio"].value
    (other,) = found.solution.alternatives

    assert other.values["radius_ratio"] == pytest.approx(1 / ratio, rel=0.15)
    assert other.values["r1"] + other.values["r2"] == pytest.approx(other.values["radius_sum"])
    assert other.values["r2"] / other.values["r1"] == pytest.approx(other.values["radius_ratio"])
    risen = _chi2(found, other.values["radius_ratio"]) - _chi2(found, ratio)
    assert other.delta_chi2 == pytest.approx(risen, abs=0.1)
    assert f"worse by {other.delta_chi2:.1f} in chi-squared: not excluded" in other.words
    assert "star 1 the larger" in other.words


NARROW = (np.linspace(0.52, 0.6, 17), np.linspace(0.62, 0.8, 5), np.linspace(0.9, 2.5, 17))


@pytest.mark.parametrize(
    ("make", "ratios"),
    [
        (partial(_partial, 0.8, 2e-3, 82.5), (np.geomspace(0.55, 1.5, 25),)),
        (partial(_partial, 0.7, 8e-3, 80.5), (np.geomspace(0.25, 4.0, 31),)),
        (partial(_partial, 1.3, 3e-3, 82.0), (np.geomspace(0.5, 2.2, 25),)),
        (_two_valleys, NARROW),
    ],
)
def test_as_much_likelihood_lies_beyond_each_limit_as_should(
    make: Callable[[], Solved], ratios: tuple[np.ndarray, ...]
) -> None:
    """The likelihood integrated by hand over ln k, by refits with k held: 15.9 % of it lie beyond
    either limit, those of the normal distribution.

    Regression: a lower limit came out twenty times too narrow.
    """
    found = make()
    estimate = found.solution.estimates["radius_ratio"]
    assert estimate.minus is not None
    assert estimate.plus is not None
    logs = np.log(np.concatenate(ratios))
    chi2 = np.array([_chi2(found, float(np.exp(at)), same_points=True) for at in logs])
    logs, chi2 = logs[np.isfinite(chi2)], chi2[np.isfinite(chi2)]
    density = np.exp(-(chi2 - _chi2(found, estimate.value)) / 2)
    whole = np.concatenate([[0.0], np.cumsum(np.diff(logs) * (density[1:] + density[:-1]) / 2)])
    ends = np.log([estimate.value - estimate.minus, estimate.value + estimate.plus])
    below, upto = np.interp(ends, logs, whole) / whole[-1]

    assert below == pytest.approx(0.159, abs=0.05)
    assert 1 - upto == pytest.approx(0.159, abs=0.05)


@pytest.mark.long
def test_true_ratio_lies_within_limits_or_alternatives() -> None:
    """Thirty random partial pairs: the true k is no farther than three errors from the solution or from
    one that is listed, or between the two."""
    random = np.random.default_rng(21)
    missed = []
    for _ in range(30):
        ratio, total = float(np.exp(random.uniform(-0.8, 0.8))), float(random.uniform(0.15, 0.3))
        inner = abs(1 - ratio) / (1 + ratio) * total
        lowest = inner + (total - inner) * float(random.uniform(0.2, 0.7))
        truth = invented(
            radius_sum=total, radius_ratio=ratio, inclination=float(np.degrees(np.arccos(lowest))),
            bands={"V": float(random.uniform(0.3, 0.9))},
        )  # fmt: skip
        sigma = float(10 ** random.uniform(-3, -2.3))
        found = solved(truth, photometry=observed(truth, count=500, sigma=sigma, wide=total / 5))
        estimate = found.solution.estimates["radius_ratio"]
        assert estimate.minus is not None
        assert estimate.plus is not None
        others = [each.values["radius_ratio"] for each in found.solution.alternatives]
        low = min([estimate.value - 3 * estimate.minus, *others])
        high = max([estimate.value + 3 * estimate.plus, *others])
        if not 0.95 * low <= ratio <= 1.05 * high:
            missed.append((ratio, low, high))

    assert missed == []


def test_a_light_ratio_decides_between_mirrors() -> None:
    truth = invented(inclination=80.5, radius_ratio=0.7, bands={"V": 0.9})
    photometry = observed(truth, sigma=8e-3)
    plan = ephemeris(priors=(Prior("light_ratio[V]", (0.9 * 0.49,), (0.02,)),))
    found = solved(truth, plan, photometry=photometry)

    assert found.solution.alternatives == ()
    assert abs(found.pull("radius_ratio")) < 3
    assert sigma_of(found.solution.estimates["radius_ratio"]) < 0.05
