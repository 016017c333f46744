"""The numbers behind the checks, against outside truths and brute force."""

from __future__ import annotations

from dataclasses import replace
from math import asin, log, pi, radians, sin, sqrt

import numpy as np
import pytest

from made_up import EPOCH, INCLINATION, PERIOD, R1, R2, made_up_light
from made_up_judge import (
    dropped_by_fit,
    good_case,
    phase_of,
    set_aside,
    with_correlation,
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
from shadowscale.judge.checks.coverage import INGRESS_ERROR, Sides, covered_share, quadrature_counts
from shadowscale.judge.checks.eclipses import mirror_solution
from shadowscale.judge.checks.light import limb_error, limb_share, radius_gradient
from shadowscale.judge.checks.orbit import eclipse_shift
from shadowscale.judge.checks.period import measured_depth
from shadowscale.judge.checks.residuals import neighbour_statistic, noise_factor
from shadowscale.judge.checks.shape import lobe_shares, predicted_amplitude, wave_in_residuals
from shadowscale.judge.checks.stars import young_radius
from shadowscale.judge.finding import FAIL, PASS, WARN
from shadowscale.judge.windows import eclipse_windows, secondary_phase

GOOD = good_case()
LIGHT_ONLY = good_case(velocities=False)


# Windows


@pytest.mark.parametrize(
    ("ecosw", "esinw", "inclination", "radii", "primary", "secondary"),
    [
        # T14/P of the exact orbit (root finding on the projected separation, computed with scipy).
        (0.0, 0.0, 90.0, (0.10, 0.05), 0.04792737, 0.04792737),
        (0.0, 0.0, 85.0, (0.15, 0.12), 0.08257673, 0.08257673),
        (0.2 * sqrt(3) / 2, 0.1, 89.0, (0.08, 0.06), 0.03961708, 0.04824390),
        (-0.1, 0.2 * sqrt(3) / 2, 89.0, (0.08, 0.06), 0.03718140, 0.05241482),
    ],
)
def test_windows_are_as_long_as_the_eclipses(
    ecosw: float,
    esinw: float,
    inclination: float,
    radii: tuple[float, float],
    primary: float,
    secondary: float,
) -> None:
    first, second = eclipse_windows(radii, radians(inclination), ecosw=ecosw, esinw=esinw)

    assert primary == pytest.approx(2 * first.outer, rel=3e-3)
    assert secondary == pytest.approx(2 * second.outer, rel=3e-3)


@pytest.mark.parametrize(
    ("e", "omega", "expected"),
    # Conjunctions by Kepler's equation (computed with scipy).
    [(0.2, 30.0, 0.61025900), (0.2, 120.0, 0.43547229), (0.489, 330.2, 0.76933395)],
)
def test_secondary_lies_where_kepler_has_it(e: float, omega: float, expected: float) -> None:
    angle = radians(omega)

    assert expected == pytest.approx(
        secondary_phase(e * np.cos(angle), e * np.sin(angle)), abs=1e-8
    )


@pytest.mark.parametrize(
    ("inclination", "radii", "kinds"),
    [
        (90.0, (0.2, 0.1), ("annular", "total")),
        (90.0, (0.1, 0.2), ("total", "annular")),
        (84.0, (0.15, 0.12), ("partial", "partial")),  # cos i = 0.105 < 0.15
        (80.0, (0.15, 0.12), ("grazing", "grazing")),  # cos i = 0.174: no centre is covered
        (70.0, (0.15, 0.12), ("none", "none")),  # cos i = 0.342 > 0.27
    ],
)
def test_kinds_of_eclipses(
    inclination: float, radii: tuple[float, float], kinds: tuple[str, str]
) -> None:
    windows = eclipse_windows(radii, radians(inclination), ecosw=0.0, esinw=0.0)

    assert kinds == tuple(window.kind for window in windows)


# Shape


def test_fill_out_is_radius_over_eggletons_lobe() -> None:
    case = with_values(GOOD, radius_sum=0.3, radius_ratio=1.0)

    first, second = lobe_shares(case.evidence, 1.0)

    assert first == pytest.approx(0.15 / 0.37892, rel=2e-5)  # Eggleton 1983, q = 1
    assert first == pytest.approx(second)


def test_lighter_star_has_the_smaller_lobe() -> None:
    case = with_values(GOOD, radius_sum=0.4, radius_ratio=1.0)

    first, second = lobe_shares(case.evidence, 0.5)

    assert first == pytest.approx(0.2 / 0.44000, rel=2e-5)  # Eggleton 1983, q = 2
    assert second == pytest.approx(0.2 / 0.32079, rel=2e-5)  # q = 0.5


def test_fill_out_counts_at_periastron() -> None:
    circular = CHECKS["fill-out"].function(GOOD.evidence, CHECKS["fill-out"])[0].value
    case = with_values(GOOD, ecosw=0.3, esinw=0.0)

    finding = case.finding("fill-out")

    assert circular is not None
    assert circular / 0.7 == pytest.approx(finding.value)
    assert "at periastron" in finding.words


@pytest.mark.parametrize(
    ("radius_sum", "verdict", "fatal"),
    [(0.3, PASS, False), (0.55, WARN, False), (0.68, FAIL, True)],
)
def test_only_a_full_lobe_is_fatal(radius_sum: float, verdict: str, fatal: bool) -> None:
    finding = with_values(GOOD, radius_sum=radius_sum).finding("fill-out")

    assert (verdict, fatal) == (finding.verdict, finding.fatal)


def test_unmeasured_mass_ratio_is_said_and_tried() -> None:
    finding = LIGHT_ONLY.finding("fill-out")
    large = with_values(LIGHT_ONLY, radius_sum=0.5, radius_ratio=1.0).finding("fill-out")

    assert "no mass ratio was measured" in finding.words
    assert finding.verdict == PASS
    assert large.verdict == WARN
    assert "would fill its lobe" in large.words


def test_ellipsoidal_amplitude_of_a_known_pair() -> None:
    """zeta Phe with u = 0.5, g = 0.32: 0.0136 for the primary (Morris & Naftilan 1993, computed)."""
    case = with_values(
        GOOD, radius_sum=0.25721 + 1e-6, radius_ratio=1e-6 / 0.25721, inclination=89.14
    )
    estimates = {
        name: value
        for name, value in case.solution.estimates.items()
        if name not in ("teff1", "mass_ratio", "light_ratio[V]", "third_light[V]")
    }
    values = {**case.solution.system.values, "K1": 131.4, "K2": 202.5, "third_light[V]": 0.0}
    estimates["K1"], estimates["K2"] = (
        replace(estimates["K1"], value=131.4),
        replace(estimates["K2"], value=202.5),
    )
    system = replace(case.solution.system, values=values)
    case = with_solution(case, estimates=estimates, system=system)

    assert predicted_amplitude(case.evidence, "V") == pytest.approx(0.0136, abs=5e-5)


@pytest.mark.parametrize("levels", ["one", "night", "trend"])
def test_error_of_a_wave_beside_levels(levels: str) -> None:
    """Against the inverse of the whole normal matrix, a column for every level and slope."""
    case = with_system(GOOD, levels=levels, effects={})
    light, outside = case.evidence.light, case.evidence.outside
    block = light.block[outside] if levels != "one" else 0 * light.block[outside]
    own = (block[:, None] == np.unique(block)).astype(float)
    time = (light.time[outside] - light.time[outside].mean())[:, None]
    columns = [np.cos(4 * pi * light.phase[outside])[:, None], own]
    if levels == "trend":
        columns.append(own * time)
    design = np.hstack(columns) / light.error[outside][:, None]
    expected = sqrt(np.linalg.pinv(design.T @ design)[0, 0])

    finding = case.finding("ellipsoidal variation")

    assert finding.value == pytest.approx(
        predicted_amplitude(case.evidence, "V") / expected, rel=1e-6
    )


# Residuals


def remembering(share: float, seed: int = 11, size: int | None = None) -> np.ndarray:
    """Noise of unit variance whose neighbours have a correlation of `share`."""
    random = np.random.default_rng(seed)
    noise = random.standard_normal(size or GOOD.photometry.time.size)
    for row in range(1, noise.size):
        noise[row] = share * noise[row - 1] + sqrt(1 - share**2) * noise[row]
    return noise


@pytest.mark.parametrize("share", [0.0, 0.4, 0.8])
def test_durbin_watson_of_known_noise(share: float) -> None:
    """The statistic tends to 2 (1 - rho) (Durbin & Watson 1950)."""
    case = with_residuals(GOOD, 0.004 * remembering(share))

    statistic, pairs = neighbour_statistic(case.evidence.light, 0)

    assert pairs > 2000
    assert 2 * (1 - share) == pytest.approx(statistic, abs=8 / sqrt(pairs))


@pytest.mark.parametrize("share", [0.0, 0.5, 0.8])
def test_growth_of_averages_of_known_noise(share: float) -> None:
    """Variance of a sum of n: n + 2 sum (n - k) rho^k, over the n of independent points."""
    case = with_residuals(GOOD, 0.004 * remembering(share))
    step = float(np.median(np.diff(case.photometry.time)[:50]))
    n = 10

    factor, bins = noise_factor(case.evidence.light, n * step * (1 + 1e-9))

    expected = sqrt(1 + 2 * sum((n - k) / n * share**k for k in range(1, n)))
    assert bins > 200
    assert expected == pytest.approx(factor, rel=4 * sqrt(1 / (2 * bins)) + 0.02)


def test_white_noise_of_two_sizes_is_not_slow_noise() -> None:
    case = good_case(("V", "I"))
    random = np.random.default_rng(3)
    size = np.where(case.photometry.band == 0, 0.002, 0.009)
    case = with_residuals(case, size * random.standard_normal(size.size))

    assert case.finding("slow noise").verdict == PASS
    assert case.finding("neighbouring residuals").verdict == PASS


def test_errors_far_off_mean_a_wrong_model() -> None:
    fit = replace(GOOD.solution.fit, raw_reduced_chi2={"V": 40.0})

    finding = with_solution(GOOD, fit=fit).finding("size of the errors")

    assert finding.verdict == FAIL
    assert "6.32 times" in finding.words


def test_errors_guessed_from_the_scatter_are_not_judged() -> None:
    photometry = replace(GOOD.photometry, errors_from_scatter=(True,))

    finding = replace(GOOD, photometry=photometry).finding("size of the errors")

    assert finding.verdict == PASS
    assert "no errors came with the data" in finding.words


def test_too_few_points_are_fatal() -> None:
    fit = replace(GOOD.solution.fit, points=11, free=12)

    assert with_solution(GOOD, fit=fit).finding("points per quantity").fatal


# Coverage


def test_ingress_error_is_that_of_a_trapezoid() -> None:
    """Against the Fisher matrix of a trapezoid in middle, duration, ingress and depth."""
    ingress, length, depth, error, step = 0.05, 0.2, 0.1, 0.01, 1e-4
    time = np.arange(-0.5, 0.5, step) + step / 2

    def trapezoid(middle: float, half: float, slope: float, deep: float) -> np.ndarray:
        return -deep * np.clip((half + slope / 2 - np.abs(time - middle)) / slope, 0, 1)

    start = np.array([0.0, length / 2, ingress, depth])
    jacobian = []
    for place in range(4):
        move = np.zeros(4)
        move[place] = 1e-6
        jacobian.append((trapezoid(*(start + move)) - trapezoid(*(start - move))) / 2e-6)
    design = np.array(jacobian) / error
    found = sqrt(np.linalg.inv(design @ design.T)[2, 2]) / ingress

    count = round(ingress / step)
    # Carter et al. 2008 leave out the level and terms of ingress/length (here 1/4).
    assert found == pytest.approx(Sides("primary", count, count, depth / error).error, rel=0.35)


def test_wanted_points_give_the_wanted_error() -> None:
    sides = Sides("primary", 0, 0, 12.0)
    count = int(np.ceil(sides.needed))

    assert Sides("primary", count, count, 12.0).error == pytest.approx(INGRESS_ERROR, rel=0.05)


def test_covered_share_counts_tenths() -> None:
    phase = phase_of(GOOD)
    window = GOOD.evidence.windows[0]
    case = set_aside(GOOD, (phase > window.outer * 0.4) & (phase < window.outer))

    assert covered_share(case.evidence, window, band=0) == pytest.approx(0.7)


def test_unseen_primary_fails() -> None:
    case = set_aside(GOOD, np.abs(phase_of(GOOD)) < 0.04)

    assert case.finding("coverage of eclipses").verdict == FAIL


def test_quadratures_by_counting_phases() -> None:
    result = GOOD.solution.velocity
    assert result is not None
    wave = -np.sin(2 * pi * result.phase)  # star 1 of a circular orbit, receding before secondary

    receding, approaching = quadrature_counts(GOOD.evidence, 1) or (0, 0)

    assert (int((wave > 0.7).sum()), int((wave < -0.7).sum())) == (receding, approaching)


# Orbit


def test_depth_from_the_points_themselves() -> None:
    deeper = with_residuals(
        GOOD,
        GOOD.photometry.flux - GOOD.solution.light.model - 0.01 * (np.abs(phase_of(GOOD)) < 0.05),
    )
    rows = np.ones(GOOD.evidence.light.size, dtype=bool)
    window = GOOD.evidence.windows[0]

    before = measured_depth(GOOD.evidence, window, rows)
    after = measured_depth(deeper.evidence, window, rows)

    assert after.value - before.value == pytest.approx(0.01, abs=1e-9)
    expected = 1 - made_up_light(np.array([0.0]))[0]
    assert expected == pytest.approx(before.value, abs=4 * before.error)


def test_shift_of_an_eclipse_is_recovered() -> None:
    phase, moved = phase_of(GOOD), 4e-4
    noise = GOOD.photometry.flux - GOOD.solution.light.model
    case = with_residuals(GOOD, made_up_light(phase - moved) - GOOD.solution.light.model + noise)

    shift, error = eclipse_shift(case.evidence, case.evidence.windows[0])

    assert moved == pytest.approx(shift, abs=4 * error)
    assert error < moved / 5


def test_limit_of_eccentricity_is_five_per_cent() -> None:
    """Lucy & Sweeney 1971: chance of a circular orbit exp(-x^2/2) = 0.05."""
    assert sqrt(-2 * log(0.05)) == pytest.approx(CHECKS["eccentricity"].limit, abs=0.003)


def test_sure_eccentricity_passes() -> None:
    case = with_free(GOOD, {"ecosw": (0.05, 0.001), "esinw": (0.02, 0.004)})

    finding = case.finding("eccentricity")

    # By hand: direction (0.9285, 0.3714), sigma^2 = 0.9285^2 1e-6 + 0.3714^2 16e-6.
    assert sqrt(0.05**2 + 0.02**2) / sqrt(0.862069e-6 + 2.206897e-6) == pytest.approx(
        finding.value, rel=1e-5
    )
    assert finding.verdict == PASS


def test_eccentricity_from_durations_alone_is_doubted() -> None:
    case = with_free(LIGHT_ONLY, {"ecosw": (0.0001, 0.0002), "esinw": (0.06, 0.01)})

    finding = case.finding("eccentricity")

    assert finding.verdict == WARN
    assert "durations" in finding.words


def test_reason_of_the_orbit_is_quoted() -> None:
    words = "the data prefer a circular orbit by 9 in BIC"
    case = with_solution(GOOD, decisions=(Decision("orbit", "circular", words),))

    assert "The data prefer a circular orbit by 9 in BIC." in case.finding("eccentricity").words


def test_missing_secondary_asks_for_twice_the_period() -> None:
    phase = phase_of(LIGHT_ONLY)
    case = with_light(LIGHT_ONLY, made_up_light(np.where(np.abs(phase) < 0.25, phase, 0.25)))

    finding = case.finding("period")

    assert finding.verdict == WARN
    assert "No secondary eclipse is seen" in finding.words
    assert "Odd and even eclipses are equal" in finding.words


def test_unequal_odd_eclipses_reveal_twice_the_period() -> None:
    phase = phase_of(LIGHT_ONLY)
    case = with_light(LIGHT_ONLY, made_up_light(np.where(np.abs(phase) < 0.25, phase, 0.25)))
    cycle = np.round((case.photometry.time - EPOCH) / PERIOD)
    odd = (np.mod(cycle, 2) == 1) & (np.abs(phase) < 0.04)
    case = with_residuals(
        case, case.photometry.flux - case.solution.light.model + np.where(odd, 0.03, 0.0)
    )

    assert "probably twice as long" in case.finding("period").words


def test_an_eclipse_that_comes_back_half_a_period_later_halves_the_period() -> None:
    """A model with one eclipse a period; the light has another like it, half a period later."""
    once = with_free(LIGHT_ONLY, {"ecosw": (0.3, 0.001), "esinw": (0.0, 0.001)})
    phase = np.mod(phase_of(once), 1.0)
    middle = once.evidence.windows[1].middle
    model = made_up_light(np.where(np.abs(phase - middle) < 0.1, phase - middle + 0.5, phase))
    model[(np.abs(phase - 0.5) < 0.1) & (np.abs(phase - middle) > 0.1)] = 1.0
    noise = once.photometry.flux - once.solution.light.model
    light = replace(once.solution.light, model=model)
    alone = with_solution(once, light=light)
    alone = replace(alone, photometry=replace(alone.photometry, flux=model + noise))
    assert "half of this one" not in alone.finding("period").words
    twice = np.minimum(model, made_up_light(np.mod(phase - 0.5, 1.0)))
    twice[np.abs(np.mod(phase - 0.5 + 0.5, 1.0) - 0.5) > 0.06] = model[
        np.abs(np.mod(phase - 0.5 + 0.5, 1.0) - 0.5) > 0.06
    ]
    doubled = replace(alone, photometry=replace(alone.photometry, flux=twice + noise))
    finding = doubled.finding("period")
    assert finding.verdict == FAIL
    assert "half a period after primary eclipse are as faint as in it" in finding.words


def test_two_velocity_curves_settle_the_period() -> None:
    phase = phase_of(GOOD)
    case = with_light(GOOD, made_up_light(np.mod(phase + 0.25, 0.5) - 0.25))

    assert case.finding("period").verdict == PASS


@pytest.mark.parametrize(
    ("scale", "verdict"),
    [
        ("BJD_TDB", PASS),
        ("HJD_UTC", PASS),
        ("BJD", PASS),
        ("JD_UTC", WARN),
        ("JD", WARN),
        ("unknown", WARN),
    ],
)
def test_clocks(scale: str, verdict: str) -> None:
    photometry = replace(LIGHT_ONLY.photometry, time_scale=scale)

    assert verdict == replace(LIGHT_ONLY, photometry=photometry).finding("time scale").verdict


# Light


def test_share_of_limb_darkening_is_what_knowing_it_would_save() -> None:
    """Against the conditional covariance of Gaussians (Schur complement), by another route."""
    names = ["limb_darkening1[V].1", "limb_darkening2[V].1"]
    case = with_free(GOOD, dict.fromkeys(names, (0.6, 0.05)))
    case = with_correlation(
        case,
        {
            ("radius_ratio", names[0]): 0.6,
            ("radius_sum", names[1]): -0.5,
            ("radius_sum", "radius_ratio"): 0.3,
        },
    )
    evidence = case.evidence
    gradient = radius_gradient(evidence, 1)
    keep = [row for name, row in evidence.place.items() if name not in names]
    matrix = np.linalg.inv(np.linalg.inv(evidence.covariance)[np.ix_(keep, keep)])
    left = gradient[keep] @ matrix @ gradient[keep]
    whole = gradient @ evidence.covariance @ gradient

    assert 1 - left / whole == pytest.approx(limb_share(evidence, 1, names), rel=1e-9)


def test_gradient_of_radii_against_differences() -> None:
    for star in (1, 2):
        gradient = radius_gradient(GOOD.evidence, star)
        for name, step in (("radius_sum", 1e-6), ("radius_ratio", 1e-6)):
            value = GOOD.evidence.value(name)
            up, down = (
                with_values(GOOD, **{name: value + move}).evidence.radii[star - 1]
                for move in (step, -step)
            )
            assert (up - down) / (2 * step) == pytest.approx(
                gradient[GOOD.evidence.place[name]], rel=1e-6
            )


# Stars


@pytest.mark.parametrize(
    ("mass", "radius"),
    # Well-studied unevolved components: CM Dra (Morales et al. 2009, ApJ 691, 1400), YY Gem (Torres &
    # Ribas 2002, ApJ 567, 1140), YZ Cas B (Pavlovski et al. 2014, MNRAS 438, 590), DI Her B
    # (Albrecht et al. 2009, from a catalogue).
    [(0.2141, 0.2396), (0.6009, 0.6035), (1.325, 1.331), (4.534, 2.477)],
)
def test_young_stars_are_about_as_large_as_said(mass: float, radius: float) -> None:
    assert radius == pytest.approx(young_radius(mass), rel=0.18)


def test_brown_dwarf_is_a_warning_not_a_failure() -> None:
    estimates = dict(GOOD.solution.estimates)
    estimates["M2"] = replace(estimates["M2"], value=0.06, minus=0.001, plus=0.001)

    finding = with_solution(GOOD, estimates=estimates).finding("masses")

    assert finding.verdict == WARN
    assert "brown dwarf" in finding.words


# Mirror


def test_equal_stars_are_told_as_equal() -> None:
    case = with_solution(with_values(GOOD, radius_ratio=1.004), alternatives=())

    finding = mirror_solution(case.evidence, CHECKS["mirror solution"])[0]

    assert finding.verdict == PASS
    assert "equal within their errors" in finding.words


def test_invented_pair_is_annular_and_total() -> None:
    first, second = GOOD.evidence.windows

    assert (first.kind, second.kind) == ("annular", "total")
    chord = sqrt((R1 + R2) ** 2 - np.cos(radians(INCLINATION)) ** 2) / sin(radians(INCLINATION))
    assert asin(chord) / pi == pytest.approx(2 * first.outer, rel=1e-12)


def test_mirror_within_the_errors_is_no_trouble() -> None:
    case = with_values(GOOD, radius_ratio=0.996)
    mirror = Alternative("radii exchanged", {"radius_ratio": 1.004}, 0.3)

    finding = with_solution(case, alternatives=(mirror,)).finding("mirror solution")

    assert finding.verdict == PASS
    assert "within the errors of k" in finding.words


@pytest.mark.parametrize(("name", "verdict"), [("V", WARN), ("velocities, star 1", PASS)])
def test_few_points_scatter_by_chance(name: str, verdict: str) -> None:
    """24 velocities: 3 sqrt(2/24) = 0.87, so that 0.45 and 1.8 are within chance; 2400 points: not."""
    fit = replace(GOOD.solution.fit, raw_reduced_chi2={name: 0.45})

    assert with_solution(GOOD, fit=fit).finding("size of the errors").verdict == verdict


def test_dark_limb_within_its_error_is_a_warning() -> None:
    """Power-2: the limb's intensity is 1 - c, so that its error is that of c."""
    limb = "limb_darkening2[V].1"
    loose = with_free(GOOD, {limb: (1.06, 0.04)})
    sure = with_free(GOOD, {limb: (1.06, 0.01)})

    assert limb_error(loose.evidence, "star 2 in band V") == pytest.approx(0.04, rel=1e-6)
    assert loose.finding("limb darkening").verdict == WARN
    assert sure.finding("limb darkening").verdict == FAIL


def test_limb_darkening_that_rules_a_small_error_is_no_trouble() -> None:
    limb = "limb_darkening1[V].1"
    case = with_free(GOOD, {limb: (0.6, 0.05)})
    case = with_correlation(case, {("radius_ratio", limb): 0.97, ("radius_sum", limb): 0.2})

    finding = case.finding("limb darkening and radii")

    assert finding.verdict == PASS
    assert "of the radius" in finding.words


def test_wave_left_in_the_residuals_is_found() -> None:
    wave = -0.004 * np.cos(4 * pi * phase_of(GOOD))
    noise = GOOD.photometry.flux - GOOD.solution.light.model
    case = with_residuals(with_system(GOOD, levels="one"), noise + wave)

    size, error = wave_in_residuals(case.evidence, 0)

    assert size == pytest.approx(0.004, abs=4 * error)
    assert error < 3e-4


def test_full_lobe_of_an_unknown_radius_asks_for_the_ratio() -> None:
    case = with_sigmas(with_values(GOOD, radius_sum=0.7), radius_ratio=0.5)

    finding = case.finding("fill-out")

    assert finding.fatal
    assert "hardly knows" in finding.words


def test_mirror_with_the_usual_order_is_recommended() -> None:
    mirror = Alternative("radii exchanged", {"radius_ratio": 0.77}, 0.3)
    case = with_solution(with_values(GOOD, radius_ratio=1.3), alternatives=(mirror,))

    assert "the likelier one" in case.finding("order of densities").words


def test_outliers_count_as_observed() -> None:
    case = dropped_by_fit(GOOD, (phase_of(GOOD) > 0.005) & (phase_of(GOOD) < 0.05))

    assert covered_share(case.evidence, case.evidence.windows[0], band=0) == pytest.approx(1.0)


def test_outliers_that_crowd_in_eclipse_accuse_the_model() -> None:
    phase = phase_of(GOOD)
    few = dropped_by_fit(GOOD, np.abs(phase - 0.03) < 0.002)
    many = dropped_by_fit(GOOD, np.abs(phase - 0.03) < 0.02)

    assert few.finding("outliers").verdict == WARN
    assert many.finding("outliers").verdict == FAIL
    assert "misses the shape or the place" in many.finding("outliers").words


def test_ellipsoidal_variation_that_moves_nothing_is_no_trouble() -> None:
    case = with_sigmas(with_system(GOOD, effects={}), r1=0.01, r2=0.01)

    finding = case.finding("ellipsoidal variation")

    assert finding.verdict == PASS
    assert "within their errors" in finding.words
