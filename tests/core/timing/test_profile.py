"""The shape of an eclipse: its table against exact identities, its kernel against differences."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.timing._kernels import eclipse_rows
from shadowscale.timing.profile import TRAPEZOID, discs, hidden_fraction_table, library

U = 0.5
MEAN_SQUARE = (0.5 - U * (0.5 - 4 / 15)) / (1 - U / 3)  # <rho^2> of the linear law


@pytest.mark.parametrize("ratio", [0.1, 0.3, 0.5, 1.0, 1.2, 3.0])
def test_table_keeps_the_convolution_identities(ratio):
    # int alpha 2d dd = k^2 and int alpha 2d^3 dd = k^2 (<rho^2> + k^2/2) for every law: computed by
    # convolution of two discs, checked there with quadrature to 1e-11.
    table = hidden_fraction_table(ratio)
    d = np.linspace(0, 1 + ratio, table.size)
    first = np.trapezoid(table * 2 * d, d)
    third = np.trapezoid(table * 2 * d**3, d)
    np.testing.assert_allclose(first, ratio**2, rtol=2e-5)
    np.testing.assert_allclose(third, ratio**2 * (MEAN_SQUARE + ratio**2 / 2), rtol=2e-5)


def test_table_has_the_exact_central_value():
    # Linear law at d = 0: [k^2 (1-u) + (2/3) u (1-(1-k^2)^1.5)]/(1-u/3); Mandel & Agol 2002, from memory.
    k = 0.6
    exact = (k**2 * (1 - U) + 2 / 3 * U * (1 - (1 - k**2) ** 1.5)) / (1 - U / 3)
    np.testing.assert_allclose(hidden_fraction_table(k)[0], exact, rtol=3e-4)


def rows(profile, values, phase, exposure=0.0):
    nodes, weights = np.polynomial.legendre.leggauss(5)
    nodes, weights = nodes * exposure / 2, weights / 2
    model, jacobian = np.empty(phase.size), np.empty((phase.size, values.size))
    band = (np.arange(phase.size) % 2).astype(np.int64)
    eclipse_rows(phase, band, 2, 0.01, nodes, weights, profile.table, values, model, jacobian)
    return model, jacobian


@pytest.mark.parametrize("exposure", [0.0, 0.01])
@pytest.mark.parametrize(
    ("profile", "ingress", "egress"),
    [
        (TRAPEZOID, 0.3, 0.6),
        (discs(0.4), 0.05, 0.3),
        (discs(2.5), 0.1, 0.02),
        (discs(1.0), 0.2, 0.4),
    ],
)
def test_derivatives_agree_with_differences(profile, ingress, egress, exposure):
    values = np.array([0.003, 0.08, ingress, egress, 0.3, 0.2, 1.0, 1.1, 0.4])
    phase = np.linspace(-0.07, 0.07, 301)
    jacobian = rows(profile, values, phase, exposure)[1]
    for column in range(values.size):
        step = np.zeros(values.size)
        step[column] = 1e-6
        difference = (
            rows(profile, values + step, phase, exposure)[0]
            - rows(profile, values - step, phase, exposure)[0]
        ) / 2e-6
        scale = np.abs(jacobian[:, column]).max()
        # Tables are read linearly and kinks are crossed, so a few points differ; the mass agrees.
        assert np.median(np.abs(difference - jacobian[:, column])) < 2e-3 * scale
        assert np.mean(np.abs(difference - jacobian[:, column])) < 2e-2 * scale


def test_light_is_one_outside_and_lowest_in_the_middle():
    values = np.array([0.0, 0.08, 0.1, 0.1, 0.3, 0.3, 1.0, 1.0, 0.0])
    model, _ = rows(discs(0.5), values, np.array([-0.2, -0.041, 0.0, 0.041, 0.3, 0.5]))
    np.testing.assert_array_equal(model[[0, 1, 3, 4, 5]], 1.0)
    np.testing.assert_allclose(model[2], 0.7, rtol=1e-12)


@pytest.mark.parametrize("profile", [TRAPEZOID, discs(0.3), discs(4.0)])
def test_ingress_and_its_parameter_are_inverse(profile):
    for ingress in (0.5, 0.7, 0.9):
        parameter = profile.parameter_of(ingress)
        np.testing.assert_allclose(profile.ingress(parameter)[0], ingress, rtol=1e-9)


def test_library_knows_which_shapes_have_a_flat_part():
    shapes = library()
    for row in (0, 5, 15, 20):
        inner = shapes.shapes[row][shapes.flat[row]]
        assert inner.size == 5
        assert np.all(shapes.half[row] > 0)
        assert np.all(shapes.half[row] < 1)
