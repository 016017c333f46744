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
from functools import cached_property

import numpy as np

from shadowscale.data.photometry import Floats, Ints
from shadowscale.timing._kernels import eclipse_rows, least_shape, shape_grid
from shadowscale.timing.profile import Profile, library

MIDDLE, DURATION, INGRESS, EGRESS, DEPTH = 0, 1, 2, 3, 4
# Most steps; gain in chi2 that ends them; the same in parts of chi2.
STOP = np.array([60.0, 3e-3, 1e-4])
SINGULAR = 1e12  # condition of an information matrix beyond which directions are unknown
SHORT_EXPOSURE = 0.02  # of the duration: no need to average
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
    """A fitted shape; `values` and `normal`, the information matrix, in the order of the module's text."""

    profile: Profile
    values: Floats
    normal: Floats
    chi2: float
    freedom: int
    centre: float
    symmetric: bool

    @cached_property
    def covariance(self) -> Floats:
        """(m, m) of the errors as given, not scaled; most fits are never asked."""
        covariance = _inverse(self.normal)
        if self.symmetric:
            covariance[EGRESS], covariance[:, EGRESS] = covariance[INGRESS], covariance[:, INGRESS]
            covariance[EGRESS, EGRESS] = covariance[INGRESS, INGRESS]
        return covariance

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
    data: ShapeData,
    profile: Profile,
    start: Floats,
    *,
    symmetric: bool = False,
    lower: float = 0.0,
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
    """
    low, high = _limits(data, profile, start, lower)
    values, normal = start.copy(), np.empty((start.size, start.size))
    chi2 = least_shape(
        data.phase,
        data.flux,
        data.sigma,
        data.band,
        data.bands,
        data.centre,
        *_exposure_nodes(data, start[DURATION]),
        profile.table,
        low,
        high,
        symmetric,
        STOP,
        values,
        normal,
    )
    freedom = data.phase.size - values.size + int(symmetric)
    return ShapeFit(profile, values, normal, chi2, freedom, data.centre, symmetric)


def grid_chi2(data: ShapeData, rough: ShapeFit, durations: Floats, stretches: Floats) -> Floats:
    """chi2 (ratios, shapes, stretches) of the library's shapes at the middle and slope of a rough fit.

    durations : (ratios, shapes) [cycles];  stretches : (t,) factors on them
    """
    lib = library()
    chi2 = np.empty((*lib.shapes.shape, stretches.size))
    tilt = 1 + rough.values[-1] * (data.phase - data.centre)
    shape_grid(
        data.phase,
        data.flux / tilt,
        data.sigma / tilt,
        data.band,
        data.bands,
        rough.values[MIDDLE],
        durations,
        lib.shapes,
        lib.tables,
        stretches,
        chi2,
    )
    return chi2


def predicted(data: ShapeData, fit: ShapeFit) -> Floats:
    """The fitted flux at the points of `data`."""
    model = np.empty(data.phase.size)
    eclipse_rows(
        data.phase,
        data.band,
        data.bands,
        data.centre,
        *_exposure_nodes(data, fit.values[DURATION]),
        fit.profile.table,
        fit.values,
        model,
        np.empty((data.phase.size, fit.values.size)),
    )
    return model


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
    low[MIDDLE], high[MIDDLE] = data.phase.min(), data.phase.max()
    reach = high[MIDDLE] - low[MIDDLE]
    low[DURATION], high[DURATION] = start[DURATION] / 6, max(reach, start[DURATION])
    low[INGRESS : EGRESS + 1] = max(lower, profile.lower)
    high[INGRESS : EGRESS + 1] = profile.upper
    low[DEPTH : DEPTH + data.bands], high[DEPTH : DEPTH + data.bands] = -0.5, 1.2
    return low, high


def _exposure_nodes(data: ShapeData, duration: float) -> tuple[Floats, Floats]:
    """Parts of the exposure [cycles] and their weights; one where the exposure is short."""
    if data.exposure < SHORT_EXPOSURE * duration:
        return np.zeros(1), np.ones(1)
    return _NODES * data.exposure / 2, _NODE_WEIGHTS / 2


def _inverse(normal: Floats) -> Floats:
    """Inverse of a normal matrix; parameters without information get zero variance."""
    known = np.flatnonzero(normal.diagonal() > 0)
    part = normal[np.ix_(known, known)]
    scale = np.sqrt(part.diagonal())
    scaled = part / np.outer(scale, scale)
    try:
        inverse = np.linalg.inv(scaled)
        regular = bool(np.all(inverse.diagonal() > 0) and inverse.diagonal().max() < SINGULAR)
    except np.linalg.LinAlgError:
        regular = False
    if not regular:
        inverse = np.linalg.pinv(scaled, rcond=1 / SINGULAR, hermitian=True)
    covariance = np.zeros_like(normal)
    covariance[np.ix_(known, known)] = inverse / np.outer(scale, scale)
    return covariance
