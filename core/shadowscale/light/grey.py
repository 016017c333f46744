"""Limb darkening of a grey atmosphere, the start where no coefficients are given.

The temperature runs with optical depth as T^4 = (3/4) Teff^4 [tau + q(tau)], the source function is
Planck's at one wavelength, and the formal solution gives the emergent intensity

    I(mu) = integral_0^infinity B(T(tau)) exp(-tau/mu) dtau/mu.

Real atmospheres are not grey: against the measured Sun the mean intensity is right to a few per cent
in visible light. Good for a start and for a weak prior, not for a result.
"""

from __future__ import annotations

from functools import lru_cache
from math import sqrt

import numpy as np
from numpy.typing import ArrayLike, NDArray

from shadowscale.constants import H_PLANCK, K_BOLTZMANN, C
from shadowscale.light.laws import POWER_2, Law, law_named

Floats = NDArray[np.float64]

TEMPERATURE_LAWS = ("hopf", "eddington")
HOPF_LIMIT = 0.7104460895987591  # q(infinity), Chandrasekhar 1960, Radiative Transfer, section 24

# Gauss-Legendre pieces of the depth integral, in units of tau/mu, and of the fit over the disc.
_DEPTHS = (0.0, 1e-3, 1e-2, 0.1, 0.5, 1.5, 4.0, 9.0, 18.0, 40.0)
_PIECE_NODES = 10
_DISC_NODES = 40


def grey_coefficients(
    teff: float, wavelength_nm: float | None, law: str, *, temperature_law: str = "hopf"
) -> tuple[float, ...]:
    """Coefficients of a law for a grey atmosphere.

    Parameters
    ----------
    teff : float [K]
        Effective temperature; without effect when `wavelength_nm` is None.
    wavelength_nm : float or None [nm]
        Wavelength of the band's middle; None for the light of all wavelengths.
    law : str
        A name from `shadowscale.light.laws.LAWS`.
    temperature_law : str
        `hopf` (exact grey atmosphere) or `eddington` (q = 2/3).

    Returns
    -------
    tuple of float
        They give the disc exactly the flux of the atmosphere and, that kept, the least squares of the
        intensities over the disc (weight mu dmu, equal areas). Where that leaves the law's
        `sampling_bounds`, as for cool stars in blue light, the nearest values inside them.

    Raises
    ------
    ValueError
        If a number is not positive or a name not known.

    References
    ----------
    Chandrasekhar 1960, Radiative Transfer, chapter III. Flux-conserving fits: Heyrovsky 2007, ApJ 656, 483.
    """
    found = law_named(law)
    _check(teff, wavelength_nm, temperature_law)
    coefficients = _fitted(float(teff), wavelength_nm, found.name, temperature_law)
    lower, upper = np.transpose(found.sampling_bounds)
    sampling = found.to_sampling(coefficients)
    if np.all((sampling >= lower) & (sampling <= upper)):
        return coefficients
    inside = found.from_sampling(np.clip(sampling, lower, upper))
    return tuple(float(c) for c in inside)


def grey_intensity(
    mu: ArrayLike, teff: float, wavelength_nm: float | None, *, temperature_law: str = "hopf"
) -> Floats:
    """I(mu)/I(1) of a grey atmosphere, mu in [0, 1]; arguments as of `grey_coefficients`."""
    _check(teff, wavelength_nm, temperature_law)
    heat = _heat(np.asarray(mu, dtype=np.float64).ravel(), temperature_law)
    return _emergent(heat, teff, wavelength_nm).reshape(np.shape(mu))


def _heat(mu: Floats, temperature_law: str) -> Floats:
    """(n+1, depths) of T^4/Teff^4 along the lines of sight at mu (n,) and at the centre."""
    t, _ = _pieces(_DEPTHS, _PIECE_NODES)
    tau = np.multiply.outer(np.append(mu, 1.0), t)
    q = hopf_function(tau) if temperature_law == "hopf" else np.full(tau.shape, 2.0 / 3.0)
    return np.asarray(0.75 * (tau + q))


def _emergent(heat: Floats, teff: float, wavelength_nm: float | None) -> Floats:
    """(n,) intensity over that of the centre, from what `_heat` gives."""
    t, weight = _pieces(_DEPTHS, _PIECE_NODES)
    emergent = _source(heat, teff, wavelength_nm) @ (weight * np.exp(-t))
    return np.asarray(emergent[:-1] / emergent[-1])


def hopf_function(tau: ArrayLike) -> Floats:
    """Hopf's q(tau) of the exact grey atmosphere, to 1e-9.

    q = q(inf) - 1/(2 sqrt 3) integral_0^1 exp(-tau/x) / (H(x) Z(x)) dx with
    Z = (1 - x artanh x)^2 + (pi x/2)^2 (Mark 1947, Phys. Rev. 72, 558, from memory).
    """
    x, weight = _hopf_nodes()
    depth = np.asarray(tau, dtype=np.float64)
    total = np.zeros(depth.shape)
    for xi, wi in zip(x, weight, strict=True):
        total += wi * np.exp(-depth / xi)
    return np.asarray(HOPF_LIMIT - total / (2.0 * sqrt(3.0)))


def h_function(mu: ArrayLike) -> Floats:
    """Chandrasekhar's H(mu) for conservative isotropic scattering.

    ln[H sqrt(1+mu)] = (1/pi) integral_0^(pi/2) theta arctan(mu tan theta)/(1 - theta cot theta) dtheta
    (Stibbs & Weir 1959, MNRAS 119, 512, from memory).
    """
    theta, weight = _pieces((0.0, 0.5, 1.0, 1.3, 1.45, 1.53, 1.56, 1.57, np.pi / 2), 16)
    cosines = np.asarray(mu, dtype=np.float64)
    angles = np.arctan(np.multiply.outer(cosines, np.tan(theta)))
    total = angles @ (weight * theta / (1.0 - theta / np.tan(theta)))
    return np.asarray(np.exp(total / np.pi) / np.sqrt(1.0 + cosines))


def _check(teff: float, wavelength_nm: float | None, temperature_law: str) -> None:
    if not (np.isfinite(teff) and teff > 0):
        raise ValueError(f"teff must be a positive number of kelvins; found {teff}")
    if wavelength_nm is not None and not (np.isfinite(wavelength_nm) and wavelength_nm > 0):
        raise ValueError(f"wavelength_nm must be a positive number; found {wavelength_nm}")
    if temperature_law not in TEMPERATURE_LAWS:
        allowed = ", ".join(TEMPERATURE_LAWS)
        raise ValueError(f"temperature_law must be one of {allowed}; found {temperature_law!r}")


def _source(heat: Floats, teff: float, wavelength_nm: float | None) -> Floats:
    """Source function where T^4 = heat Teff^4, in any unit."""
    if wavelength_nm is None:
        return heat
    coldest = H_PLANCK * C / (wavelength_nm * 1e-9 * K_BOLTZMANN * teff)
    x = coldest / heat**0.25
    least = x.min()  # a common factor, so that cold stars in far ultraviolet light do not underflow
    return np.asarray(np.exp(least - x) / -np.expm1(-x))


def _pieces(edges: tuple[float, ...], nodes: int) -> tuple[Floats, Floats]:
    """Gauss-Legendre nodes and weights over joined intervals."""
    x, w = np.polynomial.legendre.leggauss(nodes)
    starts, widths = np.array(edges[:-1]), np.diff(edges)
    grid = starts[:, None] + widths[:, None] * (x + 1) / 2
    return grid.ravel(), (widths[:, None] * w / 2).ravel()


@lru_cache(maxsize=1)
def _hopf_nodes() -> tuple[Floats, Floats]:
    edges = (0.0, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 0.1, 0.4, 0.7, 0.9, 0.99, 0.999, 0.9999, 1.0)
    x, weight = _pieces(edges, 10)
    z = (1.0 - x * np.arctanh(x)) ** 2 + (np.pi * x / 2.0) ** 2
    return x, weight / (h_function(x) * z)


@lru_cache(maxsize=2)
def _disc(temperature_law: str) -> tuple[Floats, Floats, Floats]:
    """Nodes over the disc with their weights 2 mu dmu, and the heat below them: the same for every star."""
    mu, weight = _pieces((0.0, 0.05, 1.0), _DISC_NODES // 2)
    return mu, 2.0 * mu * weight, _heat(mu, temperature_law)


@lru_cache(maxsize=256)
def _fitted(
    teff: float, wavelength_nm: float | None, name: str, temperature_law: str
) -> tuple[float, ...]:
    law = law_named(name)
    mu, weight, heat = _disc(temperature_law)
    intensity = _emergent(heat, teff, wavelength_nm)
    mean = float(weight @ intensity / weight.sum())
    if law.code == POWER_2:
        return _fitted_power_2(law, mu, weight, intensity=intensity, mean=mean)
    count = len(law.coefficients)
    losses = np.stack([1.0 - law.intensity(mu, row) for row in np.eye(count)], axis=1)
    mean_losses = -law.mean_intensity_gradient(np.zeros(count))
    # Least squares with the flux kept: the multiplier's row and column border the normal equations.
    bordered = np.zeros((count + 1, count + 1))
    bordered[:count, :count] = losses.T @ (weight[:, None] * losses)
    bordered[count, :count] = bordered[:count, count] = mean_losses
    right = np.append(losses.T @ (weight * (1.0 - intensity)), 1.0 - mean)
    return tuple(float(c) for c in np.linalg.solve(bordered, right)[:count])


def _fitted_power_2(
    law: Law, mu: Floats, weight: Floats, *, intensity: Floats, mean: float
) -> tuple[float, ...]:
    """The exponent of least squares; the other coefficient follows from the flux."""

    def coefficients(alpha: Floats) -> Floats:
        return np.stack([(1.0 - mean) * (alpha + 2.0) / alpha, alpha])

    def misfits(log_alpha: Floats) -> Floats:
        rows = coefficients(np.exp(log_alpha)[:, None])
        return np.asarray((law.intensity(mu, rows) - intensity) ** 2 @ weight)

    # One smooth minimum in one variable: narrowing the grid around its best point is enough, and
    # spares the import of an optimiser at every start.
    low, high = np.log(0.02), np.log(8.0)
    for _ in range(8):
        grid = np.linspace(low, high, 25)
        best = int(np.argmin(misfits(grid)))
        low, high = grid[max(best - 1, 0)], grid[min(best + 1, 24)]
    c, alpha = coefficients(np.exp(0.5 * (low + high)))
    return float(c), float(alpha)
