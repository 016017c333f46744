"""How far measurements are believed: outliers, misjudged errors, jitter, missing errors, sources."""

from __future__ import annotations

from dataclasses import replace
from math import sqrt

import numpy as np
import pytest
from numpy.typing import NDArray

from fit_examples import (
    Solved,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    sigma_of,
    solved,
    velocities_of,
)
from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.model import model_velocities
from shadowscale.fit.plan import Prior
from shadowscale.fit.weights import (
    error_scale,
    needed_jitter,
    outlier_limit,
    velocity_outliers,
)

Floats = NDArray[np.float64]


def _spoilt(photometry: Photometry, rows: Floats | list[int], shift: float) -> Photometry:
    """Some rows moved by so many sigmas."""
    flux = photometry.flux.copy()
    flux[rows] += shift * photometry.flux_error[rows]
    return replace(photometry, flux=flux)


def _again(photometry: Photometry | None = None, velocities: Velocities | None = None) -> Solved:
    known = ordinary()
    photometry = known.photometry if photometry is None else photometry
    return solved(known.truth, photometry=photometry, velocities=velocities)


# ---------------------------------------------------------------- outliers


def test_outliers_are_set_aside_and_nothing_else() -> None:
    rows = [20, 111, 350, 351, 600]
    found = _again(_spoilt(ordinary().photometry, rows, 15)).solution
    aside = np.flatnonzero(found.light.why)

    assert aside.tolist() == rows
    assert {found.light.reasons[code] for code in found.light.why[rows]} == {
        "outlier: set aside by the fit"
    }
    assert found.fit.points == 700 - len(rows)


def test_a_solution_with_outliers_is_that_without_them() -> None:
    known = ordinary().photometry
    rows = np.zeros(700, dtype=bool)
    rows[[20, 111, 350, 351, 600]] = True
    with_them = _again(_spoilt(known, list(np.flatnonzero(rows)), -15)).solution.estimates
    without = _again(known.excluded(rows, "by hand")).solution.estimates

    for name in ("radius_sum", "radius_ratio", "inclination", "epoch"):
        assert with_them[name].value == pytest.approx(
            without[name].value, abs=0.01 * sigma_of(without[name])
        )
        assert sigma_of(with_them[name]) == pytest.approx(sigma_of(without[name]), rel=1e-3)


@pytest.mark.parametrize("seed", range(3))
def test_good_rows_are_kept(seed: int) -> None:
    """Of Gaussian noise 0.05 rows in a whole table may be lost: none, most of the time."""
    found = _again(observed(ordinary().truth, seed=100 + seed)).solution

    assert np.count_nonzero(found.light.why) == 0


@pytest.mark.parametrize("value", [3.0, 30.0, 1e3, 1e6, -50.0])
def test_one_wild_point_does_no_harm(value: float) -> None:
    """Regression: a point of 30 times the light and more spoilt everything in silence."""
    known = ordinary().photometry
    flux = known.flux.copy()
    flux[100] = value
    found = _again(replace(known, flux=flux)).solution

    assert found.light.why[100] != 0
    assert np.count_nonzero(found.light.why) <= 3
    assert found.estimates["radius_ratio"].value == pytest.approx(0.78, abs=0.003)
    assert found.fit.error_scale["V"] == pytest.approx(1.0, abs=0.1)


def test_several_wild_points_do_no_harm() -> None:
    """Ten of 700 rows, alike or not: more than a half per cent."""
    known = ordinary().photometry
    rows = np.arange(10) * 69
    flux = known.flux.copy()
    flux[rows] = np.geomspace(20, 1e5, 10)
    found = _again(replace(known, flux=flux)).solution

    assert np.all(found.light.why[rows] != 0)
    assert np.count_nonzero(found.light.why) <= 12
    assert found.estimates["radius_ratio"].value == pytest.approx(0.78, abs=0.003)


def test_rows_set_aside_by_the_user_stay_aside() -> None:
    known = ordinary().photometry
    rows = np.zeros(700, dtype=bool)
    rows[:50] = True
    found = _again(known.excluded(rows, "cloud")).solution

    assert {found.light.reasons[code] for code in found.light.why[:50]} == {"cloud"}
    assert found.fit.points == 650
    assert np.all(np.isfinite(found.light.model))


def test_every_row_has_a_model_used_or_not() -> None:
    known = ordinary()
    outside = known.solution.light
    scatter = np.std(known.photometry.flux - outside.model)

    assert scatter == pytest.approx(1e-3, rel=0.1)
    assert outside.phase.min() >= -0.25
    assert outside.phase.max() < 0.75


def test_limit_of_outliers_grows_with_the_table() -> None:
    """0.05 rows of a Gaussian table lie beyond: n erfc(z/sqrt 2) = 0.05 (evaluated with scipy.special)."""
    from scipy.special import erfc

    for count in (1000, 100_000):
        assert count * erfc(outlier_limit(count) / sqrt(2)) == pytest.approx(0.05, rel=1e-9)
    assert outlier_limit(10) == 3.5


# ---------------------------------------------------------------- errors


@pytest.mark.parametrize("factor", [0.2, 5.0])
def test_misjudged_errors_are_scaled(factor: float) -> None:
    known = ordinary().photometry
    found = _again(replace(known, flux_error=known.flux_error * factor)).solution
    right = _again().solution

    assert found.fit.error_scale["V"] == pytest.approx(
        right.fit.error_scale["V"] / factor, rel=1e-3
    )
    assert found.fit.raw_reduced_chi2["V"] == pytest.approx(
        right.fit.raw_reduced_chi2["V"] / factor**2, rel=1e-3
    )
    for name in ("radius_sum", "radius_ratio"):
        assert sigma_of(found.estimates[name]) == pytest.approx(
            sigma_of(right.estimates[name]), rel=2e-3
        )


def test_each_band_has_its_own_scale() -> None:
    truth = invented(bands={"V": 0.62, "I": 0.74})
    known = observed(truth, count=500)
    error = np.where(known.band == 1, known.flux_error / 3, known.flux_error)
    found = _again(replace(known, flux_error=error)).solution.fit.error_scale

    assert found["V"] == pytest.approx(1.0, abs=0.1)
    assert found["I"] == pytest.approx(3.0, abs=0.3)


def test_scale_makes_reduced_chi_squared_one() -> None:
    """sqrt(chi2/(points - taken)) (standard)."""
    assert error_scale(400.0, 110, 10.0) == pytest.approx(2.0)


def test_a_zero_error_scale_is_not_met() -> None:
    assert error_scale(0.0, 100, 5.0) > 0


# ---------------------------------------------------------------- velocities


def test_jitter_is_found_and_no_other() -> None:
    """Velocities twice as scattered as their errors say; jitter as Gaussian noise in quadrature."""
    truth = ordinary().truth
    good = observed_velocities(truth, count=40, sigma=0.5)
    restless = replace(
        observed_velocities(truth, count=40, sigma=1.3), rv1_error=np.full(40, 0.5),
        rv2_error=np.full(40, 0.5),
    )  # fmt: skip
    calm, moved = _again(velocities=good).solution, _again(velocities=restless).solution

    assert calm.fit.jitter == {}
    assert set(moved.fit.jitter) == {"north, star 1", "north, star 2"}
    for value in moved.fit.jitter.values():
        assert value == pytest.approx(1.2, abs=0.35)
    assert sigma_of(moved.estimates["K1"]) == pytest.approx(1.3 * sqrt(2 / 40), rel=0.3)
    assert moved.fit.raw_reduced_chi2["velocities, star 1"] == pytest.approx(6.8, rel=0.5)


def test_needed_jitter_makes_reduced_chi_squared_one() -> None:
    random = np.random.default_rng(3)
    residual, error = 2.0 * random.standard_normal(50), np.full(50, 0.7)
    jitter = needed_jitter(residual, error, 2.0)

    assert np.sum(residual**2 / (error**2 + jitter**2)) == pytest.approx(48.0)
    assert needed_jitter(0.7 * random.standard_normal(50), error, 2.0) == 0.0
    assert needed_jitter(residual[:2], error[:2], 2.0) == 0.0


def test_sources_are_offset_against_the_first() -> None:
    truth = ordinary().truth
    velocities = observed_velocities(
        truth, count=45, offsets={"north": 0.0, "south": 3.0, "old": -7.0}
    )
    found = _again(velocities=velocities)
    estimates = found.solution.estimates

    assert "offset1[north]" not in estimates
    for star in (1, 2):
        for source, offset in (("south", 3.0), ("old", -7.0)):
            assert abs(found.pull(f"offset{star}[{source}]", offset)) < 3.5
        assert abs(found.pull(f"K{star}")) < 3.5
        assert abs(found.pull(f"gamma{star}")) < 3.5
    assert found.solution.velocity is not None
    residual = velocities.rv1 - found.solution.velocity.model1
    assert np.std(residual) == pytest.approx(0.5, rel=0.25)


def test_velocities_without_errors() -> None:
    """Their errors are their scatter about the model: sigma sqrt(2/N) of K comes out again."""
    truth = ordinary().truth
    known = observed_velocities(truth, count=40, sigma=0.8)
    blind = replace(
        known, rv1_error=np.full(40, 1.0), rv2_error=np.full(40, 1.0), errors_from_scatter=True
    )
    found = _again(velocities=blind).solution

    assert sigma_of(found.estimates["K1"]) == pytest.approx(0.8 * sqrt(2 / 40), rel=0.3)
    assert found.fit.rms_velocity["star 1"] == pytest.approx(0.8, rel=0.3)


def test_a_wild_velocity_is_set_aside() -> None:
    truth = ordinary().truth
    known = observed_velocities(truth, count=20)
    rv1 = known.rv1.copy()
    rv1[7] += 40
    found = _again(velocities=replace(known, rv1=rv1))
    result = found.solution.velocity

    assert result is not None
    assert np.flatnonzero(result.why1).tolist() == [7]
    assert result.reasons[result.why1[7]] == "outlier: set aside by the fit"
    assert not result.why2.any()
    assert found.solution.fit.jitter == {}
    assert abs(found.pull("K1")) < 3.5


def test_few_velocities_have_no_outliers() -> None:
    assert not velocity_outliers(np.array([0.0, 0.1, -0.1, 50.0]), np.full(4, 0.1)).any()


# ---------------------------------------------------------------- one star, or none, measured


def test_one_lined_pair() -> None:
    """log g of star 2 without any model (Southworth et al. 2004, MNRAS 355, 986); masses absent, with words."""
    truth = ordinary().truth
    found = _again(velocities=observed_velocities(truth, stars=1)).solution
    k1, r2 = truth.value("K1"), 0.27 * 0.78 / 1.78
    sine = np.sin(np.radians(truth.value("inclination")))
    expected = 0.86166612587922 + np.log10(k1 / (truth.value("period") * r2**2 * sine))

    assert found.estimates["logg2"].value == pytest.approx(expected, abs=0.004)
    assert sigma_of(found.estimates["logg2"]) < 0.002
    for name in ("M1", "M2", "R1", "R2", "a", "logg1", "mass_ratio"):
        assert name not in found.estimates
        assert "only star 1 was measured" in found.absent[name]
    assert "K2" not in found.estimates
    assert "mass ratio" in found.absent["density1"]
    assert found.system.light_time is False


def test_one_lined_pair_with_an_assumed_mass() -> None:
    """M2 of f(M) = M2^3 sin^3 i/(M1 + M2)^2: the truth of the invented pair, marked as assumed."""
    truth = ordinary().truth
    velocities = observed_velocities(truth, stars=1)
    plan = ephemeris(priors=(Prior("M1", (1.27,), (0.05,)),))
    found = solved(truth, plan, photometry=ordinary().photometry, velocities=velocities).solution
    estimates = found.estimates
    whole = truth.value("K1") + truth.value("K2")
    second = 1.03614906659e-7 * whole**2 * truth.value("K1") * truth.value("period")

    assert estimates["M1"].how == "assumed"
    assert (estimates["M1"].value, estimates["M1"].minus) == (1.27, pytest.approx(0.05))
    assert estimates["M2"].how == "derived"
    assert estimates["M2"].value == pytest.approx(second, abs=0.03)
    assert sigma_of(estimates["M2"]) > 0.01
    assert estimates["a"].value == pytest.approx(10.17, abs=0.12)


def test_only_star_2_measured() -> None:
    known = ordinary()
    assert known.velocities is not None
    count = known.velocities.time.size
    nothing = np.full(count, np.nan)
    velocities = replace(
        known.velocities, rv1=nothing, rv1_error=nothing, why1=np.ones(count, dtype=np.int64)
    )
    found = _again(velocities=velocities).solution

    assert found.estimates["K2"].value == pytest.approx(112.9, abs=0.6)
    assert "K1" not in found.estimates
    assert "only star 2 was measured" in found.absent["M1"]


def test_no_velocities_at_all() -> None:
    """Fractional radii and what follows from light alone; no size of anything."""
    found = _again().solution

    assert found.velocity is None
    assert {"r1", "r2", "T14_1", "T23_1", "depth1", "impact1"} <= set(found.estimates)
    for name in ("M1", "R1", "a", "logg1", "logg2", "vsync1", "density1"):
        assert name not in found.estimates
        assert name in found.absent


def test_densities_for_an_assumed_mass_ratio() -> None:
    """rho1/rho_sun = 0.013417964169/(P^2 r1^3 (1 + q)) (P in days; evaluated apart), 1409.78 kg m^-3."""
    known = ordinary()
    plan = ephemeris(priors=(Prior("mass_ratio", (0.87,), (0.03,)),))
    found = solved(known.truth, plan, photometry=known.photometry).solution.estimates
    r1, period = found["r1"].value, found["period"].value

    assert found["mass_ratio"].how == "assumed"
    assert found["density1"].value == pytest.approx(
        1409.7798 * 0.013417964169 / (period**2 * r1**3 * 1.87), rel=1e-6
    )
    assert sigma_of(found["density1"]) / found["density1"].value > 0.03 / 1.87


def test_velocities_alone_with_the_star_2_missing_in_some_rows() -> None:
    truth, random = ordinary().truth, np.random.default_rng(6)
    time = np.sort(truth.value("epoch") + random.uniform(0, 30, 25))
    curves = [model_velocities(truth, n, time) + 0.5 * random.standard_normal(25) for n in (1, 2)]
    curves[1][[2, 9, 10]] = np.nan
    found = _again(velocities=velocities_of(time, curves[0], curves[1], 0.5))

    assert abs(found.pull("K2")) < 3.5
    assert found.solution.fit.points == 700 + 25 + 22


def test_gravity_of_star_1_from_the_motion_of_star_2() -> None:
    """log g of star 1 needs no model either: the same formula with the other star's motion."""
    truth = ordinary().truth
    both = observed_velocities(truth)
    found = _again(velocities=replace(both, why1=np.ones_like(both.why1))).solution
    k2, r1 = truth.value("K2"), 0.27 / 1.78
    sine = np.sin(np.radians(truth.value("inclination")))
    expected = 0.86166612587922 + np.log10(k2 / (truth.value("period") * r1**2 * sine))

    assert found.estimates["logg1"].value == pytest.approx(expected, abs=0.004)
    for name in ("M1", "M2", "R1", "R2", "a", "logg2", "mass_ratio"):
        assert "only star 2 was measured" in found.absent[name]
