"""Limits of chance against scipy."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import special

from shadowscale.fit.chances import chi2_limit, gamma_tail, gaussian_limit


@pytest.mark.parametrize("chance", [0.9, 0.317, 0.05, 1e-3, 1e-8, 1e-30, 1e-200])
def test_gaussian_limit(chance):
    # computed with scipy
    assert gaussian_limit(chance) == pytest.approx(-special.ndtri(chance / 2), rel=1e-12)


@pytest.mark.parametrize("chance", [0.4, 0.05, 0.01, 1e-6])
@pytest.mark.parametrize("freedom", [0.5, 1, 1.5, 2, 3, 7, 20, 97.5, 1000, 30_000])
def test_chi2_limit(freedom, chance):
    # computed with scipy
    assert chi2_limit(freedom, chance) == pytest.approx(special.chdtri(freedom, chance), rel=1e-10)


@pytest.mark.parametrize("shape", [0.25, 0.5, 1.0, 4.0, 60.0, 2e4])
def test_gamma_tail_on_both_sides_of_the_mean(shape):
    x = shape * np.array([0.3, 0.9, 1.0, 1.02, 1.5, 3.0])

    found = [gamma_tail(shape, each) for each in x]

    # computed with scipy
    np.testing.assert_allclose(found, special.gammaincc(shape, x), rtol=1e-9, atol=1e-14)
