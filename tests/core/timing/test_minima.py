"""Times of single minima against the simulator's true times."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.errors import NoSolutionError
from shadowscale.timing.minima import times_of_minimum
from simple_eclipses import SimpleBinary, ground_times, observe, space_times

BINARY = SimpleBinary(1.9, 2459000.4, 0.12, 0.8, 87.0, brightness=(0.5, 0.8))


def true_time(minimum, binary=BINARY):
    phase = 0.0 if minimum.eclipse == 1 else binary.secondary_phase
    return binary.epoch + (minimum.cycle + phase) * binary.period


def test_every_eclipse_of_a_space_light_curve_is_timed_within_its_error():
    rng = np.random.default_rng(41)
    photometry = observe(BINARY, space_times(rng, step=5 / 1440), 1e-3, rng)
    minima = times_of_minimum(photometry, period=1.9, epoch=BINARY.epoch)
    timed = [minimum for minimum in minima if not minimum.why_not]
    assert len(timed) >= 25
    assert {minimum.eclipse for minimum in timed} == {1, 2}
    pull = np.array([(minimum.time - true_time(minimum)) / minimum.error for minimum in timed])
    assert 0.7 < np.std(pull) < 1.4
    assert np.abs(pull).max() < 4
    assert [minimum.time for minimum in minima] == sorted(minimum.time for minimum in minima)


def test_error_is_that_of_the_information_in_the_shape():
    # s_tc = sigma/sqrt(Gamma int f'^2 dt), any shape with known level: computed from the true light curve.
    rng = np.random.default_rng(42)
    photometry = observe(BINARY, space_times(rng, step=2 / 1440), 1e-3, rng)
    minima = times_of_minimum(photometry, period=1.9, epoch=BINARY.epoch)
    error = np.median([each.error for each in minima if each.eclipse == 1 and not each.why_not])
    time = np.linspace(-0.2, 0.2, 20001)
    slope = np.gradient(BINARY.flux_at_phase(time / 1.9), time)
    bound = 1e-3 / np.sqrt(720 * np.trapezoid(slope**2, time))
    np.testing.assert_allclose(error, bound, rtol=0.15)


def test_folding_agrees_with_the_template():
    rng = np.random.default_rng(43)
    photometry = observe(BINARY, space_times(rng, step=5 / 1440), 1e-3, rng)
    for minimum in times_of_minimum(photometry, period=1.9, epoch=BINARY.epoch):
        if minimum.folding_time is not None:
            both = np.hypot(minimum.error, minimum.folding_error)
            assert abs(minimum.folding_time - minimum.time) < 4 * both


def test_each_band_is_timed_and_half_seen_eclipses_say_why_not():
    rng = np.random.default_rng(44)
    photometry = observe(BINARY, ground_times(rng, nights=30), 4e-3, rng, bands=("V", "I"))
    minima = times_of_minimum(photometry, period=1.9, epoch=BINARY.epoch)
    assert {minimum.band for minimum in minima} == {"V", "I"}
    skipped = [minimum for minimum in minima if minimum.why_not]
    assert skipped
    assert all("branch" in each.why_not or "points" in each.why_not for each in skipped)
    timed = [minimum for minimum in minima if not minimum.why_not]
    pull = np.array([(each.time - true_time(each)) / each.error for each in timed])
    assert np.abs(pull).max() < 4.5


def test_cycles_count_from_the_epoch_even_if_it_is_a_little_late():
    rng = np.random.default_rng(45)
    photometry = observe(BINARY, space_times(rng, step=10 / 1440), 1e-3, rng)
    exact = times_of_minimum(photometry, period=1.9, epoch=BINARY.epoch)
    late = times_of_minimum(photometry, period=1.9, epoch=BINARY.epoch + 0.03)
    key = [(each.cycle, each.eclipse) for each in exact]
    assert [(each.cycle, each.eclipse) for each in late] == key


def test_no_eclipse_no_minima():
    rng = np.random.default_rng(46)
    flat = SimpleBinary(1.9, 2459000.4, 0.02, 0.8, 60.0)
    photometry = observe(flat, space_times(rng), 1e-3, rng)
    with pytest.raises(NoSolutionError, match="no eclipse stands out"):
        times_of_minimum(photometry, period=1.9, epoch=2459000.4)
