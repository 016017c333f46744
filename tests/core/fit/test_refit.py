"""Following a solution from where it stands: the same end, with what was decided kept."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from fit_examples import (
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    sigma_of,
    solved,
)
from shadowscale.fit.refit import refit

NAMES = ("period", "epoch", "radius_sum", "radius_ratio", "inclination", "K1", "K2", "M1", "R2")


def test_from_the_solution_nothing_moves() -> None:
    known = ordinary()
    found = refit(known.solution, known.photometry, known.velocities, ephemeris())

    assert found.system.free == known.solution.system.free
    assert found.decisions == known.solution.decisions
    for name in NAMES:
        one, other = known.solution.estimates[name], found.estimates[name]
        assert other.value == pytest.approx(one.value, abs=0.02 * sigma_of(one))
        assert sigma_of(other) == pytest.approx(sigma_of(one), rel=0.02)


def test_from_another_start_it_comes_back() -> None:
    known = ordinary()
    start = {"radius_ratio": 0.85, "inclination": 87.0, "radius_sum": 0.28, "no such": 3.0}
    found = refit(known.solution, known.photometry, known.velocities, ephemeris(), start=start)

    for name in NAMES:
        one = known.solution.estimates[name]
        assert found.estimates[name].value == pytest.approx(one.value, abs=0.1 * sigma_of(one))


def test_outliers_and_scales_are_kept() -> None:
    known = ordinary()
    rows = [20, 111, 350, 600]
    flux = known.photometry.flux.copy()
    flux[rows] += 0.015
    photometry = replace(known.photometry, flux=flux)
    first = solved(known.truth, photometry=photometry).solution
    found = refit(first, photometry, None, ephemeris())

    assert np.flatnonzero(found.light.why).tolist() == rows
    assert found.fit.error_scale == first.fit.error_scale


def test_rows_set_aside_meanwhile_stay_aside() -> None:
    known = ordinary()
    rows = np.zeros(known.photometry.time.size, dtype=bool)
    rows[:60] = True
    photometry = known.photometry.excluded(rows, "by hand")
    found = refit(known.solution, photometry, known.velocities, ephemeris())

    assert {found.light.reasons[code] for code in found.light.why[:60]} == {"by hand"}
    assert found.fit.points == known.solution.fit.points - 60


def test_jitter_is_kept() -> None:
    truth = invented(light_time=True)
    velocities = replace(
        observed_velocities(truth, count=40, sigma=1.3), rv1_error=np.full(40, 0.5),
        rv2_error=np.full(40, 0.5),
    )  # fmt: skip
    photometry = observed(truth)
    first = solved(truth, photometry=photometry, velocities=velocities).solution
    found = refit(first, photometry, velocities, ephemeris())

    assert first.fit.jitter
    assert found.fit.jitter == first.fit.jitter
    assert sigma_of(found.estimates["K1"]) == pytest.approx(
        sigma_of(first.estimates["K1"]), rel=0.01
    )
