"""The folding method against its published properties."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.timing.folding import folded_minimum


def gaussian_dip(offset, *, spacing=0.002, points=101, depth=0.3, width=0.03):
    time = (np.arange(points) - points // 2) * spacing
    return time, 1 - depth * np.exp(-((time - offset) ** 2) / (2 * width**2))


def test_centre_on_a_sample_is_exact():
    # Kwee & van Woerden 1956, BAN 12, 327: computed; on-grid pairing leaves no error there.
    time, flux = gaussian_dip(0.0)
    assert abs(folded_minimum(time, flux, 1e-3).time) < 1e-12


@pytest.mark.parametrize("offset", [0.1, 0.25, 0.4, 0.49])
def test_centre_between_samples_is_off_by_less_than_a_thousandth_of_the_spacing(offset):
    # The table of on-grid pairing (computed) has up to 7.8e-4 of the spacing for the original three axes.
    time, flux = gaussian_dip(offset * 0.002)
    assert abs(folded_minimum(time, flux, 1e-3).time - offset * 0.002) < 1e-3 * 0.002


@pytest.mark.parametrize(("noise", "bound"), [(3e-3, 8.23e-5), (3e-4, 8.23e-6), (3e-5, 8.23e-7)])
def test_error_is_the_bound_at_every_noise(noise, bound):
    # Cramer-Rao bound and sqrt(2 mu^2/a) of the same dip: computed by Monte Carlo with 6000 draws; the
    # original error of the method is 2.4 times too large at the lowest noise (Deeg 2021, Galaxies 9, 1).
    rng = np.random.default_rng(11)
    times, errors = [], []
    for _ in range(250):
        offset = rng.uniform(-0.001, 0.001)
        time, flux = gaussian_dip(offset)
        found = folded_minimum(time, flux + rng.normal(0, noise, time.size), noise)
        times.append(found.time - offset)
        errors.append(found.error)
    np.testing.assert_allclose(np.median(errors), bound, rtol=0.03)
    # 250 draws give the scatter to 4.5 %; the first file's scatter for random offsets is 9.0e-5 at most.
    np.testing.assert_allclose(np.std(times), bound, rtol=0.15)


def test_uneven_times_are_interpolated():
    rng = np.random.default_rng(12)
    time = np.sort(rng.uniform(-0.1, 0.1, 150))
    flux = 1 - 0.3 * np.exp(-((time - 0.004) ** 2) / (2 * 0.03**2)) + rng.normal(0, 1e-3, 150)
    found = folded_minimum(time, flux, 1e-3)
    assert abs(found.time - 0.004) < 4 * found.error + 1e-4


def test_too_few_points_give_nothing():
    time, flux = gaussian_dip(0.0, points=6)
    assert folded_minimum(time, flux, 1e-3) is None


def test_a_slope_without_minimum_gives_nothing_inside():
    time = np.linspace(0, 1, 40)
    assert folded_minimum(time, 1 - 0.3 * time, 1e-3) is None
