"""Least-squares fit of one eclipse's shape: middle, duration, ingress and egress, depth and level a band.

    flux = level_b (1 + slope (phase - centre)) (1 - depth_b f(x)),
    x = sin(2 pi (phase - middle)) / sin(pi duration)

The sines are the path of a circular orbit on the sky; a straight path would give durations that are
0.4 % too short where r1 + r2 = 0.15.

Levenberg-Marquardt steps with the analytic Jacobian; the parameters stand in the order
middle, duration, shape of ingress, shape of egress, depth of each band, level of each band, slope.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints
from shadowscale.timing.profile import Profile

MIDDLE, DURATION, INGRESS, EGRESS, DEPTH = 0, 1, 2, 3, 4
_STEPS = 60
_SMALL_STEP = 3e-3  # chi2, against 1 for one sigma
_NODES, _NODE_WEIGHTS = np.polynomial.legendre.leggauss(5)


@dataclass(frozen=True, eq=False)
class ShapeData:
    """Points around one eclipse: phase [cycles], flux, sigma, band numbers 0...bands-1."""

    phase: Floats
    flux: Floats
    sigma: Floats
    band: Ints
    bands: int
    centre: float
    exposure: float = 0.0  # [cycles]


@dataclass(frozen=True, eq=False)
class ShapeFit:
    """A fitted shape; `values` and `covariance` in the order of the module's text."""

    profile: Profile
    values: Floats
    covariance: Floats
    chi2: float
    freedom: int
    centre: float

    @property
    def depths(self) -> Floats:
        """(bands,) light lost at the middle."""
        return self.values[DEPTH : DEPTH + self.bands]

    @property
    def levels(self) -> Floats:
        """(bands,) flux outside eclipse at the centre."""
        return self.values[DEPTH + self.bands : DEPTH + 2 * self.bands]

    @property
    def bands(self) -> int:
        """Number of bands."""
        return (self.values.size - DEPTH - 1) // 2

    @property
    def scale(self) -> float:
        """Reduced chi2."""
        return self.chi2 / max(self.freedom, 1)


def fit_shape(
    data: ShapeData, profile: Profile, start: Floats, *, symmetric: bool = False, lower: float = 0.0
) -> ShapeFit:
    """Fit one profile from a start.

    Parameters
    ----------
    data : ShapeData
    profile : Profile
    start : (5 + 2 bands,) float64
        In the order of the module's text.
    symmetric : bool
        Tie the shapes of ingress and egress.
    lower : float
        Least value of the shape parameter, where above the profile's own.

    Returns
    -------
    ShapeFit
        The covariance is that of the errors as given, not scaled.
    """
    low, high = _limits(data, profile, start, lower)
    values = np.clip(start, low, high)
    tie = _tie(values.size, symmetric)
    values = _tied(values, symmetric)
    residual, jacobian = _residuals(data, profile, values)
    chi2, damping = float(residual @ residual), 1e-3
    for _ in range(_STEPS):
        reduced = jacobian @ tie
        normal, gradient = reduced.T @ reduced, reduced.T @ residual
        # What stands at a limit and is pushed outward takes no part in this step.
        outward = tie.T @ (
            ((values <= low) & (jacobian.T @ residual < 0))
            | ((values >= high) & (jacobian.T @ residual > 0))
        )
        held = outward > 0
        normal[held, :] = 0.0
        normal[:, held] = 0.0
        gradient[held] = 0.0
        step = tie @ _damped(normal, gradient, damping)
        trial = _tied(np.clip(values + step, low, high), symmetric)
        trial_residual, trial_jacobian = _residuals(data, profile, trial)
        trial_chi2 = float(trial_residual @ trial_residual)
        if trial_chi2 <= chi2:
            small = chi2 - trial_chi2 < _SMALL_STEP
            values, residual, jacobian, chi2 = trial, trial_residual, trial_jacobian, trial_chi2
            if small and damping <= 1:
                break
            damping = max(damping / 10, 1e-9)
        elif damping > 1e5:
            break
        else:
            damping *= 10
    covariance = tie @ _inverse(_normal(jacobian @ tie)) @ tie.T
    freedom = data.phase.size - tie.shape[1]
    return ShapeFit(profile, values, covariance, chi2, freedom, data.centre)


def predicted(data: ShapeData, fit: ShapeFit) -> Floats:
    """The fitted flux at the points of `data`."""
    return _model(data, fit.profile, fit.values)[0]


def with_profile(fit: ShapeFit, profile: Profile) -> Floats:
    """The values of a fit as a start for another profile with ingress and egress as alike as may be."""
    values = fit.values.copy()
    for number in (INGRESS, EGRESS):
        values[number] = profile.parameter_of(fit.profile.ingress(float(values[number]))[0])
    return values


def merged(data: ShapeData, width: float) -> ShapeData:
    """The same points averaged in bins of phase [cycles], each band for itself."""
    first = np.floor((data.phase - data.phase.min()) / width).astype(np.int64)
    cell = first * data.bands + data.band
    _, number = np.unique(cell, return_inverse=True)
    weight = 1 / data.sigma**2
    total = np.bincount(number, weight)
    mean = [np.bincount(number, weight * v) / total for v in (data.phase, data.flux)]
    band = np.zeros(total.size, np.int64)
    band[number] = data.band
    return replace(data, phase=mean[0], flux=mean[1], sigma=1 / np.sqrt(total), band=band)


def _limits(
    data: ShapeData, profile: Profile, start: Floats, lower: float
) -> tuple[Floats, Floats]:
    low, high = np.full(start.size, -np.inf), np.full(start.size, np.inf)
    reach = float(np.ptp(data.phase))
    low[MIDDLE], high[MIDDLE] = data.phase.min(), data.phase.max()
    low[DURATION], high[DURATION] = start[DURATION] / 6, max(reach, start[DURATION])
    low[INGRESS : EGRESS + 1] = max(lower, profile.lower)
    high[INGRESS : EGRESS + 1] = profile.upper
    low[DEPTH : DEPTH + data.bands], high[DEPTH : DEPTH + data.bands] = -0.5, 1.2
    return low, high


def _tie(size: int, symmetric: bool) -> Floats:
    """Matrix from free to full parameters."""
    full = np.eye(size)
    if not symmetric:
        return full
    full[EGRESS, INGRESS] = 1.0
    return np.delete(full, EGRESS, axis=1)


def _tied(values: Floats, symmetric: bool) -> Floats:
    if symmetric:
        values[EGRESS] = values[INGRESS]
    return values


def _model(data: ShapeData, profile: Profile, values: Floats) -> tuple[Floats, Floats]:
    """Flux (n,) and its Jacobian (n, m)."""
    shape, by_middle, by_duration, by_shape, right = _smeared(data, profile, values)
    bands = data.bands
    depth = values[DEPTH : DEPTH + bands][data.band]
    level = values[DEPTH + bands : DEPTH + 2 * bands][data.band]
    tilt = 1 + values[-1] * (data.phase - data.centre)
    base = level * tilt
    light = 1 - depth * shape
    jacobian = np.zeros((data.phase.size, values.size))
    dark = -base * depth
    jacobian[:, MIDDLE] = dark * by_middle
    jacobian[:, DURATION] = dark * by_duration
    jacobian[:, INGRESS] = np.where(right, 0.0, dark * by_shape)
    jacobian[:, EGRESS] = np.where(right, dark * by_shape, 0.0)
    rows = np.arange(data.phase.size)
    jacobian[rows, DEPTH + data.band] = -base * shape
    jacobian[rows, DEPTH + bands + data.band] = tilt * light
    jacobian[:, -1] = level * (data.phase - data.centre) * light
    return base * light, jacobian


def _smeared(
    data: ShapeData, profile: Profile, values: Floats
) -> tuple[Floats, Floats, Floats, Floats, NDArray[np.bool_]]:
    """Shape and its derivatives by middle, duration and shape parameter, averaged over the exposure."""
    away = data.phase - values[MIDDLE]
    right = away > 0
    if data.exposure < 0.02 * values[DURATION]:
        return (*_shape_at(profile, away, values), right)
    spread = away[:, None] + _NODES * data.exposure / 2
    parts = [part @ (_NODE_WEIGHTS / 2) for part in _shape_at(profile, spread, values)]
    return parts[0], parts[1], parts[2], parts[3], right


def _shape_at(
    profile: Profile, away: Floats, values: Floats
) -> tuple[Floats, Floats, Floats, Floats]:
    """Shape at phases from the middle, and its derivatives by middle, duration and shape parameter."""
    angle, edge = 2 * np.pi * away, np.pi * values[DURATION]
    x = np.sin(angle) / np.sin(edge)
    shape = profile.shape(x, np.where(away > 0, values[EGRESS], values[INGRESS]))
    by_middle = shape.by_x * (-2 * np.pi * np.cos(angle) / np.sin(edge))
    by_duration = shape.by_x * x * (-np.pi / np.tan(edge))
    return shape.value, by_middle, by_duration, shape.by_shape


def _residuals(data: ShapeData, profile: Profile, values: Floats) -> tuple[Floats, Floats]:
    model, jacobian = _model(data, profile, values)
    return (data.flux - model) / data.sigma, jacobian / data.sigma[:, None]


def _normal(jacobian: Floats) -> Floats:
    return np.asarray(jacobian.T @ jacobian)


def _damped(normal: Floats, gradient: Floats, damping: float) -> Floats:
    scale = np.diag(normal)
    heavier = normal + np.diag(damping * scale + 1e-12 * scale.max() + 1e-300)
    return np.linalg.solve(heavier, gradient)


def _inverse(normal: Floats) -> Floats:
    """Inverse of a normal matrix; directions without information get zero variance."""
    scale = np.sqrt(np.maximum(np.diag(normal), 1e-300))
    return np.linalg.pinv(normal / np.outer(scale, scale), rcond=1e-12, hermitian=True) / np.outer(
        scale, scale
    )
