"""The register of limb-darkening laws."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest

from derivatives import check_derivatives
from limb_examples import ALL_CASES, PUBLISHED, exact_intensity
from shadowscale.light._kernels import mean_intensity_point
from shadowscale.light.laws import LAWS, law_named

EACH_CASE = pytest.mark.parametrize(("name", "c"), ALL_CASES)


def test_the_laws_are_those_of_the_interface():
    names = ["linear", "quadratic", "square-root", "logarithmic", "power-2", "four-parameter"]
    assert list(LAWS) == names
    assert {name for name, _ in ALL_CASES} == set(names)
    assert len({law.code for law in LAWS.values()}) == len(names)
    assert all(law.name == name for name, law in LAWS.items())


def test_an_unknown_law_is_refused_with_the_names_there_are():
    with pytest.raises(ValueError, match=r"one of linear, quadratic.*found 'cubic'"):
        law_named("cubic")


@EACH_CASE
def test_the_intensity_is_the_written_law(name, c):
    mu = np.array([0.0, 1e-6, 0.1, 0.5, 0.9, 1.0])
    exact = exact_intensity(name, c)
    expected = [float(exact(mpmath.mpf(m))) for m in mu]
    np.testing.assert_allclose(LAWS[name].intensity(mu, c), expected, rtol=0, atol=2e-15)
    assert LAWS[name].intensity(1.0, c) == 1.0


@EACH_CASE
def test_the_mean_is_the_integral_over_the_disc(name, c):
    exact = exact_intensity(name, c)
    mean = 2 * mpmath.quad(lambda mu: exact(mu) * mu, [0, 1])
    assert LAWS[name].mean_intensity(c) == pytest.approx(float(mean), abs=1e-14)


@EACH_CASE
def test_compiled_and_plain_means_agree_and_their_gradients_hold(name, c):
    law = LAWS[name]
    out = np.full(1 + len(c), np.nan)
    mean_intensity_point(law.code, np.array(c), out)
    assert out[0] == pytest.approx(law.mean_intensity(c), abs=1e-15)
    np.testing.assert_allclose(out[1:], law.mean_intensity_gradient(c), rtol=0, atol=1e-15)
    check_derivatives(law.mean_intensity, law.mean_intensity_gradient(c), c)


@pytest.mark.parametrize(("name", "c"), [(n, c) for n, rows in PUBLISHED.items() for c in rows])
def test_published_coefficients_lie_inside_the_bounds_and_come_back(name, c):
    law = LAWS[name]
    s = law.to_sampling(c)
    assert len(law.sampling_names) == len(law.sampling_bounds) == len(s) == len(law.coefficients)
    for value, (lower, upper) in zip(s, law.sampling_bounds, strict=True):
        assert lower < value < upper
    np.testing.assert_allclose(law.from_sampling(s), c, rtol=0, atol=1e-14)
    check_derivatives(law.from_sampling, law.sampling_jacobian(s), s)


@pytest.mark.parametrize("name", LAWS)
def test_the_corners_of_the_bounds_give_finite_coefficients(name):
    law = LAWS[name]
    for corner in np.stack(np.meshgrid(*law.sampling_bounds), axis=-1).reshape(
        -1, len(law.coefficients)
    ):
        assert np.all(np.isfinite(law.from_sampling(corner)))
        assert np.all(np.isfinite(law.sampling_jacobian(corner)))


def test_a_disc_without_darkening_has_sampling_coordinates():
    for name in ("quadratic", "power-2"):
        c = np.zeros(2)
        s = LAWS[name].to_sampling(c)
        assert np.all(np.isfinite(s))
        assert LAWS[name].from_sampling(s)[0] == 0.0


@pytest.mark.parametrize(
    ("c", "q"),
    [
        # Kipping 2013, MNRAS 435, 2152, computed with its formulas
        ((0.132, 0.183), (0.099225, 0.2095238095)),
        ((0.4, 0.26), (0.4356, 0.303030303)),
        ((1.0121, -0.1546), (0.73530625, 0.59014577)),
    ],
)
def test_triangular_coordinates_of_the_quadratic_law(c, q):
    np.testing.assert_allclose(LAWS["quadratic"].to_sampling(c), q, rtol=0, atol=5e-9)


@pytest.mark.parametrize(
    ("c", "h"),
    [
        # Maxted 2018, A&A 616, A39: h1 = I(1/2), h2 = I(1/2) - I(0), computed
        ((0.7, 0.65), (0.74609622, 0.44609622)),
        ((0.7829, 0.6910), (0.70204732, 0.48494732)),
    ],
)
def test_half_intensities_of_the_power_2_law(c, h):
    law = LAWS["power-2"]
    np.testing.assert_allclose(law.to_sampling(c), h, rtol=0, atol=5e-9)
    half, limb = law.intensity([0.5, 0.0], c)
    np.testing.assert_allclose(law.to_sampling(c), [half, half - limb], rtol=0, atol=1e-15)


def test_the_laws_of_one_atmosphere_give_nearly_the_same_flux():
    # V, 5750 K, log g 4.5 of Claret & Bloemen 2011; means computed from the coefficients. The linear
    # fit is known to lose flux (Heyrovsky 2007, ApJ 656, 483).
    means = {name: LAWS[name].mean_intensity(rows[0]) for name, rows in PUBLISHED.items()}
    expected = {
        "linear": 0.7812,
        "quadratic": 0.8022,
        "square-root": 0.7981,
        "logarithmic": 0.8002,
        "four-parameter": 0.8004,
    }
    for name, mean in expected.items():
        assert means[name] == pytest.approx(mean, abs=1e-4)
    assert means["power-2"] == pytest.approx(means["four-parameter"], abs=2e-3)
