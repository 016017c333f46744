"""The equations of contact times and depths, with their derivatives.

Unknowns, in this order: time of conjunction against the epoch [cycles], e cos w, e sin w, cos^2 i,
r1 + r2, ln k, ln J, third light. Equations:

    outer contact   delta(t) - (r1 + r2)                  = 0
    inner contact   delta(t) - (r1 + r2) tanh|ln k|/2     = 0,    tanh|ln k|/2 = |1-k|/(1+k)
    depth           (1 - l3) lam alpha(delta(middle))     - depth = 0

Written in delta at the *measured* times there is no contact to search, so an evaluation costs a few
microseconds and no guess of the orbit is too poor to start from.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, tanh

import numpy as np
from numpy.typing import NDArray

from shadowscale.geometry.contacts import EclipseTiming
from shadowscale.geometry.discs import hidden_light_slopes
from shadowscale.orbit import _kernels

Floats = NDArray[np.float64]

SHIFT, ECOSW, ESINW, COS2I, SUM, LOG_RATIO, LOG_BRIGHTNESS, THIRD = range(8)
UNKNOWNS = 8
LIMB_DOUBT = 0.03  # of a depth: what the assumed limb darkening may be wrong by

# Contacts in terms of middle, duration, ingress, egress, depth.
CONTACTS_OF_TIMING = np.array(
    [
        [1.0, -0.5, 0.0, 0.0, 0.0],
        [1.0, -0.5, 1.0, 0.0, 0.0],
        [1.0, 0.5, 0.0, -1.0, 0.0],
        [1.0, 0.5, 0.0, 0.0, 0.0],
    ]
)


@dataclass(eq=False)
class Equations:
    """The equations of one or two eclipses.

    times : (n,) cycles of the contacts, then of the middles; inner : (c,) which contacts are inner;
    middles : stars that are behind, one an eclipse (1, 2); depths : one an eclipse;
    outward : (c,) -1 before the middle, +1 after.
    """

    times: Floats
    inner: NDArray[np.bool_]
    outward: Floats
    stars: tuple[int, ...]
    depths: Floats
    data: Floats  # (rows, 5 per eclipse): the measured number of each row in terms of the timings
    covariance: Floats  # of the timings, (5e, 5e)

    @property
    def contacts(self) -> int:
        """How many contacts there are."""
        return self.inner.size

    def evaluate(self, unknowns: Floats) -> tuple[Floats, Floats]:
        """Left-hand sides (rows,) and derivatives to the unknowns (rows, 8)."""
        sky = self.sky(unknowns, self.times)
        rows = self.contacts + len(self.stars)
        value, slopes = np.empty(rows), np.zeros((rows, UNKNOWNS))
        c = self.contacts
        slopes[:c, SHIFT] = -sky[:c, _kernels.DELTA_CYCLES]
        slopes[:c, ECOSW] = sky[:c, _kernels.DELTA_ECOSW]
        slopes[:c, ESINW] = sky[:c, _kernels.DELTA_ESINW]
        slopes[:c, COS2I] = sky[:c, _kernels.DELTA_COS2I]
        half = tanh(abs(unknowns[LOG_RATIO]) / 2)
        size = np.where(self.inner, half, 1.0)
        value[:c] = sky[:c, 0] - unknowns[SUM] * size
        slopes[:c, SUM] = -size
        by_ratio = np.copysign((1 - half * half) / 2, unknowns[LOG_RATIO])
        slopes[:c, LOG_RATIO] = np.where(self.inner, -unknowns[SUM] * by_ratio, 0.0)
        self._depths(unknowns, sky[c:], value[c:], slopes[c:])
        return value, slopes

    def sky(self, unknowns: Floats, times: Floats) -> Floats:
        """Separation and its derivatives at some times, (n, SKY_SIZE)."""
        constants = np.empty(_kernels.CONSTANTS_SIZE)
        _kernels.orbit_constants(unknowns[ECOSW], unknowns[ESINW], unknowns[COS2I], constants)
        out = np.empty((times.size, _kernels.SKY_SIZE))
        _kernels.sky_rows(times - unknowns[SHIFT], constants, 0.0, out)
        return out

    def _depths(self, unknowns: Floats, sky: Floats, value: Floats, slopes: Floats) -> None:
        """Rows of the depths: hidden light with its two derivatives in one call for all eclipses."""
        k = exp(unknowns[LOG_RATIO])
        total, bright = unknowns[SUM], 1 - unknowns[THIRD]
        radii = np.array([total / (1 + k), total * k / (1 + k)])
        d = np.array([sky[n, 0] / radii[star - 1] for n, star in enumerate(self.stars)])
        p = np.array([k if star == 1 else 1 / k for star in self.stars])
        alpha, by_d, by_log_p = hidden_light_slopes(d, p).T
        share2 = 1 / (1 + exp(-(unknowns[LOG_BRIGHTNESS] + 2 * unknowns[LOG_RATIO])))
        for n, star in enumerate(self.stars):
            share = share2 if star == 2 else 1 - share2
            sign = 1.0 if star == 2 else -1.0
            light = bright * share
            value[n] = light * alpha[n] - self.depths[n]
            by_delta = light * by_d[n] / radii[star - 1]
            # ln of the star's radius and of p to ln k
            d_radius = (1 / (1 + k)) if star == 2 else -k / (1 + k)
            slopes[n, SHIFT] = -by_delta * sky[n, _kernels.DELTA_CYCLES]
            slopes[n, ECOSW] = by_delta * sky[n, _kernels.DELTA_ECOSW]
            slopes[n, ESINW] = by_delta * sky[n, _kernels.DELTA_ESINW]
            # d delta/d cos^2 i is infinite at delta = 0, where the light does not feel it.
            slopes[n, COS2I] = by_delta * min(sky[n, _kernels.DELTA_COS2I], 1e3)
            slopes[n, SUM] = -light * by_d[n] * d[n] / total
            slopes[n, LOG_RATIO] = light * (-by_d[n] * d[n] * d_radius - sign * by_log_p[n])
            to_share = bright * alpha[n] * sign * share2 * (1 - share2)
            slopes[n, LOG_RATIO] += 2 * to_share
            slopes[n, LOG_BRIGHTNESS] = to_share
            slopes[n, THIRD] = -share * alpha[n]

    def weights(self, unknowns: Floats) -> tuple[Floats, Floats]:
        """How the rows answer to the timings (rows, 5e), and the rows' covariance.

        The slope of a contact is taken one sigma outward: at an inner contact that just happens the
        slope itself is zero, and would claim that the separation is known exactly.
        """
        c = self.contacts
        answer = self.data.copy()
        spread = np.sqrt(((answer[:c] @ self.covariance) * answer[:c]).sum(axis=1))
        moved = self.sky(unknowns, self.times[:c] + self.outward * spread)[:, 0]
        here = self.sky(unknowns, self.times[:c])[:, 0]
        slope = np.maximum(np.abs(moved - here) / spread, 1e-3 * unknowns[SUM] / spread.max())
        answer[:c] *= (self.outward * slope)[:, None]
        answer[c:] *= -1.0
        covariance = answer @ self.covariance @ answer.T
        doubt = np.zeros(answer.shape[0])
        doubt[c:] = [
            0.0 if self.is_total(unknowns, n) else LIMB_DOUBT * depth
            for n, depth in enumerate(self.depths)
        ]
        return answer, covariance + np.diag(doubt**2)

    def is_total(self, unknowns: Floats, eclipse: int) -> bool:
        """Whether the star behind is hidden whole at the middle: then limb darkening plays no part."""
        k = exp(unknowns[LOG_RATIO])
        if (k < 1) == (self.stars[eclipse] == 1):
            return False
        delta = self.sky(unknowns, self.times[self.contacts + eclipse :][:1])[0, 0]
        return bool(delta <= unknowns[SUM] * tanh(abs(unknowns[LOG_RATIO]) / 2))


def contact_equations(eclipses: tuple[EclipseTiming, ...]) -> Equations:
    """The equations of a primary and perhaps a secondary; timings as they are to be used."""
    times, inner, outward, data = [], [], [], []
    count = len(eclipses)
    for number, eclipse in enumerate(eclipses):
        for contact in (0, 1, 2, 3):
            if contact in (1, 2) and not eclipse.flat:
                continue
            times.append(eclipse.contacts[contact])
            inner.append(contact in (1, 2))
            outward.append(-1.0 if contact < 2 else 1.0)
            data.append(_row(CONTACTS_OF_TIMING[contact], number, count))
    for number, eclipse in enumerate(eclipses):
        times.append(eclipse.middle)
        data.append(_row(np.array([0.0, 0.0, 0.0, 0.0, 1.0]), number, count))
    covariance = np.zeros((5 * count, 5 * count))
    for number, eclipse in enumerate(eclipses):
        block = slice(5 * number, 5 * number + 5)
        covariance[block, block] = eclipse.covariance
    return Equations(
        np.array(times),
        np.array(inner),
        np.array(outward),
        (1, 2)[:count],
        np.array([eclipse.depth for eclipse in eclipses]),
        np.array(data),
        covariance,
    )


def _row(part: Floats, number: int, count: int) -> Floats:
    row = np.zeros(5 * count)
    row[5 * number : 5 * number + 5] = part
    return row
