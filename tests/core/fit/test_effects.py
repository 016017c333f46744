"""Small effects of near stars: predicted from physics, fitted, or left in the residuals."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from math import radians, sin

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
    sigma_of,
    solved,
)
from shadowscale.fit.effects import predicted_amplitudes
from shadowscale.fit.model import model_light
from shadowscale.fit.system import System

AMPLITUDES = {
    "ellipsoidal1": 0.0036, "ellipsoidal2": 0.0024, "reflection1": 0.0041, "reflection2": 0.0068,
    "beaming1": 0.00135, "beaming2": 0.00172,
}  # fmt: skip


@cache
def _truth() -> System:
    return invented(effects=AMPLITUDES)


@cache
def _solved(ellipsoidal: str, reflection: str, beaming: str) -> Solved:
    truth = _truth()
    effects = {"ellipsoidal": ellipsoidal, "reflection": reflection, "beaming": beaming}
    plan = ephemeris(effects=effects, levels="one", orbit="circular", fixed={"third_light": (0.0,)})
    photometry = observed(truth, count=2500, sigma=3e-4)
    return solved(truth, plan, photometry=photometry, velocities=observed_velocities(truth))


def _outside(names: Mapping[str, float]) -> np.ndarray:
    """Light outside the eclipses over a cycle: phases 0.1...0.4 and 0.6...0.9."""
    phases = np.concatenate([np.linspace(0.1, 0.4, 31), np.linspace(0.6, 0.9, 31)])
    return model_light(invented(effects=names), "V", EPOCH + phases * PERIOD) - 1.0


# ---------------------------------------------------------------- shapes


def test_ellipsoidal_light_varies_twice_a_cycle() -> None:
    """-a cos 2 phi weighted with the star's share of the light (Morris & Naftilan 1993, ApJ 419, 344)."""
    phases = np.concatenate([np.linspace(0.1, 0.4, 31), np.linspace(0.6, 0.9, 31)])
    dark = invented(bands={"V": 1e-9}, effects={"ellipsoidal1": 0.01})
    found = model_light(dark, "V", EPOCH + phases * PERIOD) - 1.0

    np.testing.assert_allclose(found, -0.01 * np.cos(4 * np.pi * phases), atol=2e-8)


def test_beaming_follows_the_velocity() -> None:
    """A star that comes nearer is brighter (Loeb & Gaudi 2003, ApJ 588, L117): star 1 after its eclipse."""
    dark = invented(bands={"V": 1e-9}, effects={"beaming1": 0.002})
    found = model_light(dark, "V", EPOCH + np.array([0.25, 0.75]) * PERIOD) - 1.0

    np.testing.assert_allclose(found, [0.002, -0.002], atol=1e-8)


def test_reflection_is_brightest_at_full_phase() -> None:
    """Star 2's lit face is seen best near secondary eclipse (phase 0.5), star 1's near primary."""
    second, first = _outside({"reflection2": 0.01}), _outside({"reflection1": 0.01})

    assert second[30] > second[0]
    assert first[30] < first[0]
    assert np.all(second[:31] == pytest.approx(second[:30:-1], abs=1e-9))


# ---------------------------------------------------------------- predictions


def test_predictions_are_those_of_the_literature() -> None:
    """Reflection (2/3) r^2 of the other star's light (Lambert sphere); beaming B K/c with
    B = x e^x/(e^x - 1), x = hc/(lambda k T) (Loeb & Gaudi 2003): 3.9 and 4.3 at 545 nm here."""
    truth = _truth()
    system = System(**{**vars(truth), "wavelengths": {"V": 545.0}})
    found = predicted_amplitudes(system, teff1=6500.0, teff2=5800.0, mass_ratio=98.4 / 112.9)
    ratio = 0.62 * 0.78**2 * (1 - 0.68 * 0.6 / 2.6) / (1 - 0.62 * 0.55 / 2.55)
    r1, r2 = 0.27 / 1.78, 0.27 * 0.78 / 1.78
    share2 = ratio / (1 + ratio)

    assert found["reflection1[V]"] == pytest.approx(2 / 3 * r1**2 * share2, rel=1e-6)
    assert found["reflection2[V]"] == pytest.approx(2 / 3 * r2**2 * (1 - share2), rel=1e-6)
    for star, teff, amplitude in ((1, 6500.0, 98.4), (2, 5800.0, 112.9)):
        x = 1.438776877e7 / (545.0 * teff)  # second radiation constant, CODATA [nm K]
        beaming = x * np.exp(x) / (np.exp(x) - 1) * amplitude / 299792.458
        assert found[f"beaming{star}[V]"] == pytest.approx(beaming, rel=0.02)


def test_predicted_tides_have_the_formulas_size() -> None:
    """0.15 (15 + u)(1 + g)/(3 - u) q r^3 sin^2 i with g between 0.2 and 1 (Morris & Naftilan 1993)."""
    system = System(**{**vars(_truth()), "wavelengths": {"V": 545.0}})
    found = predicted_amplitudes(system, teff1=6500.0, teff2=5800.0, mass_ratio=98.4 / 112.9)
    tide = 98.4 / 112.9 * (0.27 / 1.78) ** 3 * sin(radians(88.2)) ** 2

    assert 0.9 * tide < found["ellipsoidal1[V]"] < 2.1 * tide


def test_no_mass_ratio_is_taken_as_one() -> None:
    system = System(**{**vars(invented(velocities=False)), "wavelengths": {"V": 545.0}})
    none = predicted_amplitudes(system, teff1=6500.0, teff2=5800.0, mass_ratio=None)
    one = predicted_amplitudes(system, teff1=6500.0, teff2=5800.0, mass_ratio=1.0)

    assert none == one
    assert none["beaming1[V]"] == 0.0


# ---------------------------------------------------------------- in the solution


def test_left_off_they_stay_in_the_residuals() -> None:
    off, on = _solved("off", "off", "off"), _solved("predicted", "predicted", "predicted")

    assert off.solution.fit.rms_light["V"] > 2 * on.solution.fit.rms_light["V"]
    assert off.solution.fit.error_scale["V"] > 2
    assert "ellipsoidal1[V]" not in off.solution.estimates


def test_predicted_effects_describe_what_physics_made() -> None:
    found = _solved("predicted", "predicted", "predicted").solution
    said = next(each for each in found.decisions if each.what == "small effects")

    for name, true in AMPLITUDES.items():
        estimate = found.estimates[f"{name}[V]"]
        assert estimate.how == "fixed"
        assert estimate.value == pytest.approx(true, rel=0.1)
        assert said.numbers[f"{name}[V]"] == estimate.value
    assert found.fit.error_scale["V"] < 1.1
    assert "predicted" in said.words


def test_fitted_amplitudes_are_the_simulated_ones() -> None:
    """Reflection star by star; of the tides only the sum weighted with the light has a shape of its own."""
    found = _solved("fitted", "fitted", "predicted")
    estimates = found.solution.estimates

    for name in ("reflection1", "reflection2"):
        assert abs(found.pull(f"{name}[V]")) < 3.5
        assert sigma_of(estimates[f"{name}[V]"]) < 0.002
    ratio = estimates["light_ratio[V]"].value
    tides = [estimates[f"ellipsoidal{star}[V]"].value for star in (1, 2)]
    whole = (tides[0] + ratio * tides[1]) / (1 + ratio)
    assert whole == pytest.approx((0.0036 + ratio * 0.0024) / (1 + ratio), abs=3e-4)
    assert sigma_of(estimates["ellipsoidal1[V]"]) < 0.01
    for name in ("radius_sum", "radius_ratio", "inclination"):
        assert abs(found.pull(name)) < 3.5
    said = next(each for each in found.solution.decisions if each.what == "small effects")
    assert said.numbers["reflection1[V]"] == pytest.approx(0.0041, rel=0.1)


def test_without_the_effects_radii_are_wrong() -> None:
    """The check that the effects matter here at all: left off, the sum of the radii is off by many errors."""
    assert abs(_solved("off", "off", "off").pull("radius_sum")) > 3
    assert abs(_solved("predicted", "predicted", "predicted").pull("radius_sum")) < 3.5
