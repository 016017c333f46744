"""Errors of contact times against the information forecast of a trapezoid."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.timing.eclipse_fit import fit_eclipse
from shadowscale.timing.profile import TRAPEZOID
from shadowscale.timing.shape_fit import ShapeData
from simple_eclipses import SimpleBinary, trapezoid

PERIOD = 60.0  # [d] so long that the path over the eclipse is straight


def shape_data(time, flux, sigma, *, period=PERIOD, band=None, exposure=0.0):
    band = np.zeros(time.size, np.int64) if band is None else band
    return ShapeData(
        phase=time / period,
        flux=flux,
        sigma=np.full(time.size, sigma),
        band=band,
        bands=int(band.max()) + 1,
        centre=0.0,
        exposure=exposure,
    )


# Carter et al. 2008, ApJ 689, 499 (formulas from memory), confirmed by direct inversion of the information
# matrix: T = 0.2 d mid-ingress to mid-egress, depth 0.2, 1000 points a day, sigma 0.005.
FORECASTS = [
    (0.03, 9.682458e-5, 3.4031e-4, 2.0201e-4, 3.8348e-4, (-0.0481, 0.1690, -0.2847)),
    (0.08, 1.581139e-4, 5.77350e-4, 3.65148e-4, 4.56436e-4, (-0.15811, 0.31623, -0.5)),
]


@pytest.mark.parametrize(("tau", "s_tc", "s_tau", "s_width", "s_depth", "correlations"), FORECASTS)
def test_errors_are_those_of_the_information_forecast(
    tau, s_tc, s_tau, s_width, s_depth, correlations
):
    time = np.arange(-5, 5, 1e-3) + 3.7e-4
    flux = trapezoid(time, middle=0.0, duration=0.2 + tau, ingress=tau, depth=0.2)
    fit = fit_eclipse(
        shape_data(time, flux, 0.005), middle=0.0, width=0.2 / PERIOD, profile=TRAPEZOID
    )
    # The fit has first to fourth contact; the forecast has the width at half depth.
    turn = np.array([[1, 0, 0, 0, 0], [0, 0, 1, 0, 0], [0, 1, -1, 0, 0], [0, 0, 0, 0, 1.0]])
    covariance = turn @ fit.timing.covariance @ turn.T
    errors = np.sqrt(np.diag(covariance)) * [PERIOD, PERIOD, PERIOD, 1]
    # The averaging of points in cells leaves 1e-4 of the duration.
    np.testing.assert_allclose(fit.timing.duration * PERIOD, 0.2 + tau, rtol=1e-3)
    np.testing.assert_allclose(fit.timing.ingress * PERIOD, tau, rtol=2e-2)
    np.testing.assert_allclose(fit.timing.depth, 0.2, rtol=1e-3)
    np.testing.assert_allclose(errors, [s_tc, s_tau, s_width, s_depth], rtol=0.15)
    scaled = covariance / np.outer(np.sqrt(np.diag(covariance)), np.sqrt(np.diag(covariance)))
    found = scaled[1, 2], scaled[1, 3], scaled[2, 3]
    np.testing.assert_allclose(found, correlations, atol=0.08)
    assert fit.timing.flat is True


def test_unequal_branches_are_seen():
    time = np.arange(-0.5, 0.5, 1e-3)
    flux = 1 - 0.2 * np.clip(np.minimum((time + 0.12) / 0.02, (0.12 - time) / 0.08), 0, 1)
    rng = np.random.default_rng(3)
    data = shape_data(time, flux + rng.normal(0, 5e-4, time.size), 5e-4)
    timing = fit_eclipse(data, middle=0.0, width=0.2 / PERIOD, profile=TRAPEZOID).timing
    np.testing.assert_allclose(timing.ingress * PERIOD, 0.02, rtol=0.1)
    np.testing.assert_allclose(timing.egress * PERIOD, 0.08, rtol=0.1)


def test_depths_are_per_band_and_the_shape_is_shared():
    time = np.repeat(np.arange(-0.4, 0.4, 2e-3), 2)
    band = (np.arange(time.size) % 2).astype(np.int64)
    depth = np.where(band == 0, 0.3, 0.1)
    flux = 1 - depth * (1 - trapezoid(time, middle=0.01, duration=0.2, ingress=0.05, depth=1.0))
    rng = np.random.default_rng(4)
    flux = flux * np.where(band == 0, 1.0, 1.2) + rng.normal(0, 1e-3, time.size)
    fit = fit_eclipse(
        shape_data(time, flux, 1e-3, band=band), middle=0.0, width=0.2 / PERIOD, profile=TRAPEZOID
    )
    np.testing.assert_allclose(fit.depths, [0.3, 0.1], atol=5 * fit.depth_errors.max())
    np.testing.assert_allclose(fit.timing.middle * PERIOD, 0.01, atol=1e-3)


@pytest.mark.parametrize(
    ("k", "inclination", "which", "flat"),
    [(0.5, 90.0, 1, True), (0.5, 90.0, 2, True), (1.0, 86.0, 1, False), (2.0, 89.0, 1, True)],
)
def test_durations_of_spheres_are_unbiased(k, inclination, which, flat):
    # The truth is the simulator's own contact times; a plain trapezoid is 2 to 15 % off here.
    binary = SimpleBinary(10.0, 0.0, 0.1, k, inclination, brightness=(0.6,))
    contacts = binary.contacts(which)
    middle = 0.0 if which == 1 else 0.5
    phase = np.linspace(-0.12, 0.12, 4001)
    rng = np.random.default_rng(5)
    flux = binary.flux_at_phase(phase + middle) + rng.normal(0, 1e-3, phase.size)
    data = shape_data(phase, flux, 1e-3, period=1.0)
    timing = fit_eclipse(data, middle=0.0, width=0.04).timing
    np.testing.assert_allclose(timing.duration, contacts[-1] - contacts[0], rtol=4e-3)
    np.testing.assert_allclose(timing.depth, binary.depths(which), rtol=5e-3)
    assert timing.flat is flat
    if flat:
        np.testing.assert_allclose(timing.ingress, contacts[1] - contacts[0], rtol=2e-2)
    plain = fit_eclipse(data, middle=0.0, width=0.04, profile=TRAPEZOID).timing
    truth = contacts[-1] - contacts[0]
    assert abs(timing.duration - truth) < 0.3 * abs(plain.duration - truth)


def test_errors_hold_what_an_unknown_limb_darkening_does():
    phase = np.linspace(-0.12, 0.12, 4001)
    rng = np.random.default_rng(6)
    for darkening in (0.35, 0.65):
        binary = SimpleBinary(10.0, 0.0, 0.1, 0.6, 89.0, darkening=darkening)
        contacts = binary.contacts(1)
        flux = binary.flux_at_phase(phase) + rng.normal(0, 5e-4, phase.size)
        timing = fit_eclipse(
            shape_data(phase, flux, 5e-4, period=1.0), middle=0.0, width=0.05
        ).timing
        error = np.sqrt(timing.covariance[1, 1])
        assert abs(timing.duration - (contacts[-1] - contacts[0])) < 2 * error


def test_exposure_does_not_lengthen_the_eclipse():
    binary = SimpleBinary(3.0, 0.0, 0.1, 0.7, 89.0)
    rng = np.random.default_rng(7)
    phase = rng.uniform(-0.1, 0.1, 1500)
    exposure = 0.02
    flux = binary.flux(phase * 3.0, exposure=exposure * 3.0) + rng.normal(0, 1e-3, phase.size)
    truth = binary.contacts(1)[-1] - binary.contacts(1)[0]
    smeared = shape_data(phase, flux, 1e-3, period=1.0, exposure=exposure)
    blind = shape_data(phase, flux, 1e-3, period=1.0)
    with_exposure = fit_eclipse(smeared, middle=0.0, width=0.05).timing.duration
    without = fit_eclipse(blind, middle=0.0, width=0.05).timing.duration
    np.testing.assert_allclose(with_exposure, truth, rtol=0.01)
    assert without > truth * 1.05
