"""Compiled kernels of the eclipsed light: one point at a time, no checks, GIL released.

A sphere of radius 1 lies behind a dark disc of radius `p` at separation `d`. Every law is a sum of
basis functions g(mu), and for each of them three numbers are needed:

    H  = (1/pi) * integral of g over the hidden area,      Hd = dH/dd,      Hp = dH/dp.

With Green's theorem all three are integrals along the dark disc's edge inside the sphere's disc
(phi is the angle at the dark disc's centre, 0 towards the sphere's centre, phi0 its end):

    r^2 = (d-p)^2 + 4dp sin^2(phi/2)     mu^2 = 1 - r^2     w = p(p-d) + 2dp sin^2(phi/2)
    g = mu^a:   H  = 2/((a+2) pi) [area + integral_0^phi0 w mu^2 (1 - mu^a)/r^2 dphi]
    any g:      Hp = (2p/pi) integral_0^phi0 g dphi     Hd = -(2p/pi) integral_0^phi0 g cos(phi) dphi

mu^0, mu^1 and mu^2 have closed forms (Mandel & Agol 2002, ApJ 580, L171; the stable form of mu^1 with
Bulirsch's general elliptic integral is that of Agol, Luger & Foreman-Mackey 2020, AJ 159, 123). Other
powers are summed over nodes chosen so that neither the limb nor an inner contact is felt, see `_ladder`.

k^2 = (1-(d-p)^2)/(4dp) is below 1 where the edge of the dark disc leaves the sphere's disc (partial),
above 1 where it lies inside (annular).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import compiled, fused, summed
from shadowscale.light.laws import LINEAR, LOGARITHMIC, POWER_2, QUADRATIC, SQUARE_ROOT

Floats = NDArray[np.float64]

Arc = tuple[int, int, float, float, float, float, float, float]

_STEPS = 11  # rungs of the ladder; each serves singularities four times nearer than the one before
# Nodes that integrate every power from 0.02 to 4 and both derivatives to 1e-10; multiples of four.
_NODES = (16, 24, 28, 32, 36, 40, 44, 48, 52, 56, 60)
# For `_power`: a number whose lowest bit is one, and the bits of it, of 1 and of the root of a half.
SHIFT, SHIFT_BITS = 6755399441055744.0, np.int64(0x4338000000000000)
ROOT_HALF, ROOT_HALF_BITS = 0.7071067811865475, np.int64(0x3FE6A09E667F3BCC)
ONE_BITS = np.int64(0x3FF0000000000000)
LN_2 = 0.6931471805599453
_NO_GAP = 1e-24  # kc^2 at inner contact, where the elliptic integrals alone are infinite


def _ladder() -> tuple[NDArray[np.int64], Floats, Floats]:
    """Nodes for integrals over s in [0, pi/2], s = 0 at the limb or at the thinnest part of a ring.

    There the integrands have branch points at tan(s/2) = +-i sigma, sigma -> 0 at inner contact, and
    behave as mu^a at s = 0. With tan(s/2) = sigma sinh(v), v = V x^2 and x in [0, 1] they become
    smooth on a scale of 1 whatever sigma and a; sigma only has to be right within a factor four, so
    the nodes are made once. Rows: sin^2 s and the weight.
    """
    starts, squares, weights = [0], [], []
    for step in range(_STEPS):
        sigma = 0.5 * 4.0**-step
        x, weight = np.polynomial.legendre.leggauss(_NODES[step])
        x = (x + 1) / 2
        top = np.arcsinh(1 / sigma)
        v = top * x * x
        tangent = sigma * np.sinh(v)
        slope = sigma * np.cosh(v) * top * x * weight
        squares.append((2 * tangent / (1 + tangent**2)) ** 2)
        weights.append(2 * slope / (1 + tangent**2))
        starts.append(starts[-1] + len(x))
    return np.array(starts), np.concatenate(squares), np.concatenate(weights)


_START, _SIN2, _WEIGHT = _ladder()


@compiled
def contact_distances(d: float, p: float) -> tuple[float, float, float]:
    """1+p-d, d+p-1 and 1+d-p, each without cancellation near its zero."""
    outer = 1.0 + (p - d) if p > 1.0 else (1.0 - d) + p
    inner = (d - 1.0) + p if d > p else (p - 1.0) + d
    cover = 1.0 - p + d if p < 2.0 else d - p + 1.0
    return outer, inner, cover


@compiled
def _segment(angle: float) -> float:
    """angle - sin(angle) cos(angle), the area of a circle's segment; a series for small angles."""
    if angle > 0.4:
        return angle - math.sin(angle) * math.cos(angle)
    x2 = 4.0 * angle * angle
    series = 1.0 - x2 / 110.0 * (1.0 - x2 / 156.0 * (1.0 - x2 / 210.0))
    series = 1.0 - x2 / 20.0 * (1.0 - x2 / 42.0 * (1.0 - x2 / 72.0 * series))
    return 2.0 / 3.0 * angle**3 * series


@compiled
def _arc_moments(angle: float) -> tuple[float, float]:
    """Integrals of sin^2(phi/2) and sin^4(phi/2) from 0 to angle; series for small angles."""
    if angle > 0.4:
        sine = math.sin(angle)
        first = (angle - sine) / 2.0
        return first, (3.0 * angle - 4.0 * sine + sine * math.cos(angle)) / 8.0
    x2 = angle * angle
    series = 1.0 - x2 / 72.0 * (1.0 - x2 / 110.0 * (1.0 - x2 / 156.0))
    first = angle * x2 / 12.0 * (1.0 - x2 / 20.0 * (1.0 - x2 / 42.0 * series))
    # sin^4(x/2) = sum over n >= 2 of (-1)^n (4^n - 4)/(8 (2n)!) x^(2n)
    series = 17.0 / 5322240.0 - x2 * (31.0 / 377395200.0 - x2 / 638668800.0)
    series = 1.0 / 80.0 - x2 * (1.0 / 672.0 - x2 * (1.0 / 11520.0 - x2 * series))
    second = angle * x2 * x2 * series
    return first, second


@compiled
def _elliptic(kc: float, p: float, a: float, b: float) -> tuple[float, float, float]:
    """Bulirsch's cel(kc, p, a, b), and B = cel(kc, 1, 1, 0), D = cel(kc, 1, 0, 1), in one descent.

    Bulirsch 1969, Numerische Mathematik 13, 305. E = B + kc^2 D, K = B + D. p > 0, kc > 0.
    """
    root = math.sqrt(p)
    b = b / root
    p = root
    unit, a1, b1, a2, b2 = 1.0, 1.0, 0.0, 0.0, 1.0
    e, em, qc = kc, 1.0, kc
    for _ in range(60):
        f = a
        a += b / p
        g = e / p
        b = 2.0 * (b + f * g)
        p += g
        g = e / unit
        f = a1
        a1 += b1 / unit
        b1 = 2.0 * (b1 + f * g)
        f = a2
        a2 += b2 / unit
        b2 = 2.0 * (b2 + f * g)
        unit += g
        g = em
        em += qc
        if abs(g - qc) <= g * 1e-8:
            break
        qc = 2.0 * math.sqrt(e)
        e = qc * em
    half = 0.5 * math.pi / em
    return (
        half * (b + a * em) / (em + p),
        half * (b1 + a1 * em) / (em + unit),
        half * (b2 + a2 * em) / (em + unit),
    )


@compiled
def covered(
    d: float, p: float, outer: float, inner: float, cover: float
) -> tuple[float, float, float]:
    """Hidden area; half of its arc on the dark disc's edge seen from that disc's centre, and the sine."""
    if inner <= 0.0:
        return math.pi * p * p, math.pi, 0.0
    # Half-angle forms, so that p = 100 does not cancel; kappa1 is seen from the centre of the star.
    total, four = 1.0 + d + p, 4.0 * d * p
    k = math.sqrt(outer * cover / four)
    kc = math.sqrt(max(inner * total / four, _NO_GAP))
    kappa0 = 2.0 * math.atan2(k, kc)
    kappa1 = 2.0 * math.atan2(math.sqrt(inner * outer), math.sqrt(cover * total))
    return _segment(kappa1) + p * p * _segment(kappa0), kappa0, 2.0 * k * kc


@compiled
def closed_forms(
    d: float, p: float, outer: float, inner: float, cover: float
) -> tuple[float, float, float, float, float, float, float, float, float]:
    """(H, Hd, Hp) of mu^0, of mu^1 and of mu^2, where the discs overlap in part or as a ring."""
    total = 1.0 + d + p
    four = 4.0 * d * p
    top2 = outer * cover  # the largest mu^2 on the edge, 1-(d-p)^2
    top = math.sqrt(top2)
    step = 1.0 if p > d else (0.5 if p == d else 0.0)
    area, kappa0, sine0 = covered(d, p, outer, inner, cover)
    if inner > 0.0:
        k = math.sqrt(top2 / four)
        kc2 = max(inner * total / four, _NO_GAP)
        kc = math.sqrt(kc2)
        third = (d - p) * (d - p) * kc2
        weight = 3.0 * kc2 * (d - p) * (d + p)
        pi3, b, d3 = _elliptic(kc, max(third, 1e-200), 0.0, weight)
        e = b + kc2 * d3
        eclipsed = (
            top2
            * (pi3 + (6.0 * p * p + 2.0 * d * p - 3.0) * b - four * e)
            / (9.0 * math.pi * math.sqrt(d * p))
        )
        edge1 = 2.0 * k * top * b
        edge1_cos = 2.0 * k * top * (b + 2.0 * kc2 * d3) / 3.0
        first, second = _arc_moments(kappa0)
    else:
        kc2 = max(-inner * total / top2, _NO_GAP)
        kc = math.sqrt(kc2)
        thin2 = kc2 * top2  # the smallest mu^2 on the edge, 1-(d+p)^2
        ratio = (d - p) / (d + p)
        third = ratio * ratio * kc2
        shift = 3.0 * ratio / top2
        pi3, b, d3 = _elliptic(kc, max(third, 1e-200), 1.0 + shift, third + shift)
        e = b + kc2 * d3
        eclipsed = 2.0 * top * (thin2 * pi3 - (4.0 - 7.0 * p * p - d * d) * e) / (9.0 * math.pi)
        edge1 = 2.0 * top * e
        edge1_cos = 2.0 * top * (b - kc2 * d3) / 3.0
        first, second = 0.5 * math.pi, 0.375 * math.pi
    rate = 2.0 * p / math.pi
    lever = p * (p - d)
    across = (
        lever * top2 * kappa0
        + (0.5 * four * top2 - lever * four) * first
        - 0.5 * four * four * second
    )
    edge2 = top2 * kappa0 - four * first
    edge2_cos = top2 * (kappa0 - 2.0 * first) - four * (first - 2.0 * second)
    return (
        area / math.pi,
        -rate * sine0,
        rate * kappa0,
        eclipsed + 2.0 / 3.0 * step,
        -rate * edge1_cos,
        rate * edge1,
        (area + across) / (2.0 * math.pi),
        -rate * edge2_cos,
        rate * edge2,
    )


@compiled
def _rung(partial: bool, top2: float, kc2: float) -> int:
    """The step of the ladder for this geometry."""
    if partial:  # branch point at tan(s/2) = i kc/(1+k)
        sigma = math.sqrt(kc2) / (1.0 + math.sqrt(max(0.0, 1.0 - kc2)))
    else:
        ratio = kc2 / top2
        sigma = math.sqrt(ratio) / (1.0 + math.sqrt(max(0.0, 1.0 - ratio)))
    step = 0
    bound = 0.5
    while sigma < bound and step < _STEPS - 1:
        step += 1
        bound *= 0.25
    return step


@compiled
def _arc(d: float, p: float, outer: float, inner: float, cover: float) -> Arc:
    """The arc of the dark disc's edge for the loops over its nodes: first and last node, and how to get

    mu^2 = low + rise sin^2 s,  sin^2(phi/2) = reach cos^2 s,
    dphi = pace weight sqrt(sin^2 s/(flat + steep sin^2 s)).
    """
    four = 4.0 * d * p
    top2 = outer * cover
    if inner > 0.0:
        k2, kc2 = top2 / four, inner * (1.0 + d + p) / four
        rung = _rung(True, top2, kc2)
        low, rise, reach, pace, flat, steep = 0.0, top2, k2, 2.0 * math.sqrt(k2), kc2, k2
    else:
        thin2 = -inner * (1.0 + d + p)
        rung = _rung(False, top2, thin2)
        low, rise, reach, pace, flat, steep = thin2, four, 1.0, 2.0, 0.0, 1.0
    return _START[rung], _START[rung + 1], low, rise, reach, pace, flat, steep


@fused
def _power(mu2: float, r2: float, half: float) -> tuple[float, float]:
    """ln(mu^2) and (mu^2)^half - 1 without a branch, so that several are had at once; r2 = 1 - mu^2.

    Both keep their figures where r2 is small. mu^2 = 2^e m with m near 1, ln m = 2 artanh t; the
    power as 2^n (1 + r + r^2/2 ...). Series to 1e-14. Adding SHIFT to a small number leaves it rounded
    in the lowest bits.
    """
    bits = np.float64(mu2).view(np.int64)
    e = np.int64(bits - ROOT_HALF_BITS) >> np.int64(52)
    m = np.int64(bits - (e << np.int64(52))).view(np.float64)
    whole = np.int64(e + SHIFT_BITS).view(np.float64) - SHIFT
    top = -r2 if mu2 > ROOT_HALF else m - 1.0
    t = top / (2.0 + top)
    z = t * t
    series = 1.0 / 13.0 + z * (1.0 / 15.0 + z * (1.0 / 17.0))
    series = 1.0 / 7.0 + z * (1.0 / 9.0 + z * (1.0 / 11.0 + z * series))
    series = z * (1.0 / 3.0 + z * (1.0 / 5.0 + z * series))
    log2 = 2.0 * t + 2.0 * t * series + whole * LN_2
    y = max(half * log2, -700.0)
    shifted = y * (1.0 / LN_2) + SHIFT
    r = y - (shifted - SHIFT) * LN_2
    series = 1.0 / 362880.0 + r * (1.0 / 3628800.0 + r * (1.0 / 39916800.0))
    series = 1.0 / 720.0 + r * (1.0 / 5040.0 + r * (1.0 / 40320.0 + r * series))
    series = 0.5 + r * (1.0 / 6.0 + r * (1.0 / 24.0 + r * (1.0 / 120.0 + r * series)))
    n = np.float64(shifted).view(np.int64)
    scale = np.int64((n << np.int64(52)) + ONE_BITS).view(np.float64)
    return log2, scale * (r + r * r * series) + (scale - 1.0)


@summed
def arc_power(
    d: float, p: float, outer: float, inner: float, cover: float, power: float, area: float
) -> tuple[float, float, float, float, float, float]:
    """(H, Hd, Hp) of mu^power and of mu^power ln(mu); area is pi times H of mu^0."""
    first, last, low, rise, reach, pace, flat, steep = _arc(d, p, outer, inner, cover)
    four, gap2, lever = 4.0 * d * p, (d - p) * (d - p), p * (p - d)
    half = 0.5 * power
    h = h_log = edge = edge_cos = edge_log = edge_cos_log = 0.0
    for i in range(first, last):
        sin2 = _SIN2[i]
        s = reach * (1.0 - sin2)
        mu2 = max(low + rise * sin2, 1e-300)
        r2 = max(gap2 + four * s, 1e-300)
        dphi = pace * _WEIGHT[i] * math.sqrt(sin2 / (flat + steep * sin2))
        log2, less = _power(mu2, r2, half)
        g = 1.0 + less
        g_log = log2 * g
        across = (lever + 0.5 * four * s) * mu2 * dphi / r2
        cosine = dphi - 2.0 * s * dphi
        h -= across * less
        h_log -= across * g_log
        edge += g * dphi
        edge_cos += g * cosine
        edge_log += g_log * dphi
        edge_cos_log += g_log * cosine
    rate = 2.0 * p / math.pi
    mean = 2.0 / (power + 2.0)
    value = mean * (area + h) / math.pi
    return (
        value,
        -rate * edge_cos,
        rate * edge,
        0.5 * mean * h_log / math.pi - value / (power + 2.0),
        -0.5 * rate * edge_cos_log,
        0.5 * rate * edge_log,
    )


@summed
def arc_roots(
    d: float, p: float, outer: float, inner: float, cover: float, area: float
) -> tuple[float, float, float, float, float, float]:
    """(H, Hd, Hp) of mu^(1/2) and of mu^(3/2); area is pi times H of mu^0."""
    first, last, low, rise, reach, pace, flat, steep = _arc(d, p, outer, inner, cover)
    four, lever = 4.0 * d * p, p * (p - d)
    h1 = h3 = edge1 = edge1_cos = edge3 = edge3_cos = 0.0
    for i in range(first, last):
        sin2 = _SIN2[i]
        s = reach * (1.0 - sin2)
        mu2 = low + rise * sin2
        dphi = pace * _WEIGHT[i] * math.sqrt(sin2 / (flat + steep * sin2))
        mu = math.sqrt(mu2)
        g1 = math.sqrt(mu)
        g3 = mu * g1
        # (1 - sqrt(mu))/r^2 = 1/((1+mu)(1+sqrt(mu))), and (1 - mu^(3/2))/r^2 likewise
        across = (lever + 0.5 * four * s) * mu2 * dphi / ((1.0 + mu) * (1.0 + g1))
        cosine = dphi - 2.0 * s * dphi
        h1 += across
        h3 += across * (1.0 + g1 + mu)
        edge1 += g1 * dphi
        edge1_cos += g1 * cosine
        edge3 += g3 * dphi
        edge3_cos += g3 * cosine
    rate = 2.0 * p / math.pi
    return (
        0.8 * (area + h1) / math.pi,
        -rate * edge1_cos,
        rate * edge1,
        4.0 / 7.0 * (area + h3) / math.pi,
        -rate * edge3_cos,
        rate * edge3,
    )


@compiled
def mean_intensity_point(law: int, c: Floats, out: Floats) -> None:
    """out[0] = mean intensity of the disc over that of its centre, out[1+j] = its derivative to c[j]."""
    if law == LINEAR:
        out[0] = 1.0 - c[0] / 3.0
        out[1] = -1.0 / 3.0
    elif law == QUADRATIC:
        out[0] = 1.0 - c[0] / 3.0 - c[1] / 6.0
        out[1] = -1.0 / 3.0
        out[2] = -1.0 / 6.0
    elif law == SQUARE_ROOT:
        out[0] = 1.0 - c[0] / 3.0 - c[1] / 5.0
        out[1] = -1.0 / 3.0
        out[2] = -0.2
    elif law == LOGARITHMIC:
        out[0] = 1.0 - c[0] / 3.0 + 2.0 * c[1] / 9.0
        out[1] = -1.0 / 3.0
        out[2] = 2.0 / 9.0
    elif law == POWER_2:
        lost = c[1] / (c[1] + 2.0)
        out[0] = 1.0 - c[0] * lost
        out[1] = -lost
        out[2] = -2.0 * c[0] / (c[1] + 2.0) ** 2
    else:
        out[0] = 1.0 - c[0] / 5.0 - c[1] / 3.0 - 3.0 * c[2] / 7.0 - c[3] / 2.0
        out[1] = -0.2
        out[2] = -1.0 / 3.0
        out[3] = -3.0 / 7.0
        out[4] = -0.5


@compiled
def eclipse_point(d: float, p: float, law: int, c: Floats, out: Floats) -> None:
    """Hidden fraction of the light and its derivatives, at one separation.

    d >= 0 and p > 0 in radii of the star behind, law a code of this module, c its coefficients.
    Writes out[0] = beta, out[1] = dbeta/dd, out[2] = dbeta/dp, out[3+j] = dbeta/dc[j].
    """
    count = c.shape[0]
    for j in range(3 + count):
        out[j] = 0.0
    outer, inner, cover = contact_distances(d, p)
    if outer <= 0.0 or d >= 1.0 + p:
        return
    if p >= 1.0 and (cover <= 0.0 or d <= p - 1.0):
        out[0] = 1.0
        return
    if law == POWER_2:
        area, kappa0, sine0 = covered(d, p, outer, inner, cover)
        q, qd, qp, g, _, _ = arc_power(d, p, outer, inner, cover, c[1], area)
        h0, rate = area / math.pi, 2.0 * p / math.pi
        share = c[1] / (c[1] + 2.0)
        mean = 1.0 - c[0] * share
        beta = (h0 - c[0] * (h0 - q)) / mean
        out[0] = min(1.0, max(0.0, beta))
        out[1] = ((c[0] - 1.0) * rate * sine0 + c[0] * qd) / mean
        out[2] = ((1.0 - c[0]) * rate * kappa0 + c[0] * qp) / mean
        out[3] = (beta * share - (h0 - q)) / mean
        out[4] = c[0] * (g + 2.0 * beta / (c[1] + 2.0) ** 2) / mean
        return
    h0, hd0, hp0, h1, hd1, hp1, h2, hd2, hp2 = closed_forms(d, p, outer, inner, cover)
    if law == LINEAR:
        u = c[0]
        mean = 1.0 - u / 3.0
        beta = (h0 - u * (h0 - h1)) / mean
        out[1] = (hd0 - u * (hd0 - hd1)) / mean
        out[2] = (hp0 - u * (hp0 - hp1)) / mean
        out[3] = (beta / 3.0 - (h0 - h1)) / mean
    elif law == QUADRATIC:
        mean = 1.0 - c[0] / 3.0 - c[1] / 6.0
        lost = h0 - 2.0 * h1 + h2
        beta = (h0 - c[0] * (h0 - h1) - c[1] * lost) / mean
        out[1] = (hd0 - c[0] * (hd0 - hd1) - c[1] * (hd0 - 2.0 * hd1 + hd2)) / mean
        out[2] = (hp0 - c[0] * (hp0 - hp1) - c[1] * (hp0 - 2.0 * hp1 + hp2)) / mean
        out[3] = (beta / 3.0 - (h0 - h1)) / mean
        out[4] = (beta / 6.0 - lost) / mean
    elif law == LOGARITHMIC:
        _, _, _, g, gd, gp = arc_power(d, p, outer, inner, cover, 1.0, math.pi * h0)
        mean = 1.0 - c[0] / 3.0 + 2.0 * c[1] / 9.0
        beta = (h0 - c[0] * (h0 - h1) - c[1] * g) / mean
        out[1] = (hd0 - c[0] * (hd0 - hd1) - c[1] * gd) / mean
        out[2] = (hp0 - c[0] * (hp0 - hp1) - c[1] * gp) / mean
        out[3] = (beta / 3.0 - (h0 - h1)) / mean
        out[4] = (-2.0 * beta / 9.0 - g) / mean
    else:
        r1, rd1, rp1, r3, rd3, rp3 = arc_roots(d, p, outer, inner, cover, math.pi * h0)
        if law == SQUARE_ROOT:
            mean = 1.0 - c[0] / 3.0 - c[1] / 5.0
            beta = (h0 - c[0] * (h0 - h1) - c[1] * (h0 - r1)) / mean
            out[1] = (hd0 - c[0] * (hd0 - hd1) - c[1] * (hd0 - rd1)) / mean
            out[2] = (hp0 - c[0] * (hp0 - hp1) - c[1] * (hp0 - rp1)) / mean
            out[3] = (beta / 3.0 - (h0 - h1)) / mean
            out[4] = (beta / 5.0 - (h0 - r1)) / mean
        else:
            mean = 1.0 - c[0] / 5.0 - c[1] / 3.0 - 3.0 * c[2] / 7.0 - c[3] / 2.0
            bright = 1.0 - c[0] - c[1] - c[2] - c[3]
            beta = (bright * h0 + c[0] * r1 + c[1] * h1 + c[2] * r3 + c[3] * h2) / mean
            out[1] = (bright * hd0 + c[0] * rd1 + c[1] * hd1 + c[2] * rd3 + c[3] * hd2) / mean
            out[2] = (bright * hp0 + c[0] * rp1 + c[1] * hp1 + c[2] * rp3 + c[3] * hp2) / mean
            out[3] = (0.2 * beta - (h0 - r1)) / mean
            out[4] = (beta / 3.0 - (h0 - h1)) / mean
            out[5] = (3.0 / 7.0 * beta - (h0 - r3)) / mean
            out[6] = (0.5 * beta - (h0 - h2)) / mean
    out[0] = min(1.0, max(0.0, beta))


@compiled
def eclipse_points(d: Floats, p: float, law: int, c: Floats, out: Floats) -> None:
    """eclipse_point for every separation of d (n,), into the rows of out (n, 3+m)."""
    for i in range(d.shape[0]):
        eclipse_point(d[i], p, law, c, out[i])
