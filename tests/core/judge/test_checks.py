"""Every registered check: one case that it must let through, one that it must not."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from made_up import made_up_light
from made_up_judge import (
    Case,
    dropped_by_fit,
    good_case,
    phase_of,
    set_aside,
    with_correlation,
    with_estimates,
    with_fit,
    with_free,
    with_light,
    with_residuals,
    with_sigmas,
    with_solution,
    with_system,
    with_values,
)
from shadowscale.fit.solution import Alternative, Decision
from shadowscale.judge.audit import CHECKS
from shadowscale.judge.finding import FAIL, PASS, WARN
from shadowscale.quantities import quantity_of

GOOD = good_case()
LIGHT_ONLY = good_case(velocities=False)


def equal_eclipses(case: Case = LIGHT_ONLY) -> Case:
    """Both eclipses are the primary one."""
    return with_light(case, made_up_light(np.mod(phase_of(case) + 0.25, 0.5) - 0.25))


def one_eclipse(case: Case = LIGHT_ONLY) -> Case:
    """No secondary eclipse."""
    phase = phase_of(case)
    return with_light(case, made_up_light(np.where(np.abs(phase) < 0.25, phase, 0.25)))


def late_secondary() -> Case:
    """Secondary eclipse 0.002 later than the model has it."""
    phase = phase_of(GOOD)
    noise = GOOD.photometry.flux - GOOD.solution.light.model
    light = made_up_light(np.where(np.abs(phase) > 0.25, phase - 0.002, phase))
    return with_residuals(GOOD, light - GOOD.solution.light.model + noise)


def alike_neighbours() -> Case:
    """Residuals of which each remembers 0.6 of the one before."""
    random = np.random.default_rng(4)
    noise = 0.004 * random.standard_normal(GOOD.photometry.time.size)
    for row in range(1, noise.size):
        noise[row] = 0.6 * noise[row - 1] + 0.8 * noise[row]
    return with_residuals(GOOD, noise)


def wandering_nights(case: Case = GOOD, *, by: float = 0.15) -> Case:
    """Nights whose level scatters nearly as much as an eclipse is deep; the fit took the levels up."""
    night = case.photometry.night
    level = 1 + by * np.random.default_rng(6).standard_normal(int(night.max()) + 1)[night]
    light = case.solution.light
    residual = case.photometry.flux - light.model
    light = replace(light, level=light.level * level, model=light.model * level)
    photometry = replace(case.photometry, flux=light.model + residual * level)
    return with_solution(replace(case, photometry=photometry), light=light)


def slow_waves() -> Case:
    """White noise and a wave of two hours of the same size."""
    random = np.random.default_rng(5)
    noise = 0.004 * random.standard_normal(GOOD.photometry.time.size)
    wave = 0.005 * np.sin(2 * np.pi * GOOD.photometry.time * 4.1)
    return with_residuals(GOOD, noise + wave)


def velocities_at_eclipse() -> Case:
    """Velocities only where they show nothing."""
    table, result = GOOD.velocities, GOOD.solution.velocity
    assert table is not None
    assert result is not None
    far = np.abs(np.sin(2 * np.pi * result.phase)) > 0.6
    table = table.excluded(1, far, "far").excluded(2, far, "far")
    result = replace(result, why1=table.why1, why2=table.why2)
    return with_solution(replace(GOOD, velocities=table), velocity=result)


def long_exposures(case: Case = GOOD, *, seconds: float = 1800.0) -> Case:
    """Files that print how long the exposures were; the model takes them for instants."""
    exposure = np.full(case.photometry.time.size, seconds)
    return replace(case, photometry=replace(case.photometry, exposure=exposure))


def no_ingress() -> Case:
    """Points only at mid eclipse and outside."""
    distance = np.abs(np.mod(phase_of(GOOD) + 0.25, 0.5) - 0.25)
    return set_aside(GOOD, (distance > 0.002) & (distance < 0.046))


def half_primary() -> Case:
    """The second half of primary eclipse was not observed."""
    phase = phase_of(GOOD)
    return set_aside(GOOD, (phase > 0) & (phase < 0.05))


def limb_moves_radii() -> Case:
    """Limb darkening free, and nearly all of k's error."""
    limb = "limb_darkening1[V].1"
    case = with_sigmas(with_free(GOOD, {limb: (0.6, 0.05)}), radius_ratio=0.02, r1=0.002, r2=0.002)
    return with_correlation(case, {("radius_ratio", limb): 0.97})


def third_goes_with_inclination() -> Case:
    """Third light free, hardly told from the inclination, and nearly all of k's error."""
    case = with_free(GOOD, {"third_light[V]": (0.03, 0.02)})
    ratio = GOOD.solution.system.values["radius_ratio"]
    numbers = {
        "sigma_third_light[V]": 0.02,
        "sigma_radius_ratio_held": 0.004 * ratio,
        "sigma_radius_ratio_free": 0.032 * ratio,
    }
    decision = Decision("third light", "not seen", "third light is free", numbers)
    case = with_solution(case, decisions=(decision,))
    case = with_solution(case, correlation_names=(), correlations=np.empty((0, 0)))
    return with_correlation(case, {("third_light[V]", "inclination"): -0.98})


def mixed_clocks() -> Case:
    """Photometry in TDB, velocities in UTC."""
    assert GOOD.velocities is not None
    return replace(GOOD, velocities=replace(GOOD.velocities, time_scale="HJD_UTC"))


def alternatives(*others: Alternative) -> Case:
    """Other solutions beside the good one."""
    return with_solution(GOOD, alternatives=others)


# name of the check: what it must not let through, the verdict then, a word that must be said.
SPOILT: dict[str, tuple[Callable[[], Case], str, str]] = {
    "convergence": (lambda: with_fit(GOOD, converged=False), FAIL, "not settled"),
    "edge of range": (
        lambda: with_free(GOOD, {"third_light[V]": (quantity_of("third_light").upper, 0.01)}),
        FAIL,
        "third_light[V] = ",
    ),
    "finite errors": (lambda: with_sigmas(GOOD, radius_ratio=np.nan), FAIL, "radius_ratio"),
    "absent": (
        lambda: with_solution(GOOD, absent={"M1": "needs both velocity curves"}),
        WARN,
        "Needs both velocity curves",
    ),
    "fill-out": (lambda: with_values(GOOD, radius_sum=0.70), FAIL, "semi-detached or in contact"),
    "oblateness": (lambda: with_values(GOOD, radius_sum=0.48), FAIL, "too much for two spheres"),
    "ellipsoidal variation": (
        lambda: with_system(GOOD, effects={"ellipsoidal": "off"}),
        WARN,
        "Switch the effect on",
    ),
    "ratio of radii": (lambda: with_sigmas(GOOD, radius_ratio=0.06), WARN, "light ratio"),
    "mirror solution": (
        lambda: alternatives(Alternative("radii exchanged", {"radius_ratio": 1.28}, 2.0)),
        WARN,
        "k = 1.28",
    ),
    "other solutions": (
        lambda: alternatives(Alternative("period twice as long", {"period": 4.87}, 1.5)),
        WARN,
        "period twice as long",
    ),
    "period": (equal_eclipses, WARN, "half of this one"),
    "eccentricity": (
        lambda: with_free(GOOD, {"ecosw": (0.001, 0.001), "esinw": (0.0, 0.004)}),
        WARN,
        "often noise",
    ),
    "place of eclipses": (late_secondary, WARN, "later than the model"),
    "time scale": (mixed_clocks, WARN, "69 seconds"),
    "masses": (lambda: with_estimates(GOOD, {"M1": (190.0, 1.0)}), FAIL, "no star's"),
    "radii": (lambda: with_estimates(GOOD, {"R1": (0.4, 0.01)}), WARN, "stripped"),
    "gravities and densities": (
        lambda: with_estimates(GOOD, {"logg2": (7.9, 0.01)}),
        FAIL,
        "log g = 7.90",
    ),
    "order of densities": (
        lambda: with_values(GOOD, radius_ratio=1.3),
        WARN,
        "the other way round",
    ),
    "third light": (
        lambda: with_free(GOOD, {"third_light[V]": (-0.05, 0.01)}),
        FAIL,
        "negative by 5",
    ),
    "third light and inclination": (
        third_goes_with_inclination,
        WARN,
        "known to 3.20 % where it could be 0.4",
    ),
    "limb darkening": (
        lambda: with_system(
            GOOD, values={**GOOD.solution.system.values, "limb_darkening2[V].1": 1.3}
        ),
        FAIL,
        "darker than black",
    ),
    "limb darkening and radii": (limb_moves_radii, WARN, "of the variance of r"),
    "size of the errors": (
        lambda: with_fit(GOOD, raw_reduced_chi2={"V": 4.0}),
        WARN,
        "V: residuals are 2",
    ),
    "neighbouring residuals": (alike_neighbours, WARN, "alike"),
    "slow noise": (slow_waves, WARN, "slow noise"),
    "levels of the nights": (wandering_nights, WARN, "one by one"),
    "outliers": (
        lambda: dropped_by_fit(GOOD, np.arange(GOOD.photometry.time.size) % 20 == 0),
        WARN,
        "(5.04 %)",
    ),
    "points per quantity": (lambda: with_fit(GOOD, points=60), WARN, "60 points"),
    "exposure time": (long_exposures, WARN, "Solve again with --exposure 1800"),
    "points in ingress": (no_ingress, FAIL, "0 points in ingress"),
    "coverage of eclipses": (half_primary, WARN, "primary eclipse in band V to 50 %"),
    "coverage of velocities": (velocities_at_eclipse, FAIL, "near quadrature"),
}


@pytest.mark.parametrize("name", CHECKS)
def test_lets_a_good_solution_through(name: str) -> None:
    finding = GOOD.finding(name)

    assert finding.verdict == PASS, finding.words


@pytest.mark.parametrize("name", CHECKS)
def test_does_not_let_its_own_trouble_through(name: str) -> None:
    build, verdict, word = SPOILT[name]

    finding = build().finding(name)

    assert verdict == finding.verdict, finding.words
    assert word in finding.words


@pytest.mark.parametrize("name", CHECKS)
def test_speaks_plainly(name: str) -> None:
    """Sentences, a source, and no verdict without words."""
    build, _, _ = SPOILT[name]
    for finding in (GOOD.finding(name), build().finding(name)):
        assert finding.words.endswith("."), finding.words
        assert not finding.words[0].isspace()
        assert finding.source
        assert "nan" not in finding.words, finding.words
    assert CHECKS[name].meaning.endswith("?")


def test_dips_of_light_that_wanders_are_refused() -> None:
    """Levels and neighbours together: a warning for either alone, no sheet for both."""
    finding = wandering_nights(alike_neighbours()).finding("levels of the nights")

    assert (finding.verdict, finding.fatal) == (FAIL, True)
    assert "no eclipse is seen for certain" in finding.words
    assert wandering_nights(alike_neighbours(), by=0.02).finding(finding.check).verdict == PASS


def dropped_in_a_row(count: int, *, fainter: float) -> Case:
    """So many points of one night outside eclipse, set aside by the fit."""
    phase, night = np.abs(phase_of(GOOD)), GOOD.photometry.night
    outside = (phase > 0.1) & (phase < 0.4)
    whole = next(n for n in np.unique(night) if np.all(outside[night == n]))
    rows = np.flatnonzero(night == whole)[3 : 3 + count]
    residual = GOOD.photometry.flux - GOOD.solution.light.model
    residual[rows] = -fainter
    chosen = np.zeros(night.size, bool)
    chosen[rows] = True
    return dropped_by_fit(with_residuals(GOOD, residual), chosen)


def test_an_eclipse_that_the_model_does_not_know_is_no_set_of_outliers() -> None:
    finding = dropped_in_a_row(8, fainter=0.2).finding("outliers")
    assert finding.verdict == FAIL
    assert "8 of them follow each other in one night" in finding.words
    assert dropped_in_a_row(4, fainter=0.2).finding("outliers").verdict == PASS
    assert dropped_in_a_row(8, fainter=-0.2).finding("outliers").verdict == PASS


def test_exposures_that_were_told_are_no_trouble() -> None:
    told = with_system(long_exposures(), exposure=1764.0)
    assert told.finding("exposure time").verdict == PASS
    assert long_exposures(seconds=60.0).finding("exposure time").verdict == PASS


def test_even_points_far_apart_ask_for_the_exposure() -> None:
    """As far apart as points from space, and an ingress of two hours."""
    case = good_case()
    time = case.photometry.time[0] + np.arange(case.photometry.time.size) / 32
    even = replace(
        case, photometry=replace(case.photometry, time=time, night=np.zeros(time.size, int))
    )
    finding = even.finding("exposure time")
    assert finding.verdict == WARN
    assert "every 45 minutes" in finding.words
    assert with_system(even, exposure=1764.0).finding("exposure time").verdict == PASS


@pytest.mark.parametrize(
    ("case", "check", "says"),
    [
        (lambda: with_sigmas(GOOD, period=0.4), "finite errors", "do not measure it"),
        (lambda: with_sigmas(GOOD, radius_sum=0.2), "finite errors", "sum of the fractional radii"),
        (
            lambda: with_estimates(GOOD, {"depth1": (0.004, 0.0035), "depth2": (0.007, 0.0023)}),
            "finite errors",
            "takes 0.70 ± 0.23 % of the light",
        ),
        (
            lambda: with_free(GOOD, {"radius_ratio": (quantity_of("radius_ratio").upper, 0.1)}),
            "edge of range",
            "radius_ratio = 200",
        ),
    ],
)
def test_what_is_not_measured_is_not_reported(
    case: Callable[[], Case], check: str, says: str
) -> None:
    finding = case().finding(check)
    assert (finding.verdict, finding.fatal) == (FAIL, True)
    assert says in finding.words
