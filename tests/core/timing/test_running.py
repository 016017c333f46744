"""The running median."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.ndimage import median_filter

from shadowscale.timing.running import running_median


@pytest.mark.parametrize("size", [1, 2, 5, 9, 12, 30])
def test_running_median_is_that_of_scipy(size):
    values = np.random.default_rng(size).standard_normal(25)

    np.testing.assert_array_equal(
        running_median(values, size), median_filter(values, size, mode="nearest")
    )


def test_nothing_has_no_median():
    assert running_median(np.empty(0), 5).size == 0


def test_a_window_holds_something():
    with pytest.raises(ValueError, match="size: expected a positive number, found 0"):
        running_median(np.ones(3), 0)
