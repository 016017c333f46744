"""Grey atmospheres against the exact solution, and against the measured Sun for plausibility."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.light.grey import (
    HOPF_LIMIT,
    grey_coefficients,
    grey_intensity,
    h_function,
    hopf_function,
)
from shadowscale.light.laws import LAWS

# Chandrasekhar 1960, Radiative Transfer: H(mu) for conservative isotropic scattering, recomputed from
# its integral equation by a separate program; I(mu)/I(1) = H(mu)/H(1).
TABLE = """
0.0  1.0000000  0.343901
0.05 1.1365748  0.390870
0.1  1.2473504  0.428966
0.2  1.4503514  0.498778
0.3  1.6425223  0.564866
0.4  1.8292756  0.629090
0.5  2.0127788  0.692197
0.6  2.1941330  0.754565
0.7  2.3739749  0.816413
0.8  2.5527043  0.877878
0.9  2.7305877  0.939053
1.0  2.9078105  1.000000
"""
MU, H, DARKENING = np.array(TABLE.split(), dtype=float).reshape(-1, 3).T
# The same for Hopf's q(tau); it agrees with the classical table.
Q = {
    0: 0.577350,
    0.01: 0.588235,
    0.03: 0.601241,
    0.05: 0.610757,
    0.1: 0.627919,
    0.2: 0.649550,
    0.3: 0.663366,
    0.4: 0.673091,
    0.5: 0.680294,
    0.6: 0.685801,
    0.8: 0.693534,
    1.0: 0.698539,
    1.5: 0.705130,
    2.0: 0.707917,
    2.5: 0.709193,
    3.0: 0.709808,
    3.5: 0.710114,
}
# Neckel & Labs 1994, Solar Physics 153, 91: nm, F/I(1) of the disc, I(0.5)/I(1)
SUN = [
    (445.125, 0.7596, 0.6421),
    (541.760, 0.8002, 0.7037),
    (640.970, 0.8290, 0.7476),
    (811.760, 0.8621, 0.7971),
]


def test_h_function_table():
    np.testing.assert_allclose(h_function(MU), H, rtol=0, atol=6e-8)
    mu, weight = np.polynomial.legendre.leggauss(80)
    mu, weight = ((mu + 1) / 2) ** 2, weight * (mu + 1) / 2
    # Moments of order 0 and 1 of the conservative case, exactly 2 and 2/sqrt 3
    assert weight @ h_function(mu) == pytest.approx(2, abs=1e-9)
    assert weight @ (mu * h_function(mu)) == pytest.approx(2 / np.sqrt(3), abs=1e-9)


def test_hopf_function_table():
    np.testing.assert_allclose(hopf_function(list(Q)), list(Q.values()), rtol=0, atol=6e-7)
    assert hopf_function(0.0) == pytest.approx(1 / np.sqrt(3), abs=1e-9)
    assert hopf_function(60.0) == pytest.approx(HOPF_LIMIT, abs=1e-12)


def test_the_light_of_all_wavelengths_follows_the_exact_darkening():
    found = grey_intensity(MU, 5772.0, None)
    np.testing.assert_allclose(found, h_function(MU) / h_function(1.0), rtol=0, atol=1e-9)
    np.testing.assert_allclose(found, DARKENING, rtol=0, atol=6e-7)


def test_eddingtons_temperature_law_gives_exactly_three_fifths():
    found = grey_intensity(MU, 5772.0, None, temperature_law="eddington")
    np.testing.assert_allclose(found, (2 + 3 * MU) / 5, rtol=0, atol=1e-12)
    for law, expected in [("linear", (0.6,)), ("quadratic", (0.6, 0.0)), ("power-2", (0.6, 1.0))]:
        c = grey_coefficients(5772.0, None, law, temperature_law="eddington")
        assert c == pytest.approx(expected, abs=1e-5)


@pytest.mark.parametrize("law", LAWS)
def test_every_law_keeps_the_flux(law):
    # 0.7942062 = mean of H(mu)/H(1) over the disc; linear u = 3 (1 - 0.7942062) = 0.617381
    c = grey_coefficients(5772.0, None, law)
    assert LAWS[law].mean_intensity(c) == pytest.approx(0.7942062, abs=5e-8)
    if law == "linear":
        assert c == pytest.approx((0.617381,), abs=6e-7)


@pytest.mark.parametrize("law", [law for law in LAWS if law != "linear"])
@pytest.mark.parametrize("wavelength_nm", [None, 440.0, 550.0, 800.0, 2200.0])
def test_laws_with_two_coefficients_or_more_follow_the_intensity(law, wavelength_nm):
    mu = np.linspace(0.1, 1.0, 19)
    c = grey_coefficients(6000.0, wavelength_nm, law)
    expected = grey_intensity(mu, 6000.0, wavelength_nm)
    np.testing.assert_allclose(LAWS[law].intensity(mu, c), expected, rtol=0, atol=0.012)


@pytest.mark.parametrize(("wavelength_nm", "mean", "half"), SUN)
def test_the_measured_sun_is_near(wavelength_nm, mean, half):
    # Lines blanket the real Sun: a grey atmosphere is 2-3 per cent off in the mean
    c = grey_coefficients(5772.0, wavelength_nm, "quadratic")
    assert LAWS["quadratic"].mean_intensity(c) == pytest.approx(mean, rel=0.035)
    assert grey_intensity(0.5, 5772.0, wavelength_nm) == pytest.approx(half, rel=0.06)


def test_darkening_grows_towards_the_blue_and_the_cool():
    u = [grey_coefficients(6000.0, nm, "linear")[0] for nm in (400, 550, 800, 2200)]
    assert u == sorted(u, reverse=True)
    u = [grey_coefficients(teff, 550.0, "linear")[0] for teff in (4500, 6000, 10000, 30000)]
    assert u == sorted(u, reverse=True)


@pytest.mark.parametrize("law", LAWS)
@pytest.mark.parametrize("teff", [1000.0, 3000.0, 200000.0])
@pytest.mark.parametrize("wavelength_nm", [200.0, 440.0, 5000.0])
def test_coefficients_always_lie_inside_the_bounds(law, teff, wavelength_nm):
    c = grey_coefficients(teff, wavelength_nm, law)
    sampling = LAWS[law].to_sampling(c)
    for value, (lower, upper) in zip(sampling, LAWS[law].sampling_bounds, strict=True):
        assert lower - 1e-12 <= value <= upper + 1e-12
    assert LAWS[law].mean_intensity(c) > 0


@pytest.mark.parametrize(
    ("arguments", "temperature_law", "message"),
    [
        ((0.0, 550.0, "linear"), "hopf", "teff must be a positive number of kelvins; found 0.0"),
        ((5772.0, -1.0, "linear"), "hopf", "wavelength_nm must be a positive number; found -1.0"),
        ((5772.0, 550.0, "cubic"), "hopf", "law must be one of linear"),
        ((5772.0, 550.0, "linear"), "lucy", "temperature_law must be one of hopf, eddington"),
    ],
)
def test_wrong_arguments_are_quoted(arguments, temperature_law, message):
    with pytest.raises(ValueError, match=message):
        grey_coefficients(*arguments, temperature_law=temperature_law)
