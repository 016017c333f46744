"""What the data decide: levels of the nights, third light, shape of the orbit; and how they are told."""

from __future__ import annotations

from functools import cache

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
    ordinary,
    photometry_of,
    secondary_phase,
    sigma_of,
    solved,
)
from shadowscale.data.photometry import Photometry
from shadowscale.fit.model import model_light
from shadowscale.fit.plan import Prior
from shadowscale.fit.solution import Decision, Solution

Floats = NDArray[np.float64]


def _decision(solution: Solution, what: str) -> Decision:
    (found,) = [each for each in solution.decisions if each.what == what][-1:]
    return found


# ---------------------------------------------------------------- levels of the nights

NIGHTS = 16


@cache
def _level(kind: str) -> tuple[Floats, Floats]:
    """Offset and slope [1/d] of each night."""
    random = np.random.default_rng(11)
    offsets = 1 + 0.01 * random.standard_normal(NIGHTS)
    slopes = 0.05 * random.standard_normal(NIGHTS)
    if kind == "one":
        offsets = np.ones(NIGHTS)
    return offsets, slopes if kind == "trend" else np.zeros(NIGHTS)


@cache
def _nights(kind: str) -> Photometry:
    """Sixteen nights of seven hours on the ordinary pair, with a level or a slope of their own."""
    truth, random = ordinary().truth, np.random.default_rng(12)
    offsets, slopes = _level(kind)
    time = EPOCH - 0.15 + np.arange(NIGHTS)[:, None] + np.linspace(0, 0.3, 70)[None, :]
    within = time - time.mean(axis=1, keepdims=True)
    level = offsets[:, None] + slopes[:, None] * within
    light = model_light(truth, "V", time.ravel()) * level.ravel()
    flux = light + 1e-3 * random.standard_normal(light.size)
    night = np.repeat(np.arange(NIGHTS), time.shape[1]).astype(np.int64)
    return photometry_of(time.ravel(), flux, 1e-3, night=night)


@pytest.mark.parametrize("kind", ["one", "night", "trend"])
def test_levels_are_chosen_as_they_were_made(kind: str) -> None:
    found = solved(ordinary().truth, photometry=_nights(kind))
    said = _decision(found.solution, "levels")

    assert found.solution.system.levels == kind
    for name in (
        "radius_sum",
        "radius_ratio",
        "inclination",
        "epoch",
        "surface_brightness_ratio[V]",
    ):
        assert abs(found.pull(name)) < 3.5
    assert found.solution.fit.error_scale["V"] == pytest.approx(1.0, abs=0.08)
    assert "in chi-squared for" in said.words


@pytest.mark.parametrize("kind", ["night", "trend"])
def test_levels_of_the_nights_are_recovered(kind: str) -> None:
    found = solved(ordinary().truth, photometry=_nights(kind)).solution
    photometry = _nights(kind)
    offsets, slopes = _level(kind)
    for night in range(NIGHTS):
        rows = photometry.night == night
        middle = photometry.time[rows] - photometry.time[rows].mean()
        expected = offsets[night] + slopes[night] * middle
        np.testing.assert_allclose(found.light.level[rows], expected, rtol=0, atol=1.2e-3)


def test_levels_cost_degrees_of_freedom() -> None:
    one = solved(ordinary().truth, photometry=_nights("one"), plan=ephemeris(levels="one")).solution
    many = solved(
        ordinary().truth, photometry=_nights("one"), plan=ephemeris(levels="night")
    ).solution

    assert many.fit.free - len(many.system.free) == NIGHTS
    assert one.fit.free - len(one.system.free) == 1
    for name in ("radius_sum", "radius_ratio"):
        assert sigma_of(many.estimates[name]) >= 0.98 * sigma_of(one.estimates[name])


def test_a_night_of_eclipse_alone_keeps_its_level_uncertain() -> None:
    """Levels solved inside the fit are part of its errors: sums of radii lose weight when every night
    has a level of its own and only a few nights see the light outside eclipse."""
    truth, random = ordinary().truth, np.random.default_rng(4)
    phases = np.concatenate([np.linspace(-0.035, 0.035, 60), 0.5 + np.linspace(-0.035, 0.035, 60)])
    cycles = np.repeat(np.arange(6), 20)
    time = EPOCH + PERIOD * (phases + cycles)
    flux = model_light(truth, "V", time) + 1e-3 * random.standard_normal(time.size)
    known = _nights("one")
    both = photometry_of(
        np.concatenate([known.time, time]), np.concatenate([known.flux, flux]), 1e-3,
        night=np.concatenate([known.night, NIGHTS + cycles]).astype(np.int64),
    )  # fmt: skip
    one = solved(truth, ephemeris(levels="one"), photometry=both).solution.estimates
    many = solved(truth, ephemeris(levels="night"), photometry=both).solution.estimates

    assert sigma_of(many["radius_sum"]) > 1.03 * sigma_of(one["radius_sum"])


# ---------------------------------------------------------------- third light


def test_third_light_is_found() -> None:
    truth = invented(third=0.1)
    found = solved(truth)

    assert _decision(found.solution, "third light").chosen == "seen"
    for name in ("third_light[V]", "radius_sum", "radius_ratio", "inclination"):
        assert abs(found.pull(name)) < 3.5


def test_third_light_that_is_not_there() -> None:
    """It is free all the same, and what that costs is told: the same as when it is held at zero."""
    known = ordinary()
    said = _decision(known.solution, "third light")
    plan = ephemeris(fixed={"third_light": (0.0,)})
    held = solved(known.truth, plan, photometry=known.photometry).solution

    assert said.chosen == "not seen"
    assert abs(known.pull("third_light[V]")) < 3.5
    assert said.numbers["sigma_radius_ratio_free"] > 1.5 * said.numbers["sigma_radius_ratio_held"]
    assert said.numbers["sigma_radius_ratio_held"] == pytest.approx(
        sigma_of(held.estimates["radius_ratio"]), rel=0.2
    )
    assert "hold it at zero" in said.words


def test_third_light_of_each_band() -> None:
    truth = invented(bands={"V": 0.62, "I": 0.74}).with_values(
        {"third_light[V]": 0.04, "third_light[I]": 0.15}
    )
    found = solved(truth)

    for name in ("third_light[V]", "third_light[I]"):
        assert abs(found.pull(name)) < 3.5


def test_what_the_user_held_is_not_decided() -> None:
    known = ordinary()
    plan = ephemeris(fixed={"third_light": (0.0,)}, orbit="eccentric", levels="one")
    found = solved(known.truth, plan, photometry=known.photometry).solution

    assert not [each for each in found.decisions if each.what in ("third light", "levels")]
    assert _decision(found, "orbit").words == "eccentric, as asked"


# ---------------------------------------------------------------- shape of the orbit


def _orbit(ecosw: float, esinw: float, *, sigma: float = 1e-3) -> Solved:
    truth = invented(ecosw=ecosw, esinw=esinw)
    middles = (0.0, secondary_phase(truth))
    return solved(truth, photometry=observed(truth, sigma=sigma, middles=middles))


def test_a_circular_orbit_stays_circular() -> None:
    said = _decision(ordinary().solution, "orbit")

    assert said.chosen == "circular"
    assert said.numbers["extra"] == 2
    # 99 % point of chi-squared with two degrees of freedom: -2 ln 0.01 = 9.21 (exact)
    assert said.numbers["needed"] == pytest.approx(-2 * np.log(0.01))


@pytest.mark.parametrize(
    ("ecosw", "esinw"), [(0.012, 0.016), (-0.02, 0.0), (0.0, 0.02), (0.3, -0.3)]
)
def test_an_eccentric_orbit_is_found(ecosw: float, esinw: float) -> None:
    found = _orbit(ecosw, esinw)

    assert _decision(found.solution, "orbit").chosen == "eccentric"
    for name in ("ecosw", "esinw", "radius_sum", "radius_ratio", "inclination"):
        assert abs(found.pull(name)) < 3.5


def test_an_eccentricity_below_the_noise_is_not_claimed() -> None:
    found = _orbit(0.0, 0.0005, sigma=4e-3)

    assert _decision(found.solution, "orbit").chosen == "circular"


def test_omega_that_may_be_anything_is_not_quoted() -> None:
    """An eccentric orbit asked for where it is circular; in most draws of noise e is below its error."""
    truth, plan = invented(), ephemeris(orbit="eccentric")
    many = [
        solved(truth, plan, photometry=observed(truth, seed=seed)).solution for seed in range(4)
    ]
    unknown = [each for each in many if "omega" not in each.estimates]
    size = [each.estimates["eccentricity"] for each in many]

    assert len(unknown) == sum(each.value < each.minus for each in size) > 0
    found = unknown[0]
    assert "periastron may lie anywhere" in found.absent["omega"]
    assert found.absent["K1"] == "the velocities of star 1 were not measured"


def test_omega_has_a_true_error_at_zero() -> None:
    """Regression: where omega passes 360 degrees its error came out as thousands of degrees.

    e sin w is known to be 0 within 1e-6 here, so that omega is 0 within 1e-6/e radians.
    """
    truth = invented(ecosw=0.05, esinw=0.0)
    photometry = observed(truth, middles=(0.0, secondary_phase(truth)))
    plan = ephemeris(priors=(Prior("esinw", (0.0,), (1e-6,)),))
    found = solved(truth, plan, photometry=photometry).solution.estimates["omega"]

    assert 0 <= found.value < 360
    assert (found.value + 180) % 360 - 180 == pytest.approx(0.0, abs=0.01)
    assert sigma_of(found) == pytest.approx(np.degrees(1e-6 / 0.05), rel=0.05)


def test_both_shapes_have_their_words() -> None:
    without, with_ = (
        _decision(each.solution, "orbit").words for each in (ordinary(), _orbit(0.02, 0.02))
    )

    assert without.startswith("an eccentric orbit wins only")
    assert with_.endswith("is needed at one per cent: eccentric")
