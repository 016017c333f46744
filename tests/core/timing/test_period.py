"""The period search: known systems, refusals, and two outside searches."""

from __future__ import annotations

from collections import Counter

import numpy as np
import pytest
from astropy.timeseries import BoxLeastSquares, LombScargle

from eclipse_zoo import CADENCES, random_animal, right_period
from shadowscale.errors import NoSolutionError, NotDetachedError, Stopped
from shadowscale.timing.period import search_period
from simple_eclipses import (
    Blemishes,
    SimpleBinary,
    as_photometry,
    ground_times,
    observe,
    space_times,
    survey_times,
)

CASES = {
    "eccentric, space": (SimpleBinary(3.2, 2459003.3, 0.12, 0.7, 87.5, 0.2, 60.0), "space", 1e-3),
    "eccentric, ground": (SimpleBinary(3.2, 2459003.3, 0.12, 0.7, 87.5, 0.2, 60.0), "ground", 5e-3),
    "very eccentric": (SimpleBinary(8.3, 2459004.3, 0.04, 0.8, 89.0, 0.55, 30.0), "space", 1e-3),
    "short": (
        SimpleBinary(0.31, 2459000.1, 0.21, 0.9, 85.0, brightness=(0.7,)),
        "space",
        1e-3,
    ),
    "longer than half the data": (
        SimpleBinary(16.7, 2459004.0, 0.04, 0.6, 89.5, 0.3, 100.0),
        "space",
        5e-4,
    ),
    "shallow": (SimpleBinary(2.7, 2459001.0, 0.12, 0.12, 89.0, brightness=(0.4,)), "space", 1e-3),
}


def times_of(cadence, rng):
    return space_times(rng) if cadence == "space" else ground_times(rng, nights=30)


@pytest.mark.parametrize("case", list(CASES))
def test_the_period_of_a_known_pair_is_found(case):
    binary, cadence, noise = CASES[case]
    rng = np.random.default_rng(61)
    found = search_period(observe(binary, times_of(cadence, rng), noise, rng))
    assert abs(found.period - binary.period) < 5 * found.period_error
    cycles = (found.epoch - binary.epoch) / binary.period
    # The error of the period counts for every cycle to the epoch the truth is written at.
    allowed = 0.005 + 5 * abs(cycles) * found.period_error / binary.period
    assert abs(cycles - round(cycles)) < allowed
    assert found.candidates[0].period == found.period
    assert found.words


def test_years_of_single_points_are_enough():
    rng = np.random.default_rng(62)
    binary = SimpleBinary(2.31, 2456001.0, 0.15, 0.8, 87.0, brightness=(0.4,))
    times = survey_times(rng, points=700, span=700.0)
    found = search_period(observe(binary, times, 5e-3, rng), period_range=(1.0, 10.0))
    assert abs(found.period / 2.31 - 1) < 1e-4


def test_two_bands_are_used_together():
    rng = np.random.default_rng(63)
    binary = SimpleBinary(1.73, 2459000.3, 0.14, 0.8, 87.0, brightness=(0.3, 0.6))
    times = [ground_times(rng, nights=14), ground_times(rng, nights=14)]
    found = search_period(observe(binary, times, 5e-3, rng, bands=("B", "I")))
    assert abs(found.period / 1.73 - 1) < 1e-3


def test_twins_get_the_full_period_with_the_half_as_the_other():
    rng = np.random.default_rng(64)
    twins = SimpleBinary(2.6, 2459000.3, 0.12, 1.0, 88.5, brightness=(1.0,))
    found = search_period(observe(twins, space_times(rng), 1e-3, rng))
    assert abs(found.period / 2.6 - 1) < 1e-3
    assert found.ambiguous
    assert found.other == pytest.approx(1.3, rel=1e-3)
    assert "two equal stars" in found.words


def test_a_dark_companion_gets_the_period_with_the_double_as_the_other():
    rng = np.random.default_rng(65)
    pair = SimpleBinary(2.6, 2459000.3, 0.12, 0.3, 89.0, brightness=(0.003,))
    found = search_period(observe(pair, space_times(rng), 1e-3, rng))
    assert abs(found.period / 2.6 - 1) < 1e-3
    assert found.ambiguous
    assert found.other == pytest.approx(5.2, rel=1e-3)


def test_nearly_equal_minima_are_told_apart():
    rng = np.random.default_rng(66)
    pair = SimpleBinary(2.6, 2459000.3, 0.12, 0.9, 88.0, brightness=(0.9,))
    found = search_period(observe(pair, space_times(rng), 5e-4, rng))
    assert abs(found.period / 2.6 - 1) < 1e-3
    assert not found.ambiguous


def test_spots_and_outliers_do_not_hide_the_period():
    rng = np.random.default_rng(67)
    pair = SimpleBinary(4.1, 2459002.3, 0.08, 0.5, 89.0, brightness=(0.3,))
    marks = Blemishes(spots=0.03, outliers=0.005, spot_period=5.7)
    found = search_period(observe(pair, space_times(rng), 1e-3, rng, blemishes=marks))
    assert abs(found.period / 4.1 - 1) < 1e-3


def test_period_range_is_kept():
    rng = np.random.default_rng(68)
    binary, _, noise = CASES["eccentric, space"]
    photometry = observe(binary, space_times(rng), noise, rng)
    found = search_period(photometry, period_range=(3.0, 3.5))
    assert found.period == pytest.approx(3.2, rel=1e-4)
    for wrong in ((2.0, 1.0), (0.0, 1.0), (-1.0, 3.0)):
        with pytest.raises(ValueError, match="two rising positive numbers"):
            search_period(photometry, period_range=wrong)


def test_box_least_squares_agrees():
    # astropy's BoxLeastSquares (Kovacs, Zucker & Mazeh 2002) as the outside search.
    rng = np.random.default_rng(69)
    pair = SimpleBinary(3.7, 2459001.3, 0.1, 0.3, 88.5, brightness=(0.05,))
    photometry = observe(pair, space_times(rng), 2e-3, rng)
    outside = BoxLeastSquares(photometry.time, photometry.flux, dy=2e-3)
    periods = 1 / np.arange(1 / 8.0, 1 / 1.0, 2e-4)
    best = periods[np.argmax(outside.power(periods, [0.15, 0.25, 0.35]).power)]
    found = search_period(photometry)
    assert found.period == pytest.approx(best, rel=3e-3)


@pytest.mark.parametrize("cadence", ["space", "ground"])
@pytest.mark.parametrize("noise", [1e-3, 1e-2])
def test_flat_light_is_refused_with_numbers(cadence, noise):
    rng = np.random.default_rng(70)
    time = times_of(cadence, rng)
    photometry = as_photometry([time], [1 + rng.normal(0, noise, time.size)], [noise])
    with pytest.raises(NoSolutionError, match="no repeating eclipse is seen") as caught:
        search_period(photometry)
    assert caught.value.exit_status == 4
    assert caught.value.numbers["best gain in chi2"] < caught.value.numbers["needed"]


def test_steps_between_nights_are_no_eclipses():
    rng = np.random.default_rng(9)
    time = ground_times(rng, nights=25)
    level = 0.01 * rng.normal(size=100)[np.floor(time - time[0]).astype(int)]
    photometry = as_photometry([time], [1 + level + rng.normal(0, 1e-3, time.size)], [1e-3])
    with pytest.raises(NoSolutionError, match=r"nights differ|slow variation|seen only once"):
        search_period(photometry)


@pytest.mark.parametrize("cadence", ["space", "ground"])
def test_a_pulsation_is_no_detached_pair(cadence):
    rng = np.random.default_rng(71)
    time = times_of(cadence, rng)
    flux = 1 + 0.1 * np.sin(2 * np.pi * time / 0.7123) + rng.normal(0, 3e-3, time.size)
    with pytest.raises(NotDetachedError, match="varies all the time") as caught:
        search_period(as_photometry([time], [flux], [3e-3]))
    # A sinusoid is within 15 % of its range of the top for arccos(0.7)/pi = 0.253 of the cycle.
    assert caught.value.numbers["part of the cycle that varies"] == pytest.approx(0.747, abs=0.06)
    # Lomb-Scargle (astropy) as the outside search; the light of two minima a cycle has twice its period.
    frequency = np.arange(0.1, 4.0, 1e-4)
    power = LombScargle(time, flux, dy=3e-3).power(frequency)
    ratio = caught.value.numbers["period"] * frequency[np.argmax(power)]
    assert min(abs(ratio - whole) for whole in (1, 2, 3)) < 0.02


def test_a_contact_pair_is_no_detached_pair():
    rng = np.random.default_rng(72)
    time = ground_times(rng, nights=15)
    phase = time / 0.361
    flux = 1 - 0.2 * np.cos(4 * np.pi * phase) - 0.03 * np.cos(2 * np.pi * phase)
    flux -= 0.05 * np.cos(8 * np.pi * phase)
    photometry = as_photometry([time], [flux + rng.normal(0, 5e-3, time.size)], [5e-3])
    with pytest.raises(NotDetachedError, match=r"varies all the time|too long for a detached pair"):
        search_period(photometry)


def test_a_single_eclipse_tells_no_period():
    rng = np.random.default_rng(73)
    time = space_times(rng, span=12.0)
    binary = SimpleBinary(40.0, 2459003.3, 0.03, 0.7, 89.5)
    with pytest.raises(NoSolutionError, match=r"only once|no repeating eclipse|slow variation"):
        search_period(observe(binary, time, 1e-3, rng))


def test_too_short_data_are_refused():
    time = 2459000 + np.linspace(0, 0.15, 200)
    photometry = as_photometry([time], [np.ones(200)], [1e-3])
    with pytest.raises(NoSolutionError, match="too short for a period"):
        search_period(photometry)


class Recorder:
    """Keeps what it is told, and stops the work at a given fraction."""

    def __init__(self, limit=2.0):
        self.limit, self.fractions = limit, []

    def report(self, fraction, words):
        self.fractions.append(fraction)
        if fraction > self.limit:
            raise Stopped("by the user")


def test_progress_rises_and_can_stop_the_search():
    rng = np.random.default_rng(74)
    binary, _, noise = CASES["eccentric, space"]
    photometry = observe(binary, space_times(rng), noise, rng)
    recorder = Recorder()
    search_period(photometry, progress=recorder)
    assert recorder.fractions == sorted(recorder.fractions)
    assert recorder.fractions[-1] == 1.0
    with pytest.raises(Stopped, match="by the user"):
        search_period(photometry, progress=Recorder(limit=0.2))


class Impatient(Recorder):
    """Stops the work at each of some fractions, once."""

    def __init__(self, *limits):
        super().__init__()
        self.limits = list(limits)

    def report(self, fraction, words):
        super().report(fraction, words)
        if self.limits and fraction > self.limits[0]:
            raise Stopped(f"beyond {self.limits.pop(0)}")


def test_a_stopped_search_keeps_the_periods_searched_so_far():
    rng = np.random.default_rng(75)
    binary, _, noise = CASES["eccentric, space"]
    times = space_times(rng)
    # Thirty days of observing, and a few nights two years later: most trial periods are needless.
    late = times[times < times[0] + 3] + 700
    photometry = observe(binary, np.concatenate([times, late]), noise, rng)
    whole = search_period(photometry)
    assert whole.left is None
    found = search_period(photometry, progress=Impatient(0.7), keep=True)
    shortest, longest = found.left
    assert found.period == pytest.approx(whole.period, rel=1e-6)
    assert found.period < shortest < longest
    assert f"no period from {shortest:.4g} to {longest:.4g} d was searched" in found.words
    with pytest.raises(Stopped, match=r"beyond 0\.7"):
        search_period(photometry, progress=Impatient(0.7))
    with pytest.raises(Stopped, match=r"beyond 0\.8"):
        search_period(photometry, progress=Impatient(0.7, 0.8), keep=True)


def test_stopped_before_anything_was_searched_there_is_nothing_to_keep():
    rng = np.random.default_rng(76)
    binary, _, noise = CASES["eccentric, space"]
    photometry = observe(binary, space_times(rng), noise, rng)
    with pytest.raises(Stopped, match="beyond -1"):
        search_period(photometry, progress=Impatient(-1.0), keep=True)


def verdict(animal):
    """`right`, `stated` (the truth is named as fitting as well) or `wrong`."""
    try:
        found = search_period(animal.photometry)
    except NoSolutionError:
        return "wrong"
    if right_period(animal, found.period):
        return "right"
    named = [found.other] if found.other else []
    named += [each.period for each in found.candidates if "as well" in each.words]
    return "stated" if any(right_period(animal, period) for period in named) else "wrong"


FEW = [(c, s) for c in CADENCES[:3] for s in (2, 9)]
NINE_FIT = ("ground", 50)  # nine periods for the observed nights


@pytest.mark.parametrize(("cadence", "seed"), [*FEW, NINE_FIT])
def test_random_pairs_have_their_period_found_or_named(cadence, seed):
    rng = np.random.default_rng(seed * 10 + CADENCES.index(cadence))
    assert verdict(random_animal(rng, cadence)) in ("right", "stated")


@pytest.mark.long
@pytest.mark.parametrize("cadence", CADENCES)
def test_success_rate_of_random_pairs(cadence):
    number = 60 if cadence != "survey" else 15
    count = Counter(
        verdict(random_animal(np.random.default_rng(seed * 10 + CADENCES.index(cadence)), cadence))
        for seed in range(number)
    )
    assert count["wrong"] <= 0.05 * number, count
