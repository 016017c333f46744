"""Data that allow no solution: the right error, with numbers and plain words; and never a nice number."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from fit_examples import (
    EPOCH,
    PERIOD,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    photometry_of,
    times_of,
)
from shadowscale.data.photometry import Photometry
from shadowscale.errors import NoSolutionError, NotConstrainedError, NotDetachedError, UsageError
from shadowscale.fit.plan import Plan
from shadowscale.fit.solve import solve
from shadowscale.judge.audit import audit

Floats = NDArray[np.float64]


def _noise(size: int, seed: int = 0) -> Floats:
    return np.asarray(1e-3 * np.random.default_rng(seed).standard_normal(size))


def _pulsation() -> tuple[Floats, Floats]:
    time = times_of(ordinary().truth, 600)
    return time, 1 + 0.1 * np.sin(4 * np.pi * (time - EPOCH) / PERIOD) + _noise(600)


@pytest.mark.parametrize("plan", [ephemeris(), Plan()], ids=["period given", "period searched"])
def test_noise_has_no_solution(plan: Plan) -> None:
    time = times_of(ordinary().truth, 600)
    with pytest.raises(
        NoSolutionError, match=r"no (repeating )?eclipse.*noise of a point = 0\.001"
    ):
        solve(photometry_of(time, 1 + _noise(600), 1e-3), None, plan)


@pytest.mark.parametrize("plan", [ephemeris(), Plan()], ids=["period given", "period searched"])
def test_a_sine_curve_is_not_detached(plan: Plan) -> None:
    time, flux = _pulsation()
    with pytest.raises(NotDetachedError, match=r"no flat part between eclipses"):
        solve(photometry_of(time, flux, 1e-3), None, plan)


def test_a_star_that_does_not_move() -> None:
    known = ordinary()
    rv = observed_velocities(known.truth)
    still = replace(rv, rv2=12.0 + 0.01 * np.sin(np.arange(rv.rv2.size)))
    with pytest.raises(NotConstrainedError, match=r"no motion of star 2.*K2 .*its error"):
        solve(known.photometry, still, ephemeris())


def test_an_epoch_on_another_clock() -> None:
    plan = replace(ephemeris(), epoch=EPOCH - 2400000.5)
    with pytest.raises(UsageError, match=r"--epoch: expected a time on the clock of the phot"):
        solve(ordinary().photometry, None, plan)


def _refusal(photometry: Photometry, plan: Plan) -> str:
    """Why no radii may be quoted: the error, or what is fatal in the audit; empty where they may."""
    try:
        found = solve(photometry, None, plan)
    except NoSolutionError as error:
        return str(error)
    return " ".join(each.words for each in audit(found, photometry, None) if each.fatal)


@pytest.mark.parametrize("depth", [0.02, 0.1, 0.3])
def test_a_sine_curve_with_a_period_gives_no_radii(depth: float) -> None:
    time = times_of(ordinary().truth, 600)
    flux = 1 + depth * np.sin(4 * np.pi * (time - EPOCH) / PERIOD) + _noise(600)
    words = _refusal(photometry_of(time, flux, 1e-3), ephemeris())

    assert re.search(r"separate stars|flat part|spheres|Roche lobe", words)


@pytest.mark.parametrize("factor", [0.7853, 1.31])
def test_a_wrong_period_is_told(factor: float) -> None:
    with pytest.raises(NoSolutionError, match=r"at this period.*search the period"):
        solve(ordinary().photometry, None, replace(ephemeris(), period=PERIOD * factor))


@pytest.mark.parametrize("count", [0, 1, 7])
def test_too_few_points(count: int) -> None:
    known = ordinary().photometry
    rows = np.linspace(0, 699, count).astype(int)
    few = photometry_of(known.time[rows], known.flux[rows], 1e-3)
    with pytest.raises(NoSolutionError, match=rf"too few usable points.*points = {count}"):
        solve(few, None, ephemeris())


def test_nothing_left_after_exclusion() -> None:
    known = ordinary().photometry
    nothing = known.excluded(np.ones(known.time.size, dtype=bool), "cloud")
    with pytest.raises(NoSolutionError, match=r"too few usable points"):
        solve(nothing, None, ephemeris())


def test_only_light_outside_the_eclipses() -> None:
    known = ordinary().photometry
    phase = np.mod((known.time - EPOCH) / PERIOD, 0.5)
    near = np.minimum(phase, 0.5 - phase) < 0.06
    with pytest.raises(NoSolutionError, match=r"no eclipse stands out|too few usable points"):
        solve(known.excluded(near, "clouds"), None, ephemeris())


def test_velocities_of_another_star() -> None:
    """Velocities that do not follow the eclipses are not taken for an orbit."""
    other = observed_velocities(invented(period=PERIOD * 0.713), count=25)
    with pytest.raises(NotConstrainedError, match=r"do not follow the period of the eclipses"):
        solve(ordinary().photometry, other, ephemeris())


def test_a_period_that_is_none() -> None:
    with pytest.raises(ValueError, match=r"period must be positive, found -1"):
        solve(ordinary().photometry, None, replace(ephemeris(), period=-1.0))


def test_an_exposure_that_is_none() -> None:
    with pytest.raises(ValueError, match=r"exposure must not be negative, found -1"):
        solve(ordinary().photometry, None, ephemeris(exposure=-1.0))


def test_stars_beyond_their_lobes_are_refused_by_the_audit() -> None:
    """r1 + r2 = 0.8: the spheres fit, and the audit says that no radii may be quoted.

    A lobe of equal masses has 0.379 of the separation (Eggleton 1983, ApJ 268, 368).
    """
    photometry = observed(invented(radius_sum=0.8, inclination=80.0), wide=0.2)
    found = solve(photometry, None, ephemeris())

    assert found.estimates["r1"].value > 0.379
    assert [each.check for each in audit(found, photometry, None) if each.fatal] == ["fill-out"]


def test_errors_carry_their_numbers() -> None:
    with pytest.raises(NoSolutionError, match=r"no eclipse") as caught:
        solve(
            photometry_of(times_of(ordinary().truth, 600), 1 + _noise(600), 1e-3), None, ephemeris()
        )

    assert caught.value.exit_status == 4
    assert caught.value.numbers["points"] == 600
    assert caught.value.help
