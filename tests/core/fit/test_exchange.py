"""Velocities that contradict the depths: their star 1 is the one eclipsed at the shallower minimum."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from fit_examples import (
    PERIOD,
    Solved,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    secondary_phase,
    sigma_of,
    solved,
)
from shadowscale.data.velocities import Velocities
from shadowscale.fit.start import exchanged
from shadowscale.timing.eclipses import measure_eclipses

TRUTH = invented(ecosw=0.06, esinw=-0.08, K1=98.4, K2=112.9)
WORDS = "star 1 of the velocities is eclipsed at the shallower minimum"


def other_way_round(velocities: Velocities) -> Velocities:
    """The same velocities with the columns of both stars exchanged."""
    return replace(
        velocities,
        rv1=velocities.rv2, rv1_error=velocities.rv2_error, why1=velocities.why2,
        rv2=velocities.rv1, rv2_error=velocities.rv1_error, why2=velocities.why1,
    )  # fmt: skip


def turned(*, stars: int = 2) -> Solved:
    """Light and velocities of `TRUTH`, the latter with exchanged columns."""
    velocities = other_way_round(observed_velocities(TRUTH))
    if stars == 1:
        velocities = velocities.excluded(2, np.ones(velocities.time.size, bool), "taken out")
    return solved(
        TRUTH, ephemeris(), photometry=observed(TRUTH, middles=(0.0, secondary_phase(TRUTH))),
        velocities=velocities,
    )  # fmt: skip


@pytest.mark.parametrize("stars", [1, 2])
def test_star_1_of_the_velocities_stays_star_1(stars: int) -> None:
    """By symmetry: with both stars renamed, k and J become 1/k and 1/J, and omega turns by 180 degrees."""
    found = turned(stars=stars).solution
    true = TRUTH.values
    expected = {
        "K1": true["K2"],
        "radius_sum": true["radius_sum"],
        "radius_ratio": 1 / true["radius_ratio"],
        "surface_brightness_ratio[V]": 1 / true["surface_brightness_ratio[V]"],
        "inclination": true["inclination"],
        "ecosw": -true["ecosw"],
        "esinw": -true["esinw"],
    }
    expected |= {"K2": true["K1"]} if stars == 2 else {}
    for name, value in expected.items():
        estimate = found.estimates[name]
        assert abs(estimate.value - value) < 4 * sigma_of(estimate), name
    cycles = (found.estimates["epoch"].value - true["epoch"]) / PERIOD
    away = cycles - secondary_phase(TRUTH)
    assert away == pytest.approx(round(away), abs=1e-4)
    assert any(WORDS in note for note in found.notes)


def test_depths_follow_their_stars() -> None:
    """The shallower minimum is then the primary one, and the sheet's depths say so."""
    found = turned().solution.estimates
    assert found["depth1"].value < 0.8 * found["depth2"].value


def test_agreeing_velocities_exchange_nothing() -> None:
    plain = solved(
        TRUTH, ephemeris(), photometry=observed(TRUTH, middles=(0.0, secondary_phase(TRUTH))),
        velocities=observed_velocities(TRUTH),
    ).solution  # fmt: skip
    assert not any(WORDS in note for note in plain.notes)
    assert plain.estimates["depth1"].value > plain.estimates["depth2"].value
    assert plain.estimates["radius_ratio"].value < 1


def test_exchanging_twice_gives_the_eclipses_back_a_cycle_later() -> None:
    light = observed(TRUTH, middles=(0.0, secondary_phase(TRUTH)))
    first = measure_eclipses(light, period=PERIOD, epoch=TRUTH.value("epoch"))
    again = exchanged(exchanged(first))
    assert first.secondary is not None
    assert again.secondary is not None
    assert again.epoch == pytest.approx(first.epoch + PERIOD, abs=1e-9)
    assert again.secondary.middle == pytest.approx(first.secondary.middle, abs=1e-12)
    assert again.depths == first.depths
    assert again.primary_window == pytest.approx(first.primary_window, abs=1e-12)
    assert again.secondary_window == pytest.approx(first.secondary_window, abs=1e-12)
