"""Compiled: the relative orbit, one instant at a time. Arrays in, arrays out, no checks.

Symbols
-------
h = e sin w, k = e cos w      w of star 1's barycentric orbit
L = nu + w                    true longitude; star 1 is eclipsed at L = pi/2
F = E + w, l = M + w          eccentric and mean longitude
eta = sqrt(1 - e^2), b = 1/(1 + eta)
X = rho cos L, Y = rho sin L  place of the relative orbit in its plane, units of a

Written in h, k and the longitudes nothing is singular at e = 0 (Broucke & Cefola 1972, Celestial
Mechanics 5, 303, *from memory*; each formula is checked in the tests against the classical ones):

    l = F + h cos F - k sin F                                   Kepler's equation         (1)
    X = (1 - h^2 b) cos F + h k b sin F - k                                               (2)
    Y = (1 - k^2 b) sin F + h k b cos F - h                                               (3)
    rho = 1 - k cos F - h sin F = dl/dF                                                   (4)

On the sky, with C = cos^2 i, the separation is delta^2 = X^2 + Y^2 C, and star 2 lies
z = -Y sin i farther away than star 1.

Light time
----------
Each star is seen where its own light left it. With r = x2 - x1, x1 = -(a1/a) r, x2 = (a2/a) r,

    x2(t - z2/c) - x1(t - z1/c) = r(t) - r'(t) z (a2^2 - a1^2)/(c a^2)
                                = r(t - z (a2 - a1)/(c a)),     a = a1 + a2,

up to (v/c)^2. In cycles, with z in units of a and light_time = (a2 - a1)/(c P), the relative orbit
is evaluated at

    tau = cycles - light_time (z - z_primary),                                            (5)

where z_primary belongs to primary conjunction, so that cycles = 0 stays the *observed* conjunction.
In a circular orbit the secondary is late by P (K2 - K1)/(pi c) (Kaplan 2010, ApJL 717, L108).
"""

from __future__ import annotations

from math import atan2, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import fused

Floats = NDArray[np.float64]

TURN = 2 * pi
QUARTER_TURN, QUARTER_TURN_REST = 1.5707963267948966, 6.123233995736766e-17  # their sum is pi/2
SERIES_LIMIT = 0.4  # eccentricity up to which the short solution of Kepler's equation is exact
TINY_SEPARATION = 1e-12  # below it the direction of the separation has no meaning

# Places in `constants`.
ECC, OMEGA, COS_OMEGA, SIN_OMEGA, ETA = 0, 1, 2, 3, 4
ESINW, ECOSW, COS2I, SIN_I = 5, 6, 7, 8
MEAN_PRIMARY = 9  # mean anomaly at primary conjunction, in turns
LONGITUDE_ECOSW, LONGITUDE_ESINW = 10, 11  # derivatives of the mean longitude there
Z_PRIMARY, Z_PRIMARY_ECOSW, Z_PRIMARY_ESINW, Z_PRIMARY_COS2I = 12, 13, 14, 15
A_COS, A_SIN, A_MIX = 16, 17, 18  # 1 - h^2 b, 1 - k^2 b, h k b
A_COS_ESINW, A_COS_ECOSW = 19, 20  # their derivatives to h and k
A_SIN_ESINW, A_SIN_ECOSW = 21, 22
A_MIX_ESINW, A_MIX_ECOSW = 23, 24
CONSTANTS_SIZE = 25

# Places in the output of `sky_point`.
DELTA, Z, DELTA_CYCLES, DELTA_ECOSW, DELTA_ESINW, DELTA_COS2I, DELTA_LIGHT_TIME = range(7)
SKY_SIZE = 7
# `sky_full` adds rho, sin L, cos L, then five derivatives of each in the same order.
RHO, SIN_L, COS_L, RHO_BY, SIN_L_BY, COS_L_BY = 7, 8, 9, 10, 15, 20
SKY_FULL_SIZE = 25
VELOCITY_SIZE = 4


@fused
def _sine_cosine(x: float) -> tuple[float, float]:
    """sin x and cos x together, for x within a few turns: twice as fast as two library calls.

    Less the nearest quarter turn, Taylor's series to x^15 and x^16 is exact to rounding.
    """
    quarter = np.rint(x * (2 / pi))
    x = (x - quarter * QUARTER_TURN) - quarter * QUARTER_TURN_REST
    z = x * x
    s = 1 / 1307674368000.0
    s = 1 / 6227020800.0 - z * s
    s = 1 / 39916800.0 - z * s
    s = 1 / 362880.0 - z * s
    s = 1 / 5040.0 - z * s
    s = 1 / 120.0 - z * s
    s = 1 / 6.0 - z * s
    s = x - x * z * s
    c = 1 / 20922789888000.0
    c = 1 / 87178291200.0 - z * c
    c = 1 / 479001600.0 - z * c
    c = 1 / 3628800.0 - z * c
    c = 1 / 40320.0 - z * c
    c = 1 / 720.0 - z * c
    c = 1 / 24.0 - z * c
    c = 1.0 - z * (0.5 - z * c)
    place = int(quarter) & 3
    sine = c if place & 1 else s
    cosine = s if place & 1 else c
    return (-sine if place & 2 else sine), (-cosine if (place + 1) & 2 else cosine)


@fused
def _turned(sin_e: float, cos_e: float, step: float) -> tuple[float, float]:
    """Sine and cosine of the angle moved by a step below half a radian."""
    z = step * step
    s = 1 / 39916800.0 - z * (1 / 6227020800.0)
    s = 1 / 5040.0 - z * (1 / 362880.0 - z * s)
    s = step - step * z * (1 / 6.0 - z * (1 / 120.0 - z * s))
    c = 1 / 479001600.0 - z * (1 / 87178291200.0)
    c = 1 / 40320.0 - z * (1 / 3628800.0 - z * c)
    c = 1.0 - z * (0.5 - z * (1 / 24.0 - z * (1 / 720.0 - z * c)))
    return sin_e * c + cos_e * s, cos_e * c - sin_e * s


@fused
def _nudged(sin_e: float, cos_e: float, step: float) -> tuple[float, float]:
    """The same for a step below 1e-2."""
    z = step * step
    s = step - step * z * (1 / 6.0 - z * (1 / 120.0))
    c = 1.0 - z * (0.5 - z * (1 / 24.0 - z * (1 / 720.0)))
    return sin_e * c + cos_e * s, cos_e * c - sin_e * s


@fused
def _step(e: float, sin_e: float, cos_e: float, excess: float) -> float:
    """Correction of E where E - e sin E - M = excess: the reverted series to the fourth order."""
    inverse = 1.0 / (1.0 - e * cos_e)
    y = -excess * inverse
    a = 0.5 * e * sin_e * inverse
    b = e * cos_e * inverse / 6
    square = a * a
    return y * (1.0 - y * (a - y * ((2 * square - b) + y * (5 * a * b + a / 12 - 5 * a * square))))


@fused
def _markley(mean: float, e: float) -> tuple[float, float, float]:
    """E, sin E, cos E for every e < 1: a cubic start, one fifth-order correction.

    Markley 1995, Celestial Mechanics and Dynamical Astronomy 63, 101 (from memory).
    """
    alpha = (3 * pi * pi + 1.6 * pi * (pi - abs(mean)) / (1 + e)) / (pi * pi - 6)
    d = 3 * (1 - e) + alpha * e
    q = 2 * alpha * d * (1 - e) - mean * mean
    r = abs((3 * alpha * d * (d - 1 + e) + mean * mean) * mean)
    w = (r + sqrt(q * q * q + r * r)) ** (2 / 3)
    size = 2 * r * w / (w * w + w * q + q * q)
    start = ((size if mean >= 0 else -size) + mean) / d
    sin_e, cos_e = _sine_cosine(start)
    excess = start - e * sin_e - mean
    f1, f2, f3 = 1.0 - e * cos_e, e * sin_e, e * cos_e
    step = -excess / (f1 - 0.5 * excess * f2 / f1)
    step = -excess / (f1 + step * (f2 / 2 + step * f3 / 6))
    step = -excess / (f1 + step * (f2 / 2 + step * (f3 / 6 - step * f2 / 24)))
    sin_e, cos_e = _nudged(sin_e, cos_e, step)
    return start + step, sin_e, cos_e


@fused
def _kepler(mean: float, e: float) -> tuple[float, float, float]:
    """E, sin E, cos E for -pi <= mean <= pi."""
    if e > SERIES_LIMIT:
        return _markley(mean, e)
    sin_e, cos_e = _sine_cosine(mean)
    if e == 0.0:
        return mean, sin_e, cos_e
    # Two steps from E = M reach rounding up to this eccentricity.
    step = _step(e, sin_e, cos_e, -e * sin_e)
    sin_e, cos_e = _turned(sin_e, cos_e, step)
    last = _step(e, sin_e, cos_e, step - e * sin_e)
    sin_e, cos_e = _nudged(sin_e, cos_e, last)
    return mean + (step + last), sin_e, cos_e


@fused
def eccentric_anomaly(mean: float, ecc: float) -> float:
    """E of Kepler's equation E - e sin E = M, for any M [rad] and 0 <= e < 1."""
    turns: float = TURN * np.rint(mean / TURN)
    return _kepler(mean - turns, ecc)[0] + turns


@fused
def orbit_constants(ecosw: float, esinw: float, cos2i: float, out: Floats) -> None:
    """What does not depend on time; `out` has CONSTANTS_SIZE places, named above."""
    h, k = esinw, ecosw
    e = sqrt(h * h + k * k)
    eta = sqrt(1.0 - e * e)
    b = 1.0 / (1.0 + eta)
    # Any angle serves at e = 0: omega only carries Kepler's equation to its usual variables.
    omega = atan2(h, k)
    out[ECC], out[OMEGA], out[ETA] = e, omega, eta
    if e > 0:
        out[COS_OMEGA], out[SIN_OMEGA] = k / e, h / e
    else:
        out[COS_OMEGA], out[SIN_OMEGA] = 1.0, 0.0
        out[OMEGA] = 0.0
    out[ESINW], out[ECOSW], out[COS2I] = h, k, cos2i
    sin_i = sqrt(max(0.0, 1.0 - cos2i))
    out[SIN_I] = sin_i

    b_h, b_k = b * b * h / eta, b * b * k / eta
    out[A_COS], out[A_SIN], out[A_MIX] = 1.0 - h * h * b, 1.0 - k * k * b, h * k * b
    out[A_COS_ESINW], out[A_COS_ECOSW] = -2 * h * b - h * h * b_h, -h * h * b_k
    out[A_SIN_ESINW], out[A_SIN_ECOSW] = -k * k * b_h, -2 * k * b - k * k * b_k
    out[A_MIX_ESINW], out[A_MIX_ECOSW] = k * b + h * k * b_h, h * b + h * k * b_k

    # Primary conjunction, L = pi/2: X = 0 and Y = rho = eta^2/(1 + h); (2) and (3) inverted.
    rho = eta * eta / (1.0 + h)
    cos_f = k - h * k * b * eta / (1.0 + h)
    sin_f = h + (1.0 - h * h * b) * eta / (1.0 + h)
    x_f = -out[A_COS] * sin_f + out[A_MIX] * cos_f
    x_h = out[A_COS_ESINW] * cos_f + out[A_MIX_ESINW] * sin_f
    x_k = out[A_COS_ECOSW] * cos_f + out[A_MIX_ECOSW] * sin_f - 1.0
    out[LONGITUDE_ESINW] = cos_f - rho * x_h / x_f
    out[LONGITUDE_ECOSW] = -sin_f - rho * x_k / x_f
    longitude = atan2(sin_f, cos_f) + h * cos_f - k * sin_f
    out[MEAN_PRIMARY] = (longitude - out[OMEGA]) / TURN

    out[Z_PRIMARY] = -rho * sin_i
    out[Z_PRIMARY_ESINW] = sin_i * (2 * h / (1.0 + h) + rho / (1.0 + h))
    out[Z_PRIMARY_ECOSW] = sin_i * 2 * k / (1.0 + h)
    out[Z_PRIMARY_COS2I] = 0.5 * rho / max(sin_i, TINY_SEPARATION)


@fused
def _anomaly(cycles: float, constants: Floats) -> tuple[float, float]:
    """sin E and cos E, light time left out."""
    turns = constants[MEAN_PRIMARY] + (cycles - np.rint(cycles))
    turns -= np.rint(turns)
    _, sin_e, cos_e = _kepler(TURN * turns, constants[ECC])
    return sin_e, cos_e


@fused
def _longitude(sin_e: float, cos_e: float, constants: Floats) -> tuple[float, float]:
    """sin F and cos F from sin E and cos E."""
    c, s = constants[COS_OMEGA], constants[SIN_OMEGA]
    return sin_e * c + cos_e * s, cos_e * c - sin_e * s


@fused
def _place(sin_f: float, cos_f: float, constants: Floats) -> tuple[float, float]:
    """X and Y, equations (2) and (3)."""
    mix = constants[A_MIX]
    return (
        constants[A_COS] * cos_f + mix * sin_f - constants[ECOSW],
        constants[A_SIN] * sin_f + mix * cos_f - constants[ESINW],
    )


@fused
def sky_point_value(cycles: float, constants: Floats, light_time: float) -> tuple[float, float]:
    """Sky separation and z = (star 2 minus star 1, away from the observer), units of a."""
    sin_e, cos_e = _anomaly(cycles, constants)
    sin_f, cos_f = _longitude(sin_e, cos_e, constants)
    x, y = _place(sin_f, cos_f, constants)
    if light_time != 0.0:
        shift = light_time * (y * constants[SIN_I] + constants[Z_PRIMARY])
        step = _step(constants[ECC], sin_e, cos_e, -TURN * shift)
        sin_e, cos_e = _nudged(sin_e, cos_e, step)
        sin_f, cos_f = _longitude(sin_e, cos_e, constants)
        x, y = _place(sin_f, cos_f, constants)
    return sqrt(x * x + y * y * constants[COS2I]), -y * constants[SIN_I]


@fused
def _derivatives(
    sin_f: float, cos_f: float, constants: Floats
) -> tuple[float, float, float, float, float, float]:
    """X and Y to cycles, ecosw, esinw, at fixed tau (cycles from primary conjunction)."""
    rho = 1.0 - constants[ECOSW] * cos_f - constants[ESINW] * sin_f
    mix, mix_h, mix_k = constants[A_MIX], constants[A_MIX_ESINW], constants[A_MIX_ECOSW]
    x_f = mix * cos_f - constants[A_COS] * sin_f
    y_f = constants[A_SIN] * cos_f - mix * sin_f
    # dF = (dl + sin F dk - cos F dh)/rho by (1); l moves with the mean longitude of conjunction.
    f_k = (constants[LONGITUDE_ECOSW] + sin_f) / rho
    f_h = (constants[LONGITUDE_ESINW] - cos_f) / rho
    f_tau = TURN / rho
    return (
        x_f * f_tau,
        x_f * f_k + constants[A_COS_ECOSW] * cos_f + mix_k * sin_f - 1.0,
        x_f * f_h + constants[A_COS_ESINW] * cos_f + mix_h * sin_f,
        y_f * f_tau,
        y_f * f_k + constants[A_SIN_ECOSW] * sin_f + mix_k * cos_f,
        y_f * f_h + constants[A_SIN_ESINW] * sin_f + mix_h * cos_f - 1.0,
    )


@fused
def _seen(
    cycles: float, constants: Floats, light_time: float
) -> tuple[
    float, float, float, float, float, float, float, float, float, float, float, float, float
]:
    """The seen orbit: X, Y; X and Y to tau, ecosw, esinw; tau to cycles, ecosw, esinw, cos2i, light_time."""
    sin_e, cos_e = _anomaly(cycles, constants)
    sin_f, cos_f = _longitude(sin_e, cos_e, constants)
    x, y = _place(sin_f, cos_f, constants)
    sin_i = constants[SIN_I]
    behind = y * sin_i + constants[Z_PRIMARY]  # -(z - z_primary)
    tau_c, tau_k, tau_h, tau_i = 1.0, 0.0, 0.0, 0.0
    if light_time != 0.0:
        _, _, _, y_tau, y_k, y_h = _derivatives(sin_f, cos_f, constants)
        tau_c = 1.0 + light_time * y_tau * sin_i
        tau_k = light_time * (y_k * sin_i + constants[Z_PRIMARY_ECOSW])
        tau_h = light_time * (y_h * sin_i + constants[Z_PRIMARY_ESINW])
        tau_i = light_time * (constants[Z_PRIMARY_COS2I] - 0.5 * y / max(sin_i, TINY_SEPARATION))
        step = _step(constants[ECC], sin_e, cos_e, -TURN * light_time * behind)
        sin_e, cos_e = _nudged(sin_e, cos_e, step)
        sin_f, cos_f = _longitude(sin_e, cos_e, constants)
        x, y = _place(sin_f, cos_f, constants)
    x_tau, x_k, x_h, y_tau, y_k, y_h = _derivatives(sin_f, cos_f, constants)
    return x, y, x_tau, x_k, x_h, y_tau, y_k, y_h, tau_c, tau_k, tau_h, tau_i, behind


@fused
def sky_point(cycles: float, constants: Floats, light_time: float, out: Floats) -> None:
    """Separation, z, and the derivatives of the separation at fixed observed cycles; SKY_SIZE places."""
    x, y, x_tau, x_k, x_h, y_tau, y_k, y_h, tau_c, tau_k, tau_h, tau_i, tau_light = _seen(
        cycles, constants, light_time
    )
    cos2i = constants[COS2I]
    delta = sqrt(x * x + y * y * cos2i)
    inverse = 1.0 / max(delta, TINY_SEPARATION)
    x_part, y_part = x * inverse, y * cos2i * inverse
    delta_tau = x_part * x_tau + y_part * y_tau
    out[DELTA] = delta
    out[Z] = -y * constants[SIN_I]
    out[DELTA_CYCLES] = delta_tau * tau_c
    out[DELTA_ECOSW] = x_part * x_k + y_part * y_k + delta_tau * tau_k
    out[DELTA_ESINW] = x_part * x_h + y_part * y_h + delta_tau * tau_h
    out[DELTA_COS2I] = 0.5 * y * y * inverse + delta_tau * tau_i
    out[DELTA_LIGHT_TIME] = delta_tau * tau_light


@fused
def sky_rows(cycles: Floats, constants: Floats, light_time: float, out: Floats) -> None:
    """`sky_point` of many instants, into out (n, SKY_SIZE)."""
    for i in range(cycles.size):
        sky_point(cycles[i], constants, light_time, out[i])


@fused
def sky_full(cycles: float, constants: Floats, light_time: float, out: Floats) -> None:
    """As `sky_point`, with rho, sin(nu + w), cos(nu + w), each with five derivatives; SKY_FULL_SIZE places."""
    x, y, x_tau, x_k, x_h, y_tau, y_k, y_h, tau_c, tau_k, tau_h, tau_i, tau_light = _seen(
        cycles, constants, light_time
    )
    cos2i = constants[COS2I]
    delta = sqrt(x * x + y * y * cos2i)
    inverse = 1.0 / max(delta, TINY_SEPARATION)
    out[DELTA] = delta
    out[Z] = -y * constants[SIN_I]
    rho = sqrt(x * x + y * y)
    c, s = x / rho, y / rho
    out[RHO], out[SIN_L], out[COS_L] = rho, s, c
    x_part, y_part = x * inverse, y * cos2i * inverse
    for j in range(5):
        # tau first moves the orbit; ecosw and esinw change its shape as well.
        if j == 0:
            tau, dx, dy = tau_c, 0.0, 0.0
        elif j == 1:
            tau, dx, dy = tau_k, x_k, y_k
        elif j == 2:
            tau, dx, dy = tau_h, x_h, y_h
        elif j == 3:
            tau, dx, dy = tau_i, 0.0, 0.0
        else:
            tau, dx, dy = tau_light, 0.0, 0.0
        dx += x_tau * tau
        dy += y_tau * tau
        out[DELTA_CYCLES + j] = x_part * dx + y_part * dy
        along = c * dx + s * dy
        turn = (c * dy - s * dx) / rho
        out[RHO_BY + j] = along
        out[SIN_L_BY + j] = c * turn
        out[COS_L_BY + j] = -s * turn
    out[DELTA_COS2I] += 0.5 * y * y * inverse


@fused
def velocity_point(cycles: float, constants: Floats, out: Floats) -> None:
    """w = cos(nu + omega) + e cos omega, and w to cycles, ecosw, esinw; VELOCITY_SIZE places.

    rv1 = gamma1 + K1 w, rv2 = gamma2 - K2 w.
    """
    sin_e, cos_e = _anomaly(cycles, constants)
    sin_f, cos_f = _longitude(sin_e, cos_e, constants)
    x, y = _place(sin_f, cos_f, constants)
    x_tau, x_k, x_h, y_tau, y_k, y_h = _derivatives(sin_f, cos_f, constants)
    square = x * x + y * y
    rho = sqrt(square)
    across = -y / (rho * square)  # d cos L = -sin L dL, dL = (X dY - Y dX)/rho^2
    out[0] = x / rho + constants[ECOSW]
    out[1] = across * (x * y_tau - y * x_tau)
    out[2] = across * (x * y_k - y * x_k) + 1.0
    out[3] = across * (x * y_h - y * x_h)


@fused
def velocity_point_value(cycles: float, constants: Floats) -> float:
    """w = cos(nu + omega) + e cos omega alone."""
    sin_e, cos_e = _anomaly(cycles, constants)
    sin_f, cos_f = _longitude(sin_e, cos_e, constants)
    x, y = _place(sin_f, cos_f, constants)
    w: float = x / sqrt(x * x + y * y) + constants[ECOSW]
    return w
