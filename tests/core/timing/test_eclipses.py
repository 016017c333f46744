"""Both eclipses of a light curve against the simulator's own contacts and depths."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from shadowscale.errors import NoSolutionError
from shadowscale.timing.eclipses import measure_eclipses
from simple_eclipses import (
    Blemishes,
    SimpleBinary,
    as_photometry,
    ground_times,
    observe,
    space_times,
)

ECCENTRIC = SimpleBinary(3.2, 2459003.3, 0.12, 0.7, 87.5, 0.2, 60.0, (0.5, 0.9))
PULL = 4.5  # [sigma] no more, for any of the numbers below with its fixed seed


def pulls(binary, found, which, eclipse):
    """Distances [sigma] of middle, duration and depth from the truth."""
    contacts = binary.contacts(which)
    error = np.sqrt(np.diag(eclipse.covariance))
    truth = (contacts[0] + contacts[-1]) / 2
    middle = eclipse.middle + (found.epoch - binary.epoch) / binary.period - truth
    return np.array(
        [
            # The middle of the contacts is not quite the middle of the light where e > 0.
            abs(middle - round(middle)) / (error[0] + 2e-5),
            abs(eclipse.duration - (contacts[-1] - contacts[0])) / error[1],
            abs(eclipse.depth - binary.depths(which)) / error[4],
        ]
    )


@pytest.mark.parametrize(
    ("binary", "cadence", "noise"),
    [
        (ECCENTRIC, "space", 1e-3),
        (ECCENTRIC, "ground", 5e-3),
        (SimpleBinary(1.7, 2459000.2, 0.15, 0.5, 89.5, brightness=(0.3,)), "space", 3e-4),
        (SimpleBinary(1.7, 2459000.2, 0.1, 2.0, 89.0, brightness=(0.3,)), "ground", 4e-3),
        (SimpleBinary(2.3, 2459000.9, 0.16, 1.0, 80.0, brightness=(0.8,)), "space", 1e-3),
        (SimpleBinary(6.1, 2459001.9, 0.05, 0.9, 89.0, 0.5, 40.0, (0.6,)), "space", 1e-3),
    ],
    ids=["eccentric", "ground", "annular", "total", "partial", "very eccentric"],
)
def test_both_eclipses_are_measured_within_their_errors(binary, cadence, noise):
    rng = np.random.default_rng(21)
    times = space_times(rng, step=10 / 1440) if cadence == "space" else ground_times(rng, nights=30)
    found = measure_eclipses(
        observe(binary, times, noise, rng), period=binary.period, epoch=binary.epoch
    )
    assert found.secondary is not None
    assert found.primary.depth > found.secondary.depth
    assert np.all(pulls(binary, found, 1, found.primary) < PULL)
    assert np.all(pulls(binary, found, 2, found.secondary) < PULL)
    for which, eclipse in ((1, found.primary), (2, found.secondary)):
        if eclipse.flat:
            assert len(binary.contacts(which)) == 4


def test_long_exposures_are_taken_into_account():
    rng = np.random.default_rng(22)
    binary = SimpleBinary(1.9, 2459000.4, 0.14, 0.6, 89.0, brightness=(0.4,))
    photometry = observe(binary, space_times(rng), 3e-4, rng, blemishes=Blemishes(exposure=1 / 48))
    found = measure_eclipses(photometry, period=1.9, epoch=binary.epoch, exposure=1800.0)
    assert np.all(pulls(binary, found, 1, found.primary) < PULL)
    blind = measure_eclipses(photometry, period=1.9, epoch=binary.epoch)
    assert blind.primary.duration > found.primary.duration


def test_nights_spots_and_outliers_do_not_move_the_eclipses():
    rng = np.random.default_rng(23)
    marks = Blemishes(outliers=0.01, spots=0.004, night_offsets=0.004)
    photometry = observe(ECCENTRIC, ground_times(rng, nights=40), 2e-3, rng, blemishes=marks)
    found = measure_eclipses(photometry, period=3.2, epoch=ECCENTRIC.epoch)
    assert np.all(pulls(ECCENTRIC, found, 1, found.primary) < PULL)
    assert any("one level" in note for note in found.notes)


def test_bands_share_the_shape_and_have_their_own_depths():
    rng = np.random.default_rng(24)
    times = [space_times(rng, step=20 / 1440), space_times(rng, step=24 / 1440)]
    photometry = observe(ECCENTRIC, times, 1e-3, rng, bands=("V", "I"))
    found = measure_eclipses(photometry, period=3.2, epoch=ECCENTRIC.epoch)
    for number, band in enumerate(("V", "I")):
        for which in (1, 2):
            depth, error = found.depths[band][which - 1], found.depth_errors[band][which - 1]
            assert abs(depth - ECCENTRIC.depths(which, number)) < 5 * error
    assert found.primary.depth == found.depths["V"][0]
    np.testing.assert_allclose(found.scatter["V"], 1e-3, rtol=0.3)


def test_a_band_without_points_in_an_eclipse_has_no_depth_there():
    rng = np.random.default_rng(25)
    time = space_times(rng, step=20 / 1440)
    phase = ((time - ECCENTRIC.epoch) / 3.2 + 0.25) % 1 - 0.25
    times = [time, time[phase > 0.2]]
    photometry = observe(ECCENTRIC, times, 1e-3, rng, bands=("V", "I"))
    found = measure_eclipses(photometry, period=3.2, epoch=ECCENTRIC.epoch)
    assert found.depths["I"][0] is None
    assert found.depths["I"][1] is not None


def test_an_epoch_at_the_shallower_eclipse_is_moved():
    rng = np.random.default_rng(26)
    photometry = observe(ECCENTRIC, space_times(rng, step=10 / 1440), 1e-3, rng)
    shallow = ECCENTRIC.epoch + ECCENTRIC.secondary_phase * 3.2
    found = measure_eclipses(photometry, period=3.2, epoch=shallow)
    cycles = (found.epoch - ECCENTRIC.epoch) / 3.2
    assert abs(cycles - round(cycles)) < 1e-3
    assert abs(found.epoch - shallow) < 0.5 * 3.2
    assert any("moved" in note for note in found.notes)
    assert found.secondary is not None
    np.testing.assert_allclose(found.secondary.middle, ECCENTRIC.secondary_phase, atol=1e-3)


def test_without_an_epoch_one_near_the_middle_of_the_data_is_found():
    rng = np.random.default_rng(27)
    photometry = observe(ECCENTRIC, space_times(rng, step=20 / 1440), 1e-3, rng)
    found = measure_eclipses(photometry, period=3.2)
    assert abs(found.epoch - np.median(photometry.time)) < 3.2
    cycles = (found.epoch - ECCENTRIC.epoch) / 3.2
    assert abs(cycles - round(cycles)) < 1e-3


def test_a_second_eclipse_that_cannot_be_seen_is_missing_with_a_note():
    rng = np.random.default_rng(28)
    dark = SimpleBinary(2.1, 2459000.5, 0.12, 0.2, 89.0, brightness=(0.001,))
    found = measure_eclipses(observe(dark, space_times(rng), 1e-3, rng), period=2.1)
    assert found.secondary is None
    assert "no second eclipse is seen" in found.notes


def test_set_aside_rows_take_no_part():
    rng = np.random.default_rng(29)
    photometry = observe(ECCENTRIC, space_times(rng, step=20 / 1440), 1e-3, rng)
    ruined = replace(
        photometry, flux=np.where(np.arange(photometry.time.size) % 3 == 0, 5.0, photometry.flux)
    )
    cleaned = ruined.excluded(ruined.flux == 5.0, "by hand")
    found = measure_eclipses(cleaned, period=3.2, epoch=ECCENTRIC.epoch)
    assert np.all(pulls(ECCENTRIC, found, 1, found.primary) < PULL)


def test_the_time_scale_of_cycles_does_not_matter():
    rng = np.random.default_rng(30)
    photometry = observe(ECCENTRIC, space_times(rng, step=20 / 1440), 1e-3, rng)
    near = measure_eclipses(photometry, period=3.2, epoch=ECCENTRIC.epoch)
    far = measure_eclipses(photometry, period=3.2, epoch=ECCENTRIC.epoch + 1000 * 3.2)
    np.testing.assert_allclose(far.primary.duration, near.primary.duration, rtol=1e-5)
    np.testing.assert_allclose(far.epoch - near.epoch, 3200.0, rtol=1e-8)


def test_flat_light_has_no_eclipse():
    rng = np.random.default_rng(31)
    time = space_times(rng)
    photometry = as_photometry([time], [1 + rng.normal(0, 1e-3, time.size)], [1e-3])
    with pytest.raises(NoSolutionError, match="no eclipse stands out") as caught:
        measure_eclipses(photometry, period=2.3)
    assert caught.value.numbers["noise of a point"] == pytest.approx(1e-3, rel=0.2)


@pytest.mark.parametrize("factor", [1.03, 0.98, 1.37])
def test_a_wrong_period_is_named_as_such(factor):
    rng = np.random.default_rng(32)
    photometry = observe(ECCENTRIC, space_times(rng, step=10 / 1440), 1e-3, rng)
    with pytest.raises(NoSolutionError, match=r"do not line up|no eclipse stands out"):
        measure_eclipses(photometry, period=3.2 * factor, epoch=ECCENTRIC.epoch)


def test_too_few_points_are_refused():
    time = np.linspace(2459000, 2459001, 15)
    photometry = as_photometry([time], [np.ones(15)], [1e-3])
    with pytest.raises(NoSolutionError, match="too few usable points"):
        measure_eclipses(photometry, period=0.5)


@pytest.mark.parametrize("period", [0.0, -1.0, np.nan, np.inf])
def test_a_period_that_is_none_is_refused(period):
    photometry = as_photometry([np.arange(50.0)], [np.ones(50)], [1e-3])
    with pytest.raises(ValueError, match="period must be positive"):
        measure_eclipses(photometry, period=period)


def test_a_negative_exposure_is_refused():
    photometry = as_photometry([np.arange(50.0)], [np.ones(50)], [1e-3])
    with pytest.raises(ValueError, match="exposure must not be negative"):
        measure_eclipses(photometry, period=1.0, exposure=-1.0)
