"""Derivatives against differences."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def check_derivatives(
    function: Callable[[Floats], Floats],
    jacobian: Callable[[Floats], Floats],
    x: Floats,
    *,
    step: float | Floats = 1e-4,
    tolerance: float = 1e-7,
) -> None:
    """Compare a Jacobian (m, n) with differences of a function (n,) -> (m,), error of order step^4."""
    x = np.asarray(x, dtype=float)
    steps = np.broadcast_to(step, x.shape)
    expected = np.column_stack(
        [_slope(function, x, h * unit) / h for h, unit in zip(steps, np.eye(x.size))]
    )
    found = np.atleast_2d(jacobian(x))
    wrong = np.abs(found - expected) / (1 + np.abs(expected))
    assert wrong.max() <= tolerance, f"at {x}:\nfound\n{found}\nexpected\n{expected}"


def _slope(function: Callable[[Floats], Floats], x: Floats, move: Floats) -> Floats:
    near = np.atleast_1d(function(x + move)) - np.atleast_1d(function(x - move))
    far = np.atleast_1d(function(x + 2 * move)) - np.atleast_1d(function(x - 2 * move))
    return (8 * near - far) / 12
