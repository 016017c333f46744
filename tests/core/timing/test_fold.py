"""Folding and the search of dips in a fold."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from shadowscale.timing.fold import find_dips, nearest, phases


@given(st.floats(-1e4, 1e4), st.floats(0.01, 100.0))
def test_phases_are_within_the_cycle_and_periodic(time, period):
    times = np.array([time, time + period])
    phase = phases(times, period, 3.0)
    assert np.all((phase >= 0) & (phase <= 1))
    assert abs(np.sin(np.pi * (phase[1] - phase[0]))) < 1e-6


@given(st.floats(0, 1), st.floats(-3, 3))
def test_nearest_stays_within_half_a_cycle(phase, centre):
    moved = float(nearest(np.array(phase), centre))
    assert abs(moved - centre) <= 0.5 + 1e-12
    assert abs((moved - phase) - round(moved - phase)) < 1e-9


@pytest.mark.parametrize(("first", "second"), [(0.2, 0.7), (0.97, 0.4), (0.05, 0.93)])
def test_two_boxes_are_found_wherever_they_lie(first, second):
    rng = np.random.default_rng(1)
    phase = rng.uniform(0, 1, 4000)
    value = rng.normal(0, 0.01, phase.size)
    for middle, depth in ((first, 0.1), (second, 0.03)):
        value[np.abs(nearest(phase, middle) - middle) < 0.02] -= depth
    dips = find_dips(phase, value, np.full(phase.size, 1e4))
    for dip, middle, depth in zip(dips, (first, second), (0.1, 0.03), strict=True):
        assert abs(float(nearest(np.array(dip.middle), middle)) - middle) < 0.004
        np.testing.assert_allclose(dip.depth, depth, rtol=0.1)
        np.testing.assert_allclose(dip.width, 0.04, rtol=0.15)


def test_light_that_only_rises_has_no_dip_of_note():
    phase = np.linspace(0, 1, 1000, endpoint=False)
    value = np.where(np.abs(phase - 0.5) < 0.02, 1.0, 0.0)
    assert all(dip.depth < 0.3 for dip in find_dips(phase, value, np.ones(1000)))
