"""What must not matter: repetition, order of rows, files, units, bands' names, the cycle of the epoch."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from fit_examples import (
    EPOCH,
    PERIOD,
    Solved,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    photometry_of,
    sigma_of,
    solved,
)
from same import assert_same
from shadowscale.data import read_photometry
from shadowscale.errors import Stopped
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Solution
from shadowscale.fit.solve import solve


def _assert_equal(
    first: Solution, second: Solution, *, sigmas: float = 1e-6, leave: str = ""
) -> None:
    """Every estimate with an error the same to a small part of it, and the errors too."""
    assert set(first.estimates) == set(second.estimates)
    for name, one in first.estimates.items():
        if name == leave:
            continue
        other = second.estimates[name]
        if one.minus is None:
            assert other.value == pytest.approx(one.value, rel=1e-12)
            continue
        sigma = sigma_of(one)
        assert other.value == pytest.approx(one.value, abs=sigmas * sigma), name
        assert sigma_of(other) == pytest.approx(sigma, rel=max(sigmas, 1e-6)), name


def _again(**changes: object) -> Solved:
    known = ordinary()
    return solved(
        known.truth, photometry=replace(known.photometry, **changes), velocities=known.velocities
    )


def test_the_same_again_is_the_same_to_the_last_bit() -> None:
    known = ordinary()
    again = solved(known.truth, photometry=known.photometry, velocities=known.velocities)

    assert_same(known.solution, again.solution)


def test_flux_unit_does_not_matter() -> None:
    known = ordinary().photometry
    found = _again(flux=known.flux * 4096, flux_error=known.flux_error * 4096).solution

    _assert_equal(ordinary().solution, found)


def test_magnitudes_or_flux(tmp_path: Path) -> None:
    """The same light printed in magnitudes and in flux, read from files."""
    known = ordinary().photometry
    magnitude = 12.3 - 2.5 * np.log10(known.flux)
    error = 2.5 / np.log(10) * known.flux_error / known.flux
    found = []
    for name, header, value, sigma in (
        ("mag.csv", "BJD_TDB,mag,mag_err", magnitude, error),
        ("flux.csv", "BJD_TDB,flux,flux_err", 1234.5 * known.flux, 1234.5 * known.flux_error),
    ):
        rows = [f"{t:.10f},{v:.12g},{s:.12g}" for t, v, s in zip(known.time, value, sigma)]
        (tmp_path / name).write_text("\n".join([header, *rows]) + "\n", encoding="utf-8")
        table = read_photometry([tmp_path / name], band="V")
        found.append(solve(table, None, ephemeris(levels="one")))

    _assert_equal(found[0], found[1], sigmas=1e-4)


def test_one_file_or_two(tmp_path: Path) -> None:
    known = ordinary().photometry
    rows = [f"{t:.10f},{f:.12g},0.001" for t, f in zip(known.time, known.flux)]
    parts = {"all.csv": rows, "first.csv": rows[:300], "second.csv": rows[300:]}
    for name, lines in parts.items():
        text = "\n".join(["BJD_TDB,flux,flux_err", *lines]) + "\n"
        (tmp_path / name).write_text(text, encoding="utf-8")
    one = read_photometry([tmp_path / "all.csv"], band="V")
    two = read_photometry([tmp_path / "second.csv", tmp_path / "first.csv"], band="V")

    plan = ephemeris(levels="one")
    _assert_equal(solve(one, None, plan), solve(two, None, plan))


def test_order_of_rows_does_not_matter() -> None:
    """Rows at equal times come in another order: nothing else is left of the order in a table."""
    truth = ordinary().truth
    known = observed(truth, count=350)
    time = np.concatenate([known.time, known.time])
    random = np.random.default_rng(4)
    flux = np.concatenate([known.flux, known.flux + 1e-3 * random.standard_normal(350)])
    there = photometry_of(time, flux, 1e-3)
    back = photometry_of(time[::-1], flux[::-1], 1e-3)

    assert not np.array_equal(there.flux, back.flux)
    plan = ephemeris(levels="one")
    # sums in another order: a fit ends within a thousandth of an error of the minimum
    _assert_equal(solve(there, None, plan), solve(back, None, plan), sigmas=1e-3)


def test_order_and_names_of_bands_do_not_matter() -> None:
    truth = invented(bands={"V": 0.62, "I": 0.74})
    known = observed(truth, count=400)
    other = replace(known, band=1 - known.band, bands=("I", "V"))
    # depths are told in the first band, so that they differ
    first = solve(known, None, ephemeris(levels="one"))
    second = solve(other, None, ephemeris(levels="one"))
    for name in ("radius_sum", "radius_ratio", "inclination", "surface_brightness_ratio[I]"):
        sigma = sigma_of(first.estimates[name])
        assert second.estimates[name].value == pytest.approx(
            first.estimates[name].value, abs=0.02 * sigma
        )
        assert sigma_of(second.estimates[name]) == pytest.approx(sigma, rel=0.02)


@pytest.mark.parametrize("cycles", [1000, -1000])
def test_another_cycle_of_the_epoch(cycles: int) -> None:
    """The epoch moves by whole cycles, its error grows with the period's; nothing else moves."""
    known = ordinary()
    ours, theirs = (
        solved(
            known.truth,
            Plan(period=PERIOD, epoch=EPOCH + n * PERIOD, fixed={"third_light": (0.0,)}),
            photometry=known.photometry,
            velocities=known.velocities,
        ).solution
        for n in (0, cycles)
    )
    moved = theirs.estimates["epoch"].value - ours.estimates["epoch"].value

    _assert_equal(ours, theirs, sigmas=1e-4, leave="epoch")
    assert moved == pytest.approx(cycles * ours.estimates["period"].value, abs=1e-7)
    at = ours.system.free.index("epoch"), ours.system.free.index("period")
    error = ours.covariance[at[0], at[0]]
    error += cycles**2 * ours.covariance[at[1], at[1]] + 2 * cycles * ours.covariance[at]
    assert sigma_of(theirs.estimates["epoch"]) == pytest.approx(np.sqrt(error), rel=1e-3)


def test_time_zero_does_not_matter() -> None:
    """All times moved by the same whole number of days."""
    known = ordinary()
    assert known.velocities is not None
    shift = -512.0  # a power of two: times keep their digits
    photometry = replace(known.photometry, time=known.photometry.time + shift)
    velocities = replace(known.velocities, time=known.velocities.time + shift)
    plan = Plan(period=PERIOD, epoch=EPOCH + shift)
    found = solved(known.truth, plan, photometry=photometry, velocities=velocities)

    _assert_equal(known.solution, found.solution, sigmas=1e-3, leave="epoch")


def test_progress_goes_forward_and_may_stop() -> None:
    class Told:
        def __init__(self, most: int) -> None:
            self.seen: list[tuple[float, str]] = []
            self.most = most

        def report(self, fraction: float, words: str) -> None:
            self.seen.append((fraction, words))
            if len(self.seen) > self.most:
                raise Stopped

    told = Told(1000)
    solve(ordinary().photometry, None, ephemeris(), progress=told)
    fractions = [fraction for fraction, _ in told.seen]
    assert fractions == sorted(fractions)
    assert fractions[0] >= 0
    assert fractions[-1] <= 1
    assert len({words for _, words in told.seen}) > 3
    with pytest.raises(Stopped, match=r"^$"):
        solve(ordinary().photometry, None, ephemeris(), progress=Told(2))


def test_light_time_is_on_with_both_amplitudes_only() -> None:
    known = ordinary()
    one = observed_velocities(known.truth, stars=1)

    assert known.solution.system.light_time
    assert not solved(known.truth, photometry=known.photometry).solution.system.light_time
    assert not solve(known.photometry, one, ephemeris()).system.light_time
    assert not solve(
        known.photometry, known.velocities, ephemeris(light_time="off")
    ).system.light_time
