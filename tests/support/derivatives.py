"""Derivatives against differences, one check for every differentiable function."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def central_difference(
    value: Callable[[Floats], ArrayLike], point: ArrayLike, j: int, *, step: float
) -> Floats:
    """Derivative of `value` to coordinate j, two central differences with Richardson's extrapolation."""
    shift = np.zeros(np.size(point))
    shift[j] = step
    centre = np.asarray(point, dtype=np.float64)
    wide = (np.asarray(value(centre + shift)) - np.asarray(value(centre - shift))) / (2 * step)
    shift /= 2
    narrow = (np.asarray(value(centre + shift)) - np.asarray(value(centre - shift))) / step
    return np.asarray((4 * narrow - wide) / 3)


def check_derivatives(
    value: Callable[[Floats], ArrayLike],
    derivatives: ArrayLike,
    point: ArrayLike,
    *,
    step: float = 2e-4,
    tolerance: float = 1e-9,
) -> None:
    """Assert that derivatives[..., j] is the derivative of value(point) to point[j].

    `tolerance` is absolute where derivatives are below 1 and relative above.
    """
    claimed = np.asarray(derivatives, dtype=np.float64)
    for j in range(np.size(point)):
        measured = central_difference(value, point, j, step=step)
        np.testing.assert_allclose(
            claimed[..., j],
            measured,
            rtol=tolerance,
            atol=tolerance,
            err_msg=f"derivative to coordinate {j} at {np.asarray(point).tolist()}",
        )
