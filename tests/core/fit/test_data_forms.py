"""Every limb-darkening law, long exposures, many bands, uneven sampling: the truth comes back."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import pytest

from fit_examples import (
    EPOCH,
    PERIOD,
    POWER2,
    QUADRATIC,
    Solved,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    outside_light,
    outside_velocity,
    photometry_of,
    secondary_phase,
    sigma_of,
    solved,
    times_of,
    velocities_of,
)
from shadowscale.fit.model import model_light
from shadowscale.fit.plan import Plan
from shadowscale.fit.vector import limb_keys
from shadowscale.light.laws import LAWS

GEOMETRY = ("epoch", "radius_sum", "radius_ratio", "inclination")
# Claret & Bloemen 2011, A&A 529, A75: V at 5750 and 4500 K, log g 4.5 (power-2 invented)
LIMBS: Mapping[str, tuple[tuple[float, ...], tuple[float, ...]]] = {
    "linear": ((0.6564,), (0.7947,)),
    "quadratic": ((0.4650, 0.2565), (0.7872, 0.0100)),
    "square-root": ((0.2892, 0.5276), (0.7600, 0.0498)),
    "logarithmic": ((0.7556, 0.2345), (0.8014, 0.0159)),
    "power-2": POWER2,
    "four-parameter": ((0.4482, 0.2143, 0.3961, -0.2625), (0.6738, -0.8523, 1.6485, -0.5850)),
}


def _assert_recovered(found: Solved, names: tuple[str, ...] = GEOMETRY) -> None:
    for name in names:
        assert abs(found.pull(name)) < 3.5, name


@pytest.mark.parametrize("law", LIMBS)
def test_every_law_solves_and_recovers(law: str) -> None:
    truth = invented(law=law, limb=LIMBS[law], bands={"V": 0.45})
    found = solved(truth, ephemeris(law=law))

    assert found.solution.system.law == law
    assert set(limb_keys(1, "V", LAWS[law])) <= set(found.solution.estimates)
    _assert_recovered(found, (*GEOMETRY, "surface_brightness_ratio[V]"))


def test_laws_are_those_of_the_register() -> None:
    assert set(LIMBS) == set(LAWS)


def test_light_of_another_program_is_solved() -> None:
    """Source of the light: batman-package and scipy, not the engine; everything comes back."""
    truth = invented(
        law="quadratic", limb=QUADRATIC, bands={"V": 0.5}, third=0.06, radius_ratio=1.3,
        radius_sum=0.22, inclination=88.7, ecosw=0.11, esinw=-0.16, K1=80.0, K2=120.0,
    )  # fmt: skip
    random = np.random.default_rng(31)
    time = times_of(truth, 1200, middles=(0.0, secondary_phase(truth)))
    flux = outside_light(truth, "V", time) + 3e-4 * random.standard_normal(time.size)
    when = np.sort(EPOCH + random.uniform(0, 60, 24))
    curves = [outside_velocity(truth, n, when) + 0.2 * random.standard_normal(24) for n in (1, 2)]
    plan = Plan(period=PERIOD, law="quadratic", light_time="off")
    found = solved(
        truth, plan, photometry=photometry_of(time, flux, 3e-4),
        velocities=velocities_of(when, curves[0], curves[1], 0.2),
    )  # fmt: skip
    cycles = round((found.solution.estimates["epoch"].value - EPOCH) / PERIOD)
    names = ("period", "radius_sum", "radius_ratio", "inclination", "ecosw", "esinw", "K1", "K2")

    _assert_recovered(found, (*names, "gamma1", "gamma2", "third_light[V]"))
    assert found.pull("epoch", EPOCH + cycles * PERIOD) == pytest.approx(0.0, abs=3.5)
    assert found.solution.fit.error_scale["V"] == pytest.approx(1.0, abs=0.07)


@pytest.mark.parametrize("share", [0.15, 0.5, 1.0])
def test_long_exposures(share: float) -> None:
    """Exposures of a part, of half and of the whole of an eclipse (0.0863 cycles; 30 minutes is 0.1 of it)."""
    exposure = share * 0.0863 * PERIOD * 86400
    truth = invented(exposure=exposure)
    found = solved(truth, ephemeris(exposure=exposure), photometry=observed(truth, wide=0.1))

    _assert_recovered(found)


def test_thirty_minute_data_of_a_two_hour_eclipse() -> None:
    """90 days every 30 minutes, as from space: eclipses of 2.1 hours."""
    truth = invented(exposure=1800.0, period=3.1, radius_sum=0.09, inclination=89.6)
    random = np.random.default_rng(2)
    time = EPOCH - 45 + np.arange(90 * 48) / 48
    flux = model_light(truth, "V", time) + 3e-4 * random.standard_normal(time.size)
    photometry = photometry_of(time, flux, 3e-4, night=np.zeros(time.size, dtype=np.int64))
    found = solved(truth, Plan(period=3.1, epoch=EPOCH, exposure=1800.0), photometry=photometry)
    blind = solved(truth, Plan(period=3.1, epoch=EPOCH), photometry=photometry)

    _assert_recovered(found)
    # Without the exposure the smearing is taken for larger, less inclined stars.
    assert abs(blind.pull("radius_sum")) > 5


def test_four_bands_share_their_geometry() -> None:
    bands = {"B": 0.50, "V": 0.62, "R": 0.70, "I": 0.75}
    truth = invented(bands=bands)
    found = solved(truth, photometry=observed(truth, count=400))
    keys = tuple(f"surface_brightness_ratio[{band}]" for band in bands)

    _assert_recovered(found, (*GEOMETRY, *keys))
    one = solved(ordinary().truth, photometry=observed(ordinary().truth, count=400))
    ours, theirs = (sigma_of(each.solution.estimates["radius_sum"]) for each in (found, one))
    assert ours < 0.65 * theirs


def test_bands_that_take_turns() -> None:
    """Two bands point by point, and so many points that the search thins them: none is lost."""
    truth = invented(bands={"V": 0.62, "I": 0.74})
    random, count = np.random.default_rng(3), 12000
    time = EPOCH + np.linspace(0, 40, count)
    band = (np.arange(count) % 2).astype(np.int64)
    flux = np.where(band == 0, model_light(truth, "V", time), model_light(truth, "I", time))
    flux += 2e-3 * random.standard_normal(count)
    photometry = photometry_of(time, flux, 2e-3, band=band, bands=("V", "I"))
    found = solved(truth, ephemeris(levels="one"), photometry=photometry)

    _assert_recovered(
        found, (*GEOMETRY, "surface_brightness_ratio[V]", "surface_brightness_ratio[I]")
    )


def test_only_primary_eclipses_were_seen() -> None:
    """Half the light curve is enough for the orbit's epoch; the rest comes with larger errors."""
    known = ordinary()
    phase = (known.photometry.time - EPOCH) / PERIOD
    far = np.abs(phase - np.round(phase)) > 0.25
    found = solved(known.truth, photometry=known.photometry.excluded(far, "not observed"))

    _assert_recovered(found)
    for name in ("surface_brightness_ratio[V]", "radius_ratio"):
        assert sigma_of(found.solution.estimates[name]) > 2 * sigma_of(
            known.solution.estimates[name]
        )


def test_the_period_is_found_where_none_is_given() -> None:
    truth = ordinary().truth
    random = np.random.default_rng(9)
    time = EPOCH - 20 + np.arange(40 * 60) / 60
    flux = model_light(truth, "V", time) + 2e-3 * random.standard_normal(time.size)
    found = solved(
        truth, Plan(levels="one"), photometry=photometry_of(time, flux, 2e-3),
        velocities=observed_velocities(truth),
    )  # fmt: skip
    cycles = round((found.solution.estimates["epoch"].value - EPOCH) / PERIOD)

    _assert_recovered(found, ("period", "radius_sum", "radius_ratio", "inclination", "K1", "K2"))
    assert abs(found.pull("epoch", EPOCH + cycles * PERIOD)) < 3.5


def test_stars_swap_names_with_their_eclipses() -> None:
    """The deeper eclipse names star 1: a brighter star 2 at the given epoch becomes star 1."""
    truth = invented(bands={"V": 1.6}, radius_ratio=0.78)
    found = solved(truth, photometry=observed(truth)).solution.estimates
    shift = (found["epoch"].value - EPOCH) / PERIOD % 1

    assert shift == pytest.approx(0.5, abs=1e-3)
    assert found["radius_ratio"].value == pytest.approx(1 / 0.78, abs=0.01)
    assert found["surface_brightness_ratio[V]"].value == pytest.approx(1 / 1.6, abs=0.01)


def test_velocities_name_the_stars() -> None:
    """Where velocities say which star is behind, they name star 1, be its eclipse the shallower one."""
    truth = invented(bands={"V": 1.6}, ecosw=0.1, esinw=0.05)
    photometry = observed(truth, middles=(0.0, secondary_phase(truth)))
    found = solved(truth, photometry=photometry, velocities=observed_velocities(truth))
    notes = " ".join(found.solution.notes)

    _assert_recovered(found, (*GEOMETRY, "ecosw", "esinw", "K1", "K2"))
    assert "star 1 of the velocities is eclipsed at the shallower minimum" in notes
