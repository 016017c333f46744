"""The solver on problems whose answers are certified or exact."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

from shadowscale.fit.least_squares import Normal, covariance, minimise

Floats = NDArray[np.float64]
FREE = np.full(2, -np.inf), np.full(2, np.inf)


def _objective(
    residual: Callable[[Floats], Floats], jacobian: Callable[[Floats], Floats]
) -> Callable[[Floats], Normal]:
    """Of residuals (data less model) and the model's derivatives."""

    def normal(x: Floats) -> Normal:
        r, slope = residual(x), jacobian(x)
        return Normal(float(r @ r), slope.T @ r, slope.T @ slope)

    return normal


# NIST StRD nonlinear regression, Misra1a (lower difficulty; data and certified values from memory,
# the sum of squares below confirms the copy).
MISRA_X = np.array(
    [77.6, 114.9, 141.1, 190.8, 239.9, 289.0, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0]
)  # fmt: skip
MISRA_Y = np.array(
    [10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78]
)  # fmt: skip


def _misra(b: Floats) -> Floats:
    return MISRA_Y - b[0] * (1 - np.exp(-b[1] * MISRA_X))


def _misra_slope(b: Floats) -> Floats:
    decay = np.exp(-b[1] * MISRA_X)
    return np.column_stack([1 - decay, b[0] * MISRA_X * decay])


@pytest.mark.parametrize("start", [(500.0, 1e-4), (250.0, 5e-4)])
def test_misra1a(start: tuple[float, float]) -> None:
    """Certified: 238.94212918, 5.5015643181e-4; errors 2.7070075241, 7.2668688436e-6; sum 0.12455138894."""
    found = minimise(
        _objective(_misra, _misra_slope), np.array(start), bounds=FREE, tolerance=1e-18, stalled=0.0
    )
    matrix, loose = covariance(found.normal)
    sigma = np.sqrt(np.diag(matrix) * found.chi2 / (MISRA_X.size - 2))

    assert found.chi2 == pytest.approx(0.12455138894, rel=1e-9)
    np.testing.assert_allclose(found.x, [238.94212918, 5.5015643181e-4], rtol=1e-8)
    np.testing.assert_allclose(sigma, [2.7070075241, 7.2668688436e-6], rtol=1e-7)
    assert not loose.any()


def test_a_curved_valley() -> None:
    """Rosenbrock's valley (Rosenbrock 1960, The Computer Journal 3, 175): minimum at (1, 1)."""
    found = minimise(
        _objective(
            lambda x: np.array([1 - x[0], -10 * (x[1] - x[0] ** 2)]),
            lambda x: np.array([[1.0, 0.0], [-20 * x[0], 10.0]]),
        ),
        np.array([-1.2, 1.0]), bounds=FREE, tolerance=1e-16, stalled=0.0,
    )  # fmt: skip

    np.testing.assert_allclose(found.x, [1.0, 1.0], atol=1e-7)
    assert found.converged


def _linear(slope: Floats, seen: Floats) -> Callable[[Floats], Normal]:
    return _objective(lambda x: seen - slope @ x, lambda x: slope)


def test_a_bound_is_held_and_the_rest_is_best() -> None:
    """Least squares in a box, against scipy.optimize.lsq_linear."""
    from scipy.optimize import lsq_linear

    random = np.random.default_rng(0)
    slope, seen = random.standard_normal((30, 4)), random.standard_normal(30)
    lower, upper = np.array([-0.1, -1, 0.2, -1.0]), np.array([0.1, 1, 1.0, 0.05])
    found = minimise(_linear(slope, seen), np.full(4, 0.05), bounds=(lower, upper), tolerance=1e-14)
    expected = lsq_linear(slope, seen, bounds=(lower, upper)).x

    np.testing.assert_allclose(found.x, expected, atol=1e-6)
    assert np.all((found.x >= lower) & (found.x <= upper))


def test_a_direction_that_the_data_do_not_hold() -> None:
    """Two quantities that only their sum matters of: the sum is right, both are told as loose."""
    slope = np.column_stack([np.ones(10), np.ones(10), np.linspace(-1, 1, 10)])
    seen = slope @ np.array([1.0, 2.0, 3.0])
    found = minimise(_linear(slope, seen), np.zeros(3), bounds=(np.full(3, -9.0), np.full(3, 9.0)))
    _, loose = covariance(found.normal)

    assert found.x[0] + found.x[1] == pytest.approx(3.0, abs=1e-5)
    assert found.x[2] == pytest.approx(3.0, abs=1e-5)
    assert loose.tolist() == [True, True, False]


def test_a_quantity_without_influence_is_loose() -> None:
    slope = np.column_stack([np.ones(5), np.zeros(5)])
    found = minimise(_linear(slope, np.ones(5)), np.zeros(2), bounds=FREE)
    matrix, loose = covariance(found.normal)

    assert loose.tolist() == [False, True]
    assert matrix[0, 0] == pytest.approx(0.2)


def test_walls_are_walked_along() -> None:
    """Chi-squared is infinite where there is no model; the search turns back and goes on."""

    def walled(x: Floats) -> Normal:
        if x[0] > 1.5:
            return Normal(np.inf, np.zeros(2), np.zeros((2, 2)))
        r = np.array([3.0 - 2 * x[0] - x[1], 1.0 - x[1]])
        slope = np.array([[2.0, 1.0], [0.0, 1.0]])
        return Normal(float(r @ r), slope.T @ r, slope.T @ slope)

    found = minimise(walled, np.array([-40.0, 60.0]), bounds=FREE, tolerance=1e-12)

    np.testing.assert_allclose(found.x, [1.0, 1.0], atol=1e-5)


def test_too_few_steps_are_told() -> None:
    objective = _objective(_misra, _misra_slope)
    found = minimise(objective, np.array([500.0, 1e-4]), bounds=FREE, most=1)

    assert not found.converged
    assert found.iterations == 1
    assert found.chi2 < objective(np.array([500.0, 1e-4])).chi2


def test_covariance_is_the_inverse() -> None:
    """Against numpy, with scales fifteen decades apart."""
    random = np.random.default_rng(2)
    slope = random.standard_normal((40, 5)) * 10.0 ** np.array([-8, -3, 0, 3, 7])
    matrix, loose = covariance(Normal(0.0, np.zeros(5), slope.T @ slope))
    scale = np.sqrt(np.diag(slope.T @ slope))
    expected = np.linalg.inv(slope.T @ slope / np.outer(scale, scale)) / np.outer(scale, scale)

    np.testing.assert_allclose(matrix, expected, rtol=1e-9)
    assert not loose.any()
