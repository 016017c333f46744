"""Numbers behind pictures: bins, densities, outlines, curves, the scene."""

from __future__ import annotations

from dataclasses import replace
from math import acos, cos, pi, radians, sin, sqrt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from made_up import EPOCH, INCLINATION, K1, K2, PERIOD, R1, R2, made_up_session
from shadowscale.geometry.published import PUBLISHED
from shadowscale.view.bins import binned
from shadowscale.view.contacts import contact_solution_of_markers, markers_at, with_start_markers
from shadowscale.view.curves import (
    contact_curves,
    contact_system,
    fitted_curves,
    sampled_phases,
    velocity_curves,
)
from shadowscale.view.density import density_picture, points_in_view
from shadowscale.view.light_points import (
    band_shifts,
    fold,
    light_over_phase,
    light_over_time,
    night_starts,
    to_magnitudes,
)
from shadowscale.view.looks import Look
from shadowscale.view.pairs import choices, most_correlated, pair
from shadowscale.view.scene import depth_picture, scene
from shadowscale.view.selecting import (
    inside,
    light_set_aside,
    light_taken_back,
    outlined_light,
    set_aside_rows,
)
from shadowscale.view.velocity_points import velocities_over_phase


def test_bins_are_weighted_means() -> None:
    """Two points of errors 1 and 2 weigh 4 to 1; error of the mean 1/sqrt(1 + 1/4)."""
    found = binned(
        np.array([0.1, 0.2, 3.5]), np.array([1.0, 2.0, 7.0]), np.array([1.0, 2.0, 0.5]), width=1.0
    )

    assert found.number.tolist() == [2, 1]
    assert pytest.approx(found.y.tolist()) == [1.2, 7.0]
    assert [1 / sqrt(1.25), 0.5] == pytest.approx(found.error.tolist())


@given(st.integers(1, 400), st.floats(1e-3, 2.0))
def test_bins_keep_the_weighted_sum(count: int, width: float) -> None:
    random = np.random.default_rng(count)
    x, y, error = (
        random.uniform(-1, 1, count),
        random.normal(size=count),
        random.uniform(0.5, 2, count),
    )

    found = binned(x, y, error, width=width)

    assert count == found.number.sum()
    assert np.sum(y / error**2) == pytest.approx(
        np.sum(found.y / found.error**2), rel=1e-9, abs=1e-9
    )


def test_a_bin_must_have_a_width() -> None:
    with pytest.raises(ValueError, match=r"width must be positive, found 0\.0"):
        binned(np.zeros(1), np.zeros(1), np.ones(1), width=0.0)


def test_density_counts_what_numpy_counts() -> None:
    """Against numpy.histogram2d, row 0 on top; the shade is logarithmic in the number."""
    random = np.random.default_rng(3)
    x, y = random.normal(size=(2, 30_000))

    shades = density_picture(x, y, rectangle=(-1.0, 1.0, -2.0, 1.5), width=40, height=25)

    counts = np.histogram2d(y, x, bins=(25, 40), range=((-2.0, 1.5), (-1.0, 1.0)))[0][::-1]
    assert np.array_equal(counts > 0, shades > 0)
    assert shades.max() == 255
    expected = np.where(
        counts > 0, 70 + 185 * np.log(np.maximum(counts, 1)) / np.log(counts.max()), 0
    )
    assert expected == pytest.approx(shades, abs=1.0)
    assert int(np.count_nonzero((x >= -1) & (x < 1))) == points_in_view(x, (-1.0, 1.0, 0.0, 0.0))


def test_an_outline_holds_what_lies_in_it() -> None:
    """A letter L: the notch is outside."""
    corners = ((0.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0))
    x, y = np.array([0.5, 1.5, 1.5, 0.5, -0.1]), np.array([0.5, 0.5, 1.5, 1.5, 0.5])

    assert inside(x, y, corners).tolist() == [True, True, False, True, False]


def test_rows_set_aside_come_back_as_they_were() -> None:
    before = made_up_session()
    box = ((0.1, 0.9), (0.3, 0.9), (0.3, 1.1), (0.1, 1.1))
    rows = outlined_light(before, box, look=Look())

    after = light_set_aside(before, rows, "moonlight")

    assert 0 < rows.size == int(before.photometry.used.sum() - after.photometry.used.sum())
    assert set(rows) == set(set_aside_rows(after)) - set(set_aside_rows(before))
    back = light_taken_back(after, rows)
    assert np.array_equal(before.photometry.why, back.photometry.why)
    assert before.exclusions == back.exclusions


def test_folding_runs_from_its_start_for_one_cycle() -> None:
    phase = fold(
        np.array([EPOCH, EPOCH + 0.3 * PERIOD, EPOCH - 0.3 * PERIOD, EPOCH + 7.9 * PERIOD]),
        PERIOD,
        EPOCH,
    )

    assert pytest.approx(phase.tolist(), abs=1e-8) == [0.0, 0.3, 0.7, -0.1]


def test_light_in_magnitudes_and_residuals() -> None:
    session = made_up_session(("V", "I"))
    flux, magnitudes = (light_over_phase(session, magnitudes=m) for m in (False, True))

    assert tuple(points.label for points in flux) == ("V", "I")
    assert to_magnitudes(flux[0].y) == pytest.approx(magnitudes[0].y)
    assert 1.0857362 * flux[1].error / flux[1].y == pytest.approx(magnitudes[1].error, rel=1e-6)
    rest = light_over_phase(session, residuals=True)
    assert (
        pytest.approx(float(np.std(rest[0].y[rest[0].used])), rel=0.1) == 0.004
    )  # the noise that was put in
    assert int(rest[0].outlier.sum() + rest[1].outlier.sum()) == 1
    assert (0.0, pytest.approx(-0.2 * np.ptp(flux[0].y), rel=0.2)) == band_shifts(flux)


def test_residuals_follow_a_model_moved_by_hand() -> None:
    session = made_up_session()
    system = session.system.with_values({"inclination": 80.0})

    rest = light_over_phase(replace(session, system=system), residuals=True)

    phase = np.abs((rest[0].x + 0.5) % 1 - 0.5)
    assert np.abs(rest[0].y[phase < 0.01]).mean() > 0.1
    assert np.abs(rest[0].y[(phase > 0.1) & (phase < 0.4) & rest[0].used]).mean() < 0.01


def test_nights_begin_after_gaps() -> None:
    session = made_up_session()

    assert len(night_starts(session.photometry, 2459000.0)) == 12
    assert pytest.approx(float(light_over_time(session, zero=2459000.0)[0].x[0])) == 0.25


def test_velocities_have_their_offsets_taken_off() -> None:
    session = made_up_session()
    first, second = velocities_over_phase(session)

    south = session.velocities.source[first.rows] == 1
    raw = session.velocities.rv1[first.rows]
    assert raw[south] - 0.3 == pytest.approx(first.y[south])
    assert raw[~south] == pytest.approx(first.y[~south])
    assert session.velocities.time.size - 1 == second.x.size  # one row has no second star


def test_curves_are_sampled_where_the_light_changes() -> None:
    session = made_up_session()
    phases = sampled_phases(session.contact)

    first, _, _, last = session.contact.primary.contacts
    within = np.sum((phases > first) & (phases < last))
    assert within > 150
    assert np.all(np.diff(phases) > 0)
    assert (phases[0], phases[-1]) == (-0.25, 0.75)


def test_a_fitted_curve_is_computed_once_for_all_pictures() -> None:
    session = made_up_session()

    assert fitted_curves(session)[0] is fitted_curves(session)[0]
    other = replace(session, system=session.system.with_values({"inclination": 85.0}))
    assert fitted_curves(session)[0] is not fitted_curves(other)[0]


def test_contacts_have_a_curve_of_their_own_only_once_they_were_moved() -> None:
    session = made_up_session()
    assert contact_curves(session) == ()
    assert contact_system(session) is None

    read_again = replace(session, contact=replace(session.contact))
    assert contact_system(read_again) is None

    contact = contact_solution_of_markers(session)
    moved = replace(session, contact=contact)

    assert contact.values["radius_sum"] == contact_system(moved).value("radius_sum")
    assert len(contact_curves(moved)) == 1


def test_markers_on_the_true_contacts_give_the_true_stars() -> None:
    """The markers lie at the exact contacts of a circular orbit, the depths come from noisy points."""
    contact = contact_solution_of_markers(made_up_session())

    true = {
        "radius_sum": (R1 + R2, 0.003),
        "radius_ratio": (R2 / R1, 0.06),
        "inclination": (INCLINATION, 1.0),
    }
    for name, (
        value,
        tolerance,
    ) in true.items():  # contacts know nothing of the third light that is there
        assert abs(contact.values[name] - value) < tolerance, name
    assert contact.errors["radius_sum"] < 0.01


def test_markers_stand_at_the_measured_contacts() -> None:
    session = replace(made_up_session(), markers=None)

    markers = with_start_markers(session).markers

    assert session.contact.primary.contacts == markers.primary
    assert markers.primary_window[0] < markers.primary[0]
    assert markers == markers_at(session.contact)


def test_velocity_curves_swing_by_their_amplitudes() -> None:
    first, second = velocity_curves(made_up_session().system)

    assert pytest.approx(np.ptp(first.y) / 2, rel=1e-4) == K1
    assert pytest.approx(np.ptp(second.y) / 2, rel=1e-4) == K2


@pytest.mark.parametrize("phase", [0.0, 0.03, 0.25, 0.47, 0.5, 0.7])
@pytest.mark.parametrize(("ecosw", "esinw"), [(0.0, 0.0)])
def test_the_scene_has_the_sky_separation_of_the_orbit(
    phase: float, ecosw: float, esinw: float
) -> None:
    """Circular orbit: delta^2 = 1 - cos^2(2 pi phase) sin^2 i (closed form)."""
    found = scene(made_up_session().system, phase)
    one, two = found.discs

    apart = sqrt((one.x - two.x) ** 2 + (one.y - two.y) ** 2)
    assert sqrt(1 - (cos(2 * pi * phase) * sin(radians(INCLINATION))) ** 2) == pytest.approx(
        apart, abs=1e-9
    )
    assert (one.depth > two.depth) == (cos(2 * pi * phase) > 0)
    assert pytest.approx((one.radius, two.radius)) == (R1, R2)


def test_an_eccentric_scene_keeps_to_its_ellipse() -> None:
    """Largest and smallest distance from above: 1 + e and 1 - e."""
    system = made_up_session().system.with_values({"ecosw": 0.15, "esinw": -0.2})
    found = scene(system, 0.0)

    distance = np.hypot(*(found.above2 - found.above1).T)
    assert pytest.approx((distance.min(), distance.max()), abs=1e-3) == (0.75, 1.25)
    assert (
        pytest.approx(found.discs[0].x - found.discs[1].x, abs=1e-9) == 0.0
    )  # conjunction at phase 0


def test_the_heavier_star_takes_the_smaller_orbit() -> None:
    found = scene(made_up_session().system, 0.25)

    assert (
        pytest.approx(np.abs(found.above1).max() / np.abs(found.above2).max(), rel=1e-6) == K1 / K2
    )


def test_the_sun_has_its_size_where_the_orbit_has_one() -> None:
    session = made_up_session()

    assert scene(session.system, 0.0).sun_radius is None
    a = session.solution.estimates["a"].value
    assert 1 / a == pytest.approx(
        scene(session.system, 0.0, estimates=session.solution.estimates).sun_radius
    )


def test_words_change_at_the_contacts() -> None:
    """Outer contact at cos(2 pi phase) = sqrt(1 - (r1+r2)^2)/sin i (closed form)."""
    system = made_up_session().system
    contact = acos(sqrt(1 - (R1 + R2) ** 2) / sin(radians(INCLINATION))) / (2 * pi)

    assert scene(system, contact + 1e-6).words == "outside eclipse"
    assert scene(system, contact - 1e-6).words == "star 2 hides part of star 1"


def test_a_disc_fades_towards_its_limb() -> None:
    picture = depth_picture(np.linspace(1.0, 0.4, 10), 41)

    assert pytest.approx(picture[20, 20]) == 1.0
    assert np.isnan(picture[0, 0])
    assert 0.4 < np.nanmin(picture) < 0.45


def test_the_ellipse_has_the_area_of_the_covariance() -> None:
    """pi sigma_a sigma_b sqrt(1 - rho^2) (textbook)."""
    solution = made_up_session().solution
    found = pair(solution, "radius_sum", "radius_ratio")

    x, y = (found.inner - found.inner.mean(axis=0)).T
    area = 0.5 * abs(np.dot(x, np.roll(y, 1)) - np.dot(y, np.roll(x, 1)))
    assert pi * 4e-4 * 6e-3 * sqrt(1 - 0.42**2) == pytest.approx(area, rel=3e-3)
    assert most_correlated(solution) == ("radius_sum", "radius_ratio")
    assert "radius_sum" in choices(solution)


def test_published_stars_follow_gravity() -> None:
    """log g of each pair's stars lies where dwarfs and subgiants lie; all have a paper and sane errors."""
    for star in PUBLISHED:
        assert 2.8 < 4.438 + np.log10(star.mass / star.radius**2) < 5.1, star.name
        assert star.paper
        for value, error in ((star.mass, star.mass_error), (star.radius, star.radius_error)):
            assert error is None or 0 < error < 0.05 * value, star.name


@pytest.mark.parametrize(
    ("name", "logg", "tolerance"),
    [
        # Southworth 2025, arXiv 2507.21781: 4.3125(8) and 4.3169(11)
        ("AR Aur 1", 4.3125, 0.0015),
        ("AR Aur 2", 4.3169, 0.0015),
        # Maxted et al. 2020 as in the catalogue of Southworth 2015: 4.0020(11), 3.5981(9)
        ("AI Phe 1", 4.0020, 0.0015),
        ("AI Phe 2", 3.5981, 0.0015),
        # Morales et al. 2009, ApJ 691, 1400: 4.994(7), 5.009(6)
        ("CM Dra 1", 4.994, 0.007),
        ("CM Dra 2", 5.009, 0.006),
    ],
)
def test_published_masses_and_radii_give_the_published_gravity(
    name: str, logg: float, tolerance: float
) -> None:
    star = next(star for star in PUBLISHED if star.name == name)

    assert logg == pytest.approx(4.4380676 + np.log10(star.mass / star.radius**2), abs=tolerance)
