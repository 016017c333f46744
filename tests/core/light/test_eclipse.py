"""The hidden fraction against direct integration, exact values, identities and another program."""

from __future__ import annotations

from math import acos, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import ellipe, ellipk

from derivatives import check_derivatives
from limb_examples import ALL_CASES, EDGES, PUBLISHED, exact_intensity
from shadowscale.light import _kernels
from shadowscale.light.eclipse import hidden_fraction, hidden_fraction_derivatives
from shadowscale.light.laws import LAWS
from slow_eclipse import slow_hidden_fraction

EACH_LAW = pytest.mark.parametrize("name", LAWS)
CLOSED = ("linear", "quadratic")
RATIOS = (1e-4, 0.02, 0.1, 0.3, 0.5, 0.7, 0.95, 0.999, 1 - 1e-8, 1.0, 1 + 1e-8, 1.2, 2.0, 10.0, 1e2)


def hard_separations(p: float, fractions: tuple[float, ...]) -> list[float]:
    """Separations at and next to every contact of a dark disc of radius p."""
    inner, outer, half = abs(1 - p), 1 + p, min(1.0, p)
    found = {0.0, p, inner, outer, inner + half}
    for contact in (inner, outer, p):
        found |= {float(np.nextafter(contact, 0)), float(np.nextafter(contact, 1e9))}
    for f in fractions:
        found |= {f, inner * (1 - f), inner + half * f, outer - half * f, p * (1 - f), p * (1 + f)}
    return sorted(d for d in found if 0 <= d <= outer)


def check_against_integration(name, c, p, d, tolerance):
    truth = float(slow_hidden_fraction(exact_intensity(name, c), d, p))
    found = hidden_fraction(d, p, name, c)
    assert found == pytest.approx(truth, rel=0, abs=tolerance), (name, c, p, d)


# Direct integration ------------------------------------------------------------------------------


@EACH_LAW
@pytest.mark.parametrize("p", [0.1, 0.5, 0.95, 1.0, 1.2, 1e2])
def test_integration_at_the_contacts(name, p):
    # Truth: computed with mpmath, 20 digits. At p = 0.95, d = 0.05 other programs have failed.
    c = PUBLISHED[name][0]
    for d in [*hard_separations(p, (0.01,))[::3], abs(1 - p)]:
        check_against_integration(name, c, p, d, 1e-12 if name in CLOSED else 1e-9)


@pytest.mark.parametrize(("name", "c"), [(n, c) for n, rows in EDGES.items() for c in rows])
def test_integration_at_the_edge_of_what_is_physical(name, c):
    tolerance = 1e-12 if name in CLOSED else 1e-9
    for p, d in [(0.3, 0.7), (0.3, 0.71), (0.3, 0.2), (1.0, 0.01), (1.5, 0.6), (20.0, 20.3)]:
        check_against_integration(name, c, p, d, tolerance)


@pytest.mark.long
@pytest.mark.parametrize(
    ("name", "c"), [(name, rows[0]) for table in (PUBLISHED, EDGES) for name, rows in table.items()]
)
@pytest.mark.parametrize("p", RATIOS)
def test_integration_over_the_hard_grid(name, c, p):
    for d in hard_separations(p, (1e-16, 1e-13, 1e-10, 1e-7, 1e-4, 0.01, 0.1, 0.3, 0.6)):
        check_against_integration(name, c, p, d, 1e-12 if name in CLOSED else 1e-9)


# Exact and tabulated values ----------------------------------------------------------------------


def test_uniform_discs_overlap_as_two_circles_do():
    # A(d)/pi from the closed formula of two circles; 2/3 - sqrt3/(2 pi) for two equal ones
    expected = {
        (1.0, 1.0): 2 / 3 - sqrt(3) / (2 * pi),
        (1.0, 0.5): 0.11165247968,
        (1.2, 0.5): 0.05414387535,
        (0.9, 0.1): 0.01,
        (0.3, 0.5): 0.25,
    }
    for (d, p), value in expected.items():
        for law in ("linear", "quadratic"):
            c = [0.0] * len(LAWS[law].coefficients)
            assert hidden_fraction(d, p, law, c) == pytest.approx(value, abs=6e-12)


# d, k, linear 0.6, quadratic (0.4, 0.26): computed with mpmath by a separate program
TABLE = """
0.0 0.5 0.3002404736 0.2952469404
0.2 0.5 0.2958348962 0.2918410600
0.5 0.5 0.2688967046 0.2682853737
0.7 0.5 0.2072082583 0.2076346358
1.0 0.5 0.1020867370 0.1028957748
1.3 0.5 0.0231783608 0.0231400509
0.3 1.0 0.8444324169 0.8437941244
1.0 1.0 0.3975726601 0.3972396226
0.95 0.1 0.0059954689 0.0059666566
0.5 1.2 0.8719997446 0.8714360465
1.5 1.2 0.2363966924 0.2374415645
0.2 1.3 1.0000000000 1.0000000000
"""


@pytest.mark.parametrize("row", TABLE.split("\n")[1:-1])
def test_linear_and_quadratic_table(row):
    d, p, linear, quadratic = map(float, row.split())
    assert hidden_fraction(d, p, "linear", [0.6]) == pytest.approx(linear, abs=6e-11)
    assert hidden_fraction(d, p, "quadratic", [0.4, 0.26]) == pytest.approx(quadratic, abs=6e-11)


PLACES = [(0, 0.5), (0.5, 0.5), (0.7, 0.5), (1, 0.5), (1.3, 0.5), (0.3, 1), (0.95, 0.1)]


@pytest.mark.parametrize(
    ("name", "c", "values"),
    [  # computed with mpmath by a separate program
        (
            "square-root",
            (0.1, 0.55),
            "0.2845515093 0.2638154924 0.2070277915 0.1050078621 0.0248802822 0.8352452577 0.0064794566",
        ),
        (
            "logarithmic",
            (0.7, 0.24),
            "0.2954898702 0.2681619813 0.2075120713 0.1028946414 0.0232525436 0.8433516854 0.0060039186",
        ),
        (
            "power-2",
            (0.7, 0.65),
            "0.2926979046 0.2669387728 0.2073320273 0.1034489699 0.0237361897 0.8410132802 0.0061471177",
        ),
        (
            "four-parameter",
            (0.4482, 0.2143, 0.3961, -0.2625),
            "0.3016640897 0.2704823336 0.2077313669 0.1017111340 0.0224082209 0.8476550060 0.0057598773",
        ),
    ],
)
def test_tables_of_the_other_laws(name, c, values):
    found = [float(hidden_fraction(d, p, name, c)) for d, p in PLACES]
    np.testing.assert_allclose(
        found, [float(value) for value in values.split()], rtol=0, atol=6e-11
    )


@pytest.mark.parametrize("power", [0.02, 0.3, 1.0, 2.5, 8.0])
def test_powers_of_mu_keep_their_figures_at_the_centre_and_at_the_limb(power):
    r2 = np.concatenate([10.0 ** np.linspace(-300, -1, 40), np.linspace(0.1, 0.9999, 40)])
    mu2 = np.concatenate([1.0 - r2, 10.0 ** np.linspace(-299, -1, 40)])
    r2 = np.concatenate([r2, 1.0 - mu2[r2.size :]])

    found = np.array([_kernels._power(*pair, power / 2) for pair in zip(mu2, r2, strict=True)])

    # computed with numpy's logarithm and exponential
    log2 = np.where(mu2 > 0.5, np.log1p(-np.where(mu2 > 0.5, r2, 0.0)), np.log(mu2))
    less = np.expm1(np.maximum(power / 2 * log2, -700.0))
    np.testing.assert_allclose(found, np.column_stack([log2, less]), rtol=2e-13)


@pytest.mark.parametrize("k", [0.1, 0.3, 0.5, 0.7, 0.9])
def test_concentric_discs(k):
    # Elementary integral over the covered centre
    u1, u2 = 0.4, 0.26
    m = sqrt(1 - k * k)
    hidden = (1 - m**2) * (1 - u1 - u2) + 2 / 3 * (u1 + 2 * u2) * (1 - m**3) - u2 / 2 * (1 - m**4)
    expected = hidden / (1 - u1 / 3 - u2 / 6)
    assert hidden_fraction(0.0, k, "quadratic", [u1, u2]) == pytest.approx(expected, abs=1e-15)


@pytest.mark.parametrize("k", [0.1, 0.3, 0.7, 0.9])
def test_fully_darkened_disc_at_inner_contact(k):
    # Mandel & Agol 2002, ApJ 580, L171, special value (formula from memory, confirmed by quadrature)
    expected = acos(1 - 2 * k) / pi - 2 / (3 * pi) * (3 + 2 * k - 8 * k * k) * sqrt(k * (1 - k))
    assert hidden_fraction(1 - k, k, "linear", [1.0]) == pytest.approx(expected, abs=1e-14)


@pytest.mark.parametrize("k", [0.2, 0.4, 0.5, 0.6, 1.0, 1.5])
def test_fully_darkened_disc_with_the_edge_over_its_centre(k):
    # Mandel & Agol 2002, d = k (formulas from memory, confirmed by quadrature); scipy takes k^2
    if k < 0.5:
        m = (2 * k) ** 2
        special = 4 * (2 * k * k - 1) * ellipe(m) + (1 - 4 * k * k) * ellipk(m)
        expected = 1.5 * (1 / 3 + 2 / (9 * pi) * special)
    elif k == 0.5:
        expected = 1 / 2 - 2 / (3 * pi)
    else:
        m = 1 / (2 * k) ** 2
        first = 16 * k / (9 * pi) * (2 * k * k - 1) * ellipe(m)
        second = (1 - 4 * k * k) * (3 - 8 * k * k) * ellipk(m) / (9 * pi * k)
        expected = 1.5 * (1 / 3 + first - second)
    assert hidden_fraction(k, k, "linear", [1.0]) == pytest.approx(expected, abs=1e-14)


# Two identities for every law: the convolution of the two discs ------------------------------------


def separation_integral(name, c, p, power):
    """Integral of 2 d^power beta(d) from 0 to outer contact."""
    nodes, weights = np.polynomial.legendre.leggauss(60)
    total = 0.0
    for start, end in ((0.0, abs(1 - p)), (abs(1 - p), 1 + p)):
        angle = pi * (nodes + 1) / 2  # the square roots at the contacts become smooth
        d = (start + end) / 2 - (end - start) / 2 * np.cos(angle)
        slope = (end - start) / 2 * np.sin(angle) * pi / 2
        total += np.sum(weights * slope * 2 * d**power * hidden_fraction(d, p, name, c))
    return total


@pytest.mark.parametrize(("name", "c"), ALL_CASES)
@pytest.mark.parametrize("p", [0.05, 0.5, 1.0, 1.2, 7.0])
def test_the_discs_convolve(name, c, p):
    law = LAWS[name]
    mu, weight = np.polynomial.legendre.leggauss(60)
    mu, weight = ((mu + 1) / 2) ** 3, 1.5 * weight * ((mu + 1) / 2) ** 2
    light = law.intensity(mu, c) * mu * weight
    mean_square_radius = np.sum(light * (1 - mu**2)) / np.sum(light)
    second = p * p * (mean_square_radius + p * p / 2)
    assert separation_integral(name, c, p, 1) == pytest.approx(p * p, rel=2e-9)
    assert separation_integral(name, c, p, 3) == pytest.approx(second, rel=2e-9)


@pytest.mark.parametrize(
    ("c", "expected"), [((0.0, 0.0), 0.15625), ((0.6, 0.0), 0.14375), ((0.4, 0.26), 0.144205465587)]
)
def test_second_moment_of_an_eclipse(c, expected):
    # k = 0.5; computed by a separate program from the exact mean square radius
    assert separation_integral("quadratic", c, 0.5, 3) == pytest.approx(expected, abs=1e-11)


# Another program -----------------------------------------------------------------------------------


@pytest.mark.parametrize("p", [0.05, 0.3, 0.8])
@pytest.mark.parametrize(
    ("theirs", "ours", "c"),
    [
        ("quadratic", "quadratic", (0.4650, 0.2565)),
        ("linear", "linear", (0.6564,)),
        ("uniform", "linear", ()),
    ],
)
def test_batman_package_away_from_its_bad_points(theirs, ours, c, p):
    # batman-package 2.5 (Kreidberg 2015, PASP 127, 1161); it is 1e-8 nearly everywhere
    import batman

    params = batman.TransitParams()
    params.t0, params.per, params.rp, params.a, params.inc = 0.0, 1.0, p, 10.0, 90.0
    params.ecc, params.w, params.u, params.limb_dark = 0.0, 90.0, list(c), theirs
    time = np.linspace(0.0, 0.035, 173)[1:]
    d = 10.0 * np.sin(2 * pi * time)
    away = (np.abs(d - abs(1 - p)) > 1e-3) & (np.abs(d - p) > 1e-3)
    flux = batman.TransitModel(params, time).light_curve(params)
    hidden = hidden_fraction(d, p, ours, c or (0.0,))
    np.testing.assert_allclose((1 - hidden)[away], flux[away], rtol=0, atol=2e-8)


# Derivatives ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(("name", "c"), ALL_CASES)
@pytest.mark.parametrize(
    ("d", "p"),
    [
        (0.2, 0.3),
        (0.65, 0.3),
        (0.8, 0.3),
        (0.45, 0.45),
        (1.4, 0.5),
        (0.05, 1.0),
        (1.0, 1.0),
        (0.5, 1.2),
        (1.2, 1.2),
        (2.1, 1.2),
        (9.2, 10.0),
        (10.8, 10.0),
        (1.0, 0.01),
    ],
)
def test_derivatives(name, c, d, p):
    found = hidden_fraction_derivatives(d, p, name, c)
    claimed = np.concatenate([[found.by_separation, found.by_ratio], found.by_coefficients])
    near = min(abs(d - abs(1 - p)), 1 + p - d)
    check_derivatives(
        lambda x: hidden_fraction(x[0], x[1], name, x[2:]),
        claimed,
        [d, p, *c],
        step=min(4e-4, near / 60),
        tolerance=4e-9,
    )


@EACH_LAW
@pytest.mark.parametrize("p", [1e-4, 0.3, 0.5, 1.0, 1.2, 1e2])
def test_derivatives_are_finite_at_the_contacts_and_zero_outside(name, p):
    c = PUBLISHED[name][0]
    found = hidden_fraction_derivatives(hard_separations(p, (1e-15, 1e-9)), p, name, c)
    for values in (found.by_separation, found.by_ratio, found.by_coefficients):
        assert np.all(np.isfinite(values))
    assert np.all(found.by_separation <= 1e-12)
    assert np.all(found.by_ratio >= -1e-12)
    outside = hidden_fraction_derivatives([1 + p, 2 + p], p, name, c)
    assert not np.any(outside.by_separation)
    assert not np.any(outside.by_ratio)
    assert not np.any(outside.by_coefficients)


# Properties ----------------------------------------------------------------------------------------

ratios = st.one_of(st.sampled_from(RATIOS), st.floats(-4, 2).map(lambda x: 10.0**x))
places = st.one_of(st.floats(0, 1), st.floats(-17, 0).map(lambda x: 10.0**x))
cases = st.sampled_from(ALL_CASES)


@settings(max_examples=300, deadline=None)
@given(case=cases, p=ratios, place=places, contact=st.integers(0, 3), step=places)
def test_range_and_monotony(case, p, place, contact, step):
    name, c = case
    start, length = [(0.0, 1 + p), (abs(1 - p), p), (1 + p, -p), (p, -p)][contact]
    d = abs(start + place * length)
    here, further = hidden_fraction([d, d + step], p, name, c)
    larger = hidden_fraction(d, p * (1 + step), name, c)
    assert 0 <= here <= 1
    assert further <= here + 1e-10
    assert larger >= here - 1e-10
    assert np.isfinite([further, larger]).all()


@settings(max_examples=100, deadline=None)
@given(case=cases, p=ratios, beyond=st.floats(0, 10))
def test_limits(case, p, beyond):
    name, c = case
    assert hidden_fraction(1 + p + beyond, p, name, c) == 0
    if p >= 1:
        assert hidden_fraction(max(0.0, p - 1 - beyond), p, name, c) == 1


@settings(max_examples=50, deadline=None)
@given(p=ratios, place=places)
def test_the_laws_contain_each_other(p, place):
    d = place * (1 + p)
    u = 0.7
    expected = hidden_fraction(d, p, "linear", [u])
    for name, c in [
        ("quadratic", (u, 0.0)),
        ("square-root", (u, 0.0)),
        ("logarithmic", (u, 0.0)),
        ("power-2", (u, 1.0)),
        ("four-parameter", (0.0, u, 0.0, 0.0)),
    ]:
        assert hidden_fraction(d, p, name, c) == pytest.approx(expected, abs=1e-10)
    root = hidden_fraction(d, p, "square-root", [0.0, u])
    assert hidden_fraction(d, p, "power-2", [u, 0.5]) == pytest.approx(root, abs=1e-10)


# The front -----------------------------------------------------------------------------------------


def test_shapes_follow_the_separation():
    found = hidden_fraction_derivatives(np.full((2, 3), 0.5), 0.2, "quadratic", (0.4, 0.2))
    assert found.value.shape == found.by_separation.shape == found.by_ratio.shape == (2, 3)
    assert found.by_coefficients.shape == (2, 3, 2)
    assert hidden_fraction(0.5, 0.2, "linear", [0.4]).shape == ()
    with pytest.raises(ValueError, match="read-only"):
        found.value[0, 0] = 1.0


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (([0.1, -0.1], 0.5, "linear", [0.5]), "separation must not be negative or NaN; found -0.1"),
        ((np.nan, 0.5, "linear", [0.5]), "separation must not be negative or NaN"),
        ((0.1, 0.0, "linear", [0.5]), "ratio must be a positive number; found 0.0"),
        ((0.1, 0.5, "cubic", [0.5]), "law must be one of linear"),
        ((0.1, 0.5, "quadratic", [0.5]), "coefficients of the quadratic law are u1, u2; found"),
        ((0.1, 0.5, "linear", [3.0]), "coefficients must leave the disc some light"),
    ],
)
def test_wrong_arguments_are_quoted(arguments, message):
    with pytest.raises(ValueError, match=message):
        hidden_fraction(*arguments)
