"""The simple hidden fraction that turns depths into brightness."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.geometry.discs import hidden_light, hidden_light_slopes

# d, k, uniform disc, u = 0.6: high-precision quadrature, confirmed by batman-package to 8 digits.
HIDDEN = [
    (0.0, 0.5, 0.2500000000, 0.3002404736),
    (0.2, 0.5, 0.2500000000, 0.2958348962),
    (0.5, 0.5, 0.2500000000, 0.2688967046),
    (0.7, 0.5, 0.2055136798, 0.2072082583),
    (1.0, 0.5, 0.1116524797, 0.1020867370),
    (1.3, 0.5, 0.0300122567, 0.0231783608),
    (0.3, 1.0, 0.8097327023, 0.8444324169),
    (1.0, 1.0, 0.3910022190, 0.3975726601),
    (0.95, 0.1, 0.0079733616, 0.0059954689),
    (0.5, 1.2, 0.8437959525, 0.8719997446),
    (1.5, 1.2, 0.2462632354, 0.2363966924),
    (0.2, 1.3, 1.0000000000, 1.0000000000),
]


@pytest.mark.parametrize(("d", "k", "uniform", "linear"), HIDDEN)
def test_hidden_light(d: float, k: float, uniform: float, linear: float) -> None:
    assert hidden_light([d], [k], 0.0)[0] == pytest.approx(uniform, abs=2e-9)
    assert hidden_light([d], [k], 0.6)[0] == pytest.approx(linear, abs=2e-9)


@pytest.mark.parametrize("k", [0.05, 0.3, 1.0, 4.0])
def test_edges(k: float) -> None:
    apart = hidden_light([1 + k, 1 + k - 1e-9, 2 + k], [k] * 3)
    assert apart == pytest.approx([0, 0, 0], abs=1e-9)
    within = hidden_light([0.0, abs(1 - k)], [k] * 2)
    assert np.all(within <= 1.0)
    assert hidden_light([0.0], [max(k, 1.0)])[0] == pytest.approx(1.0, abs=1e-12)


@pytest.mark.parametrize("k", [0.3, 0.5, 1.0, 1.2])
def test_area_under_the_curve(k: float) -> None:
    # Exact for every law: the integral of alpha(d) 2 d dd is k^2 (convolution of two discs).
    x, w = np.polynomial.legendre.leggauss(400)
    d = (x + 1) / 2 * (1 + k)
    area = np.sum(w / 2 * (1 + k) * hidden_light(d, np.full(d.size, k)) * 2 * d)
    assert area == pytest.approx(k * k, rel=1e-5)


def test_slopes() -> None:
    d, k = np.array([0.4, 0.9, 1.2]), np.array([0.8, 0.5, 0.6])
    found = hidden_light_slopes(d, k)
    step = 1e-4
    by_d = (hidden_light(d + step, k) - hidden_light(d - step, k)) / (2 * step)
    by_log = (hidden_light(d, k * np.exp(step)) - hidden_light(d, k * np.exp(-step))) / (2 * step)
    assert found[:, 0] == pytest.approx(hidden_light(d, k))
    assert found[:, 1] == pytest.approx(by_d, abs=1e-5)
    assert found[:, 2] == pytest.approx(by_log, abs=1e-5)
