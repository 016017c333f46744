"""Small effects of two near stars, first order in each: shapes over the orbit, predicted amplitudes.

    prox = lam1 A_ell1 ell + lam2 A_ell2 ell + A_ref1 refl1 + A_ref2 refl2
           + lam1 A_beam1 beam1 + lam2 A_beam2 beam2

with L = nu + w (pi/2 where star 1 is behind) and the distance rho in units of a:

*Ellipsoidal.* The tide is a second Legendre function of the angle between the companion and the line
of sight, whose cosine is sin L sin i, and falls as rho^-3. Its disc-integrated light is proportional to
sin^2 i cos 2L + 2/3 - sin^2 i. With the amplitude of a circular orbit taken out, and the constant part
of a circular orbit left to the level of the light curve,

    ell = (cos 2L + m)/rho^3 - m,     m = 2/(3 sin^2 i) - 1.

In a circular orbit that is cos 2L = -cos 2 phi: bright at both quadratures, the same for both stars.

*Reflection.* A Lambert sphere lit from a point: Phi(a) = [sin a + (pi - a) cos a]/pi, times rho^-2. Star 1
shows its lit side when it is behind, near primary eclipse: cos a1 = sin L sin i, cos a2 = -cos a1.

*Beaming.* dF/F = -B v/c with v receding: beam1 = -w, beam2 = +w, w = cos L + e cos omega.
"""

from __future__ import annotations

from math import acos, expm1, pi, radians, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import compiled
from shadowscale.constants import C_KM_S, H_PLANCK, K_BOLTZMANN, C
from shadowscale.orbit._kernels import COS_L, COS_L_BY, RHO, RHO_BY, SIN_L, SIN_L_BY

Floats = NDArray[np.float64]

ELLIPSOIDAL, REFLECTION1, REFLECTION2, BEAMING1, BEAMING2 = range(5)
SHAPES_SIZE = 5
SHAPES_FULL_SIZE = 30  # the shapes, then five derivatives of each
COS2I_PLACE = 3  # among cycles, ecosw, esinw, cos2i, light_time

RADIATIVE_EXPONENT, CONVECTIVE_EXPONENT = 0.25, 0.08
RADIATIVE_FROM, CONVECTIVE_TO = 7500.0, 6500.0  # [K]


@compiled
def lambert_phase(cos_angle: float) -> tuple[float, float]:
    """Lambert's phase law and its derivative, both to the cosine of the phase angle."""
    bounded = min(1.0, max(-1.0, cos_angle))
    unlit = pi - acos(bounded)
    return (sqrt(1.0 - bounded * bounded) + unlit * bounded) / pi, unlit / pi


@compiled
def proximity_shapes(
    rho: float, s: float, c: float, sin2i: float, ecosw: float, out: Floats
) -> None:
    """The five shapes at distance rho, s = sin(nu + w), c = cos(nu + w); SHAPES_SIZE places."""
    inverse = 1.0 / rho
    square = inverse * inverse
    constant = 2.0 / (3.0 * sin2i) - 1.0
    lit = s * sqrt(sin2i)
    out[ELLIPSOIDAL] = (c * c - s * s + constant) * square * inverse - constant
    out[REFLECTION1] = lambert_phase(lit)[0] * square
    out[REFLECTION2] = lambert_phase(-lit)[0] * square
    out[BEAMING1] = -(c + ecosw)
    out[BEAMING2] = c + ecosw


@compiled
def proximity_full(sky: Floats, sin2i: float, ecosw: float, out: Floats) -> None:
    """The shapes and their derivatives from what `sky_full` gives; SHAPES_FULL_SIZE places.

    out[:5] are the shapes, out[5 + 5 n + j] the derivative of shape n to cycles, ecosw, esinw, cos2i,
    light_time for j = 0 ... 4.
    """
    rho, s, c = sky[RHO], sky[SIN_L], sky[COS_L]
    proximity_shapes(rho, s, c, sin2i, ecosw, out)
    inverse = 1.0 / rho
    square = inverse * inverse
    cube = square * inverse
    constant = 2.0 / (3.0 * sin2i) - 1.0
    bent = -2.0 / (3.0 * sin2i * sin2i)  # d constant / d sin2i
    sin_i = sqrt(sin2i)
    slope1, slope2 = lambert_phase(s * sin_i)[1], lambert_phase(-s * sin_i)[1]
    for j in range(5):
        d_rho, d_s, d_c = sky[RHO_BY + j], sky[SIN_L_BY + j], sky[COS_L_BY + j]
        lit = sin_i * d_s
        ell = 2.0 * (c * d_c - s * d_s) * cube
        ell -= 3.0 * (out[ELLIPSOIDAL] + constant) * inverse * d_rho
        if j == COS2I_PLACE:  # d sin2i = -d cos2i
            lit -= 0.5 * s / sin_i
            ell -= bent * (cube - 1.0)
        w = d_c + (1.0 if j == 1 else 0.0)
        out[5 + j] = ell
        out[10 + j] = slope1 * lit * square - 2.0 * out[REFLECTION1] * inverse * d_rho
        out[15 + j] = -slope2 * lit * square - 2.0 * out[REFLECTION2] * inverse * d_rho
        out[20 + j] = -w
        out[25 + j] = w


def ellipsoidal_amplitude(
    radius: float,
    companion_mass: float,
    *,
    inclination: float,
    linear_limb: float = 0.5,
    gravity_darkening: float = 0.32,
) -> float:
    """Predicted semi-amplitude of the ellipsoidal variation, fraction of the star's own light.

    Parameters
    ----------
    radius : float [a]
        Of the star that is deformed.
    companion_mass : float
        Mass of the other star over that of the deformed one.
    inclination : float [deg]
    linear_limb, gravity_darkening : float
        u of the linear law; exponent of the local intensity with gravity.

    Raises
    ------
    ValueError
        If the radius or mass is not positive.

    Notes
    -----
    alpha q r^3 sin^2 i with alpha = 0.15 (15 + u)(1 + g)/(3 - u); the circular orbit's amplitude, which
    the shape of an eccentric orbit multiplies.

    References
    ----------
    Morris & Naftilan 1993, ApJ 419, 344.
    """
    _check_positive("radius", radius)
    _check_positive("companion_mass", companion_mass)
    u, g = linear_limb, gravity_darkening
    alpha = 0.15 * (15 + u) * (1 + g) / (3 - u)
    return alpha * companion_mass * radius**3 * sin(radians(inclination)) ** 2


def reflection_amplitude(radius: float, companion_light: float, *, albedo: float = 1.0) -> float:
    """Predicted light returned at full phase, fraction of both stars' light.

    Parameters
    ----------
    radius : float [a]
        Of the star that is lit.
    companion_light : float
        The other star's share of the light of both, lam.
    albedo : float
        Share of the fallen light that is sent out again in the band; 1 sends out all.

    Notes
    -----
    (2/3) r^2 for a Lambert sphere (Russell 1916, ApJ 43, 173, *from memory*).
    """
    _check_positive("radius", radius)
    if not 0 <= companion_light <= 1:
        raise ValueError(f"companion_light: expected 0...1, found {companion_light}")
    return 2 / 3 * albedo * radius**2 * companion_light


def beaming_factor(teff: float, wavelength: float) -> float:
    """B of dF/F = -B v/c for photons counted from a black body: x e^x/(e^x - 1), x = hc/(lambda k T).

    Parameters
    ----------
    teff : float [K]
    wavelength : float [nm]

    References
    ----------
    Loeb & Gaudi 2003, ApJL 588, L117.
    """
    _check_positive("teff", teff)
    _check_positive("wavelength", wavelength)
    x = H_PLANCK * C / (wavelength * 1e-9 * K_BOLTZMANN * teff)
    return x / -expm1(-x)


def beaming_amplitude(K: float, *, teff: float, wavelength: float) -> float:
    """Predicted amplitude of Doppler beaming, fraction of the star's own light; K [km/s], [K], [nm]."""
    return beaming_factor(teff, wavelength) * K / C_KM_S


def gravity_darkening(teff: float, wavelength: float) -> float:
    """Exponent of the intensity with local gravity at one wavelength.

    Parameters
    ----------
    teff : float [K]
    wavelength : float [nm]

    Notes
    -----
    T ~ g^beta with beta = 0.25 in radiative envelopes (von Zeipel 1924, MNRAS 84, 665), 0.08 in
    convective ones (Lucy 1967, Zs. f. Ap. 65, 89), blended between 6500 and 7500 K; black bodies turn
    it into intensity: d ln I/d ln T = x e^x/(e^x - 1).
    """
    radiative = min(1.0, max(0.0, (teff - CONVECTIVE_TO) / (RADIATIVE_FROM - CONVECTIVE_TO)))
    beta = CONVECTIVE_EXPONENT + radiative * (RADIATIVE_EXPONENT - CONVECTIVE_EXPONENT)
    return beta * beaming_factor(teff, wavelength)


def _check_positive(name: str, value: float) -> None:
    if not value > 0:
        raise ValueError(f"{name}: expected a positive number, found {value}")
