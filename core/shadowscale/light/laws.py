"""The register of limb-darkening laws: intensity over that of the disc's centre, against mu.

Each law also has a pair (or so) of *sampling* coordinates, in which a fit moves: they are less
correlated than the coefficients and their limits are those of what is physical. Only numpy is
needed here; the compiled kernels know a law by its `code`.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from math import log, log2, sqrt
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]
Coefficients = Sequence[float] | Floats

LINEAR, QUADRATIC, SQUARE_ROOT, LOGARITHMIC, POWER_2, FOUR_PARAMETER = range(6)


@dataclass(frozen=True)
class Law:
    """A limb-darkening law.

    Attributes
    ----------
    name, formula, source : str
        Public name, I(mu)/I(1) as people write it, and where it was published.
    code : int
        What the compiled kernels call it.
    coefficients : tuple of str
        Names of the coefficients, in order.
    intensity : (mu, coefficients) -> (n,) float64
        I(mu)/I(1) for mu in [0, 1].
    mean_intensity : (coefficients) -> float
        Mean over the disc, over that of the centre.
    mean_intensity_gradient : (coefficients) -> (m,) float64
    to_sampling, from_sampling : (m numbers) -> (m,) float64
        Coefficients to sampling coordinates and back.
    sampling_jacobian : (sampling coordinates) -> (m, m) float64
        Row: coefficient, column: sampling coordinate.
    sampling_names : tuple of str
    sampling_bounds : tuple of (lower, upper)
        Wide enough for every published coefficient; intensities stay positive but near the corners.
    """

    name: str
    code: int
    coefficients: tuple[str, ...]
    formula: str
    source: str
    intensity: Callable[[ArrayLike, Coefficients], Floats]
    mean_intensity: Callable[[Coefficients], float]
    mean_intensity_gradient: Callable[[Coefficients], Floats]
    to_sampling: Callable[[Coefficients], Floats]
    from_sampling: Callable[[Coefficients], Floats]
    sampling_jacobian: Callable[[Coefficients], Floats]
    sampling_names: tuple[str, ...]
    sampling_bounds: tuple[tuple[float, float], ...]


def _linear_law(
    name: str,
    code: int,
    coefficients: tuple[str, ...],
    *,
    formula: str,
    source: str,
    losses: tuple[Callable[[Floats], Floats], ...],
    mean_losses: tuple[float, ...],
    bounds: tuple[tuple[float, float], ...],
) -> Law:
    """A law 1 - sum of coefficient times loss(mu), sampled in its coefficients."""
    gradient = -np.array(mean_losses)

    def intensity(mu: ArrayLike, c: Coefficients) -> Floats:
        mu = np.asarray(mu, dtype=np.float64)
        taken = [np.asarray(ci * loss(mu)) for ci, loss in zip(c, losses, strict=True)]
        return np.asarray(1.0 - sum(taken))

    def same(values: Coefficients) -> Floats:
        return np.array(values, dtype=np.float64)

    return Law(
        name=name,
        code=code,
        coefficients=coefficients,
        formula=formula,
        source=source,
        intensity=intensity,
        mean_intensity=lambda c: float(1.0 + gradient @ same(c)),
        mean_intensity_gradient=lambda c: gradient.copy(),
        to_sampling=same,
        from_sampling=same,
        sampling_jacobian=lambda s: np.eye(len(coefficients)),
        sampling_names=coefficients,
        sampling_bounds=bounds,
    )


def _power_loss(exponent: float) -> Callable[[Floats], Floats]:
    def loss(mu: Floats) -> Floats:
        return np.asarray(1.0 - mu**exponent)

    return loss


def _second_order_loss(mu: Floats) -> Floats:
    return np.asarray((1.0 - mu) ** 2)


def _logarithmic_loss(mu: Floats) -> Floats:
    return np.asarray(mu * np.log(np.where(mu > 0, mu, 1.0)))


# Quadratic: triangular sampling of Kipping 2013, MNRAS 435, 2152: q1 = (u1+u2)^2, q2 = u1/(2(u1+u2)).
# The unit square is where the intensity is positive and falls towards the limb; u2 < 0, as published
# for cool stars in blue light, is its part q2 > 1/2.


def _quadratic_to_sampling(c: Coefficients) -> Floats:
    total = max(c[0] + c[1], 0.0)
    return np.array([total**2, c[0] / (2.0 * total) if total > 0.0 else 0.5])


def _quadratic_from_sampling(s: Coefficients) -> Floats:
    total = sqrt(max(s[0], 0.0))
    return np.array([2.0 * total * s[1], total * (1.0 - 2.0 * s[1])])


def _quadratic_jacobian(s: Coefficients) -> Floats:
    total = sqrt(max(s[0], 1e-12))
    return np.array(
        [[s[1] / total, 2.0 * total], [(1.0 - 2.0 * s[1]) / (2.0 * total), -2.0 * total]]
    )


# Power-2: h1 = I(1/2), h2 = I(1/2) - I(0) of Maxted 2018, A&A 616, A39.


def _power_2_intensity(mu: ArrayLike, c: Coefficients) -> Floats:
    return np.asarray(1.0 - c[0] * (1.0 - np.asarray(mu, dtype=np.float64) ** c[1]))


def _power_2_mean(c: Coefficients) -> float:
    return float(1.0 - c[0] * c[1] / (c[1] + 2.0))


def _power_2_mean_gradient(c: Coefficients) -> Floats:
    return np.array([-c[1] / (c[1] + 2.0), -2.0 * c[0] / (c[1] + 2.0) ** 2])


def _power_2_to_sampling(c: Coefficients) -> Floats:
    h2 = c[0] * 2.0 ** -c[1]
    return np.array([1.0 - c[0] + h2, h2])


def _power_2_from_sampling(s: Coefficients) -> Floats:
    c = 1.0 - s[0] + s[1]
    if c * s[1] <= 0.0:  # a disc without darkening, where any exponent serves
        return np.array([c, 1.0])
    return np.array([c, log2(c / s[1])])


def _power_2_jacobian(s: Coefficients) -> Floats:
    c = 1.0 - s[0] + s[1]
    return np.array([[-1.0, 1.0], [-1.0 / (c * log(2)), (1.0 / c - 1.0 / s[1]) / log(2)]])


_QUADRATIC = _linear_law(
    "quadratic",
    QUADRATIC,
    ("u1", "u2"),
    formula="1 - u1 (1-mu) - u2 (1-mu)^2",
    source="Kopal 1950, Harvard Coll. Obs. Circ. 454",
    losses=(_power_loss(1.0), _second_order_loss),
    mean_losses=(1 / 3, 1 / 6),
    bounds=((0.0, 1.0), (0.0, 1.0)),
)


def _register(*laws: Law) -> Mapping[str, Law]:
    return MappingProxyType({law.name: law for law in laws})


LAWS: Mapping[str, Law] = _register(
    _linear_law(
        "linear",
        LINEAR,
        ("u",),
        formula="1 - u (1-mu)",
        source="Schwarzschild 1906",
        losses=(_power_loss(1.0),),
        mean_losses=(1 / 3,),
        bounds=((0.0, 1.0),),
    ),
    replace(
        _QUADRATIC,
        to_sampling=_quadratic_to_sampling,
        from_sampling=_quadratic_from_sampling,
        sampling_jacobian=_quadratic_jacobian,
        sampling_names=("q1", "q2"),
        sampling_bounds=((1e-6, 1.0), (0.0, 1.0)),
    ),
    _linear_law(
        "square-root",
        SQUARE_ROOT,
        ("c", "d"),
        formula="1 - c (1-mu) - d (1-sqrt mu)",
        source="Diaz-Cordoves & Gimenez 1992, A&A 259, 227",
        losses=(_power_loss(1.0), _power_loss(0.5)),
        mean_losses=(1 / 3, 1 / 5),
        bounds=((-0.5, 1.5), (-0.5, 1.2)),
    ),
    _linear_law(
        "logarithmic",
        LOGARITHMIC,
        ("u", "v"),
        formula="1 - u (1-mu) - v mu ln mu",
        source="Klinglesmith & Sobieski 1970, AJ 75, 175",
        losses=(_power_loss(1.0), _logarithmic_loss),
        mean_losses=(1 / 3, -2 / 9),
        bounds=((-0.2, 1.2), (-0.6, 0.8)),
    ),
    Law(
        name="power-2",
        code=POWER_2,
        coefficients=("c", "alpha"),
        formula="1 - c (1-mu^alpha)",
        source="Hestroffer 1997, A&A 327, 199",
        intensity=_power_2_intensity,
        mean_intensity=_power_2_mean,
        mean_intensity_gradient=_power_2_mean_gradient,
        to_sampling=_power_2_to_sampling,
        from_sampling=_power_2_from_sampling,
        sampling_jacobian=_power_2_jacobian,
        sampling_names=("h1", "h2"),
        sampling_bounds=((0.2, 0.999), (0.001, 0.8)),
    ),
    _linear_law(
        "four-parameter",
        FOUR_PARAMETER,
        ("c1", "c2", "c3", "c4"),
        formula="1 - sum of c_n (1-mu^(n/2)), n = 1...4",
        source="Claret 2000, A&A 363, 1081",
        losses=tuple(_power_loss(n / 2) for n in (1, 2, 3, 4)),
        mean_losses=(1 / 5, 1 / 3, 3 / 7, 1 / 2),
        bounds=((-3.0, 3.0),) * 4,
    ),
)


def law_named(name: str) -> Law:
    """The law of that name; ValueError with the names there are."""
    try:
        return LAWS[name]
    except KeyError:
        raise ValueError(f"law must be one of {', '.join(LAWS)}; found {name!r}") from None
