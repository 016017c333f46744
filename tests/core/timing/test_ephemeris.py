"""An ephemeris through minima of known times."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.errors import NoSolutionError
from shadowscale.timing.ephemeris import fit_ephemeris
from shadowscale.timing.results import Minimum

EPOCH, PERIOD, PHASE = 2455123.4567, 2.3456789, 0.5123


def minima(cycles, *, errors, eclipses, rng=None, change=0.0):
    made = []
    for cycle, error, eclipse in zip(cycles, errors, eclipses, strict=True):
        time = EPOCH + PERIOD * (cycle + (PHASE if eclipse == 2 else 0)) + change * cycle**2
        noise = 0.0 if rng is None else rng.normal(0, error)
        made.append(Minimum(cycle, eclipse, "V", time + noise, error, "template", 50))
    return made


def test_a_perfect_ephemeris_is_found():
    cycles = [0, 1, 5, 40, 300, 301, 1200]
    found = fit_ephemeris(minima(cycles, errors=[1e-4] * 7, eclipses=[1, 2, 1, 2, 1, 2, 1]))
    assert found.epoch == pytest.approx(EPOCH, abs=2e-9)
    assert found.period == pytest.approx(PERIOD, rel=1e-12)
    assert found.secondary_phase == pytest.approx(PHASE, abs=1e-8)
    assert np.abs(found.residuals).max() < 2e-9
    assert found.change is None


def test_values_and_errors_are_those_of_a_weighted_line():
    # numpy.polyfit with unscaled covariance is the outside check.
    rng = np.random.default_rng(51)
    cycles = np.sort(rng.choice(800, 40, replace=False))
    errors = rng.uniform(1e-4, 5e-4, 40)
    made = minima(cycles.tolist(), errors=errors, eclipses=[1] * 40, rng=rng)
    found = fit_ephemeris(made)
    time = np.array([each.time for each in made]) - EPOCH
    line, covariance = np.polyfit(cycles, time, 1, w=1 / errors, cov="unscaled")
    scale = max(1.0, found.reduced_chi2)
    np.testing.assert_allclose(found.period, line[0], rtol=1e-11)
    np.testing.assert_allclose(found.epoch - EPOCH, line[1], atol=5e-9)
    np.testing.assert_allclose(
        [found.errors["period"], found.errors["epoch"]],
        np.sqrt(np.diag(covariance) * scale),
        rtol=1e-6,
    )
    assert found.secondary_phase is None


def test_errors_cover_the_truth_as_often_as_they_say():
    rng = np.random.default_rng(52)
    cycles, eclipses = [0, 3, 4, 50, 51, 90, 200, 201, 340, 341], [1, 2] * 5
    errors = np.full(10, 3e-4)
    pulls = []
    for _ in range(300):
        found = fit_ephemeris(minima(cycles, errors=errors, eclipses=eclipses, rng=rng))
        scale = np.sqrt(max(1.0, found.reduced_chi2))
        pulls.append(
            [
                (found.epoch - EPOCH) / found.errors["epoch"] * scale,
                (found.period - PERIOD) / found.errors["period"] * scale,
                (found.secondary_phase - PHASE) / found.errors["secondary_phase"] * scale,
            ]
        )
    np.testing.assert_allclose(np.std(pulls, axis=0), 1.0, atol=0.15)


def test_errors_grow_with_the_scatter():
    rng = np.random.default_rng(53)
    cycles = list(range(0, 200, 5))
    made = minima(cycles, errors=[1e-4] * 40, eclipses=[1] * 40, rng=rng)
    rough = [
        Minimum(m.cycle, 1, "V", m.time + rng.normal(0, 1e-3), m.error, "template", 50)
        for m in made
    ]
    assert fit_ephemeris(rough).reduced_chi2 > 30
    assert fit_ephemeris(rough).errors["period"] > 5 * fit_ephemeris(made).errors["period"]


def test_a_changing_period_is_found_when_asked_for():
    cycles = list(range(0, 2000, 100))
    made = minima(cycles, errors=[1e-4] * 20, eclipses=[1] * 20, change=3e-9)
    found = fit_ephemeris(made, quadratic=True)
    assert found.change == pytest.approx(3e-9, rel=1e-3)
    assert fit_ephemeris(made).reduced_chi2 > 10


def test_skipped_minima_take_no_part():
    made = minima([0, 1, 2], errors=[1e-4] * 3, eclipses=[1] * 3)
    spoilt = Minimum(3, 1, "V", EPOCH, float("nan"), "", 2, why_not="only 2 points")
    assert len(fit_ephemeris([*made, spoilt]).minima) == 3


@pytest.mark.parametrize(
    ("cycles", "eclipses", "quadratic"),
    [([4], [1], False), ([4, 4], [1, 2], False), ([], [], False), ([1, 2], [1, 1], True)],
)
def test_too_few_cycles_are_refused(cycles, eclipses, quadratic):
    made = minima(cycles, errors=[1e-4] * len(cycles), eclipses=eclipses)
    with pytest.raises(NoSolutionError, match="too few cycles"):
        fit_ephemeris(made, quadratic=quadratic)
