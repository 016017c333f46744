"""Roche lobe and the shape of close stars."""

from __future__ import annotations

import numpy as np
import pytest

from shadowscale.geometry.roche import fill_out, lobe_radius, oblateness

# q, exact volume radius of the lobe by direct integration, error of Eggleton's formula [%].
LOBES = [
    (0.001, 0.0482, 0.3),
    (0.01, 0.1012, 0.8),
    (0.1, 0.20540, 0.67),
    (0.2, 0.25064, 0.44),
    (0.3, 0.2803, 0.3),
    (0.5, 0.32065, 0.04),
    (0.7, 0.3489, -0.1),
    (1.0, 0.37986, -0.25),
    (1.5, 0.4160, -0.4),
    (2.0, 0.44198, -0.45),
    (5.0, 0.52333, -0.49),
    (10.0, 0.58031, -0.37),
    (100.0, 0.7182, 0.3),
    (1000.0, 0.7817, 0.5),
]

# q, r, (point - pole)/r of a synchronous star: exact Roche surfaces by direct integration.
SHAPES = [
    (1.0, 0.05, 0.0003),
    (1.0, 0.10, 0.0026),
    (1.0, 0.15, 0.0091),
    (1.0, 0.20, 0.0224),
    (1.0, 0.25, 0.0465),
    (0.5, 0.15, 0.0166),
    (0.5, 0.20, 0.0418),
    (2.0, 0.20, 0.0131),
    (2.0, 0.25, 0.0266),
]


@pytest.mark.parametrize(("q", "exact", "error"), LOBES)
def test_lobe_radius(q: float, exact: float, error: float) -> None:
    # Eggleton 1983, ApJ 268, 368: better than 1 %.
    assert lobe_radius(q) == pytest.approx(exact * (1 + error / 100), rel=7e-4)
    assert lobe_radius(q) == pytest.approx(exact, rel=0.01)


def test_mean_density_of_a_lobe_filling_star() -> None:
    # Eggleton 1983, eq. 3: P sqrt(rho) = 0.1375 (q/(1+q))^(1/2) r_L^(-3/2), days and g/cm3; from the third
    # law rho = 3 pi q/(1+q)/(G P^2 r^3).
    q = 0.7
    density = 3 * np.pi * q / (1 + q) / (6.6743e-11 * 86400**2 * lobe_radius(q) ** 3) / 1000
    assert np.sqrt(density) == pytest.approx(
        0.1375 * np.sqrt(q / (1 + q)) * lobe_radius(q) ** -1.5, rel=3e-4
    )


@pytest.mark.parametrize(("q", "r", "exact"), SHAPES)
def test_oblateness(q: float, r: float, exact: float) -> None:
    # Leading order is low, by more the larger the star.
    found = float(oblateness(r, q))
    assert found < exact + 6e-5
    assert found == pytest.approx(exact, rel=0.05 + 25 * r**3 / q**0.5, abs=6e-5)


# Published systems (sources in test_absolute): leading order of the primary, computed.
@pytest.mark.parametrize(
    ("q", "r", "shape"),
    [
        (3.908 / 2.536, 0.25721, 0.031),
        (0.610 / 0.599, 0.22397, 0.028),
        (2.389 / 2.327, 0.15681, 0.0094),
        (2.263 / 1.325, 0.14449, 0.0050),
        (2.5444 / 2.3581, 0.10009, 0.0024),
    ],
)
def test_oblateness_of_known_pairs(q: float, r: float, shape: float) -> None:
    assert oblateness(r, q) == pytest.approx(shape, rel=0.03)


def test_fill_out_is_largest_at_periastron() -> None:
    assert fill_out(lobe_radius(1.0), 1.0) == pytest.approx(1.0)
    assert fill_out(0.1, 1.0, eccentricity=0.5) == pytest.approx(2 * fill_out(0.1, 1.0))
    assert oblateness(0.1, 1.0, eccentricity=0.2) == pytest.approx(
        (0.1 / 0.8) ** 3 * (1.5 + 1.2), rel=1e-12
    )


def test_takes_arrays() -> None:
    assert lobe_radius([0.5, 1.0, 2.0]).shape == (3,)
    assert np.all(np.diff(lobe_radius(np.geomspace(1e-3, 1e3, 50))) > 0)


def test_refuses() -> None:
    with pytest.raises(ValueError, match="mass_ratio: expected positive numbers"):
        lobe_radius([1.0, 0.0])
    with pytest.raises(ValueError, match="radius: expected positive numbers"):
        fill_out(-0.1, 1.0)
    with pytest.raises(ValueError, match="eccentricity: expected 0 <= e < 1"):
        oblateness(0.1, 1.0, eccentricity=1.0)
