"""Compiled search for repeating dips: one pass over the points for each trial frequency.

Three levels are fitted to the folded light (first box, second box, the rest), after the box search of
Kovacs, Zucker & Mazeh (2002, A&A 391, 369) with a second box for the other eclipse; the same bins
give the phase dispersion (one-way analysis of variance, Schwarzenberg-Czerny 1989, MNRAS 241, 153).
"""

from __future__ import annotations

import numpy as np
from numba import njit

GAIN_ONE, GAIN_TWO, GAIN_BINS, PHASE, WIDTH, PHASE_TWO, WIDTH_TWO, OCCUPIED = range(8)


@njit(cache=True, nogil=True, error_model="numpy")
def box_spectrum(time, value, weight, frequency, bins, least, out):  # type: ignore[no-untyped-def]
    """Gains in chi2 at each frequency.

    time, value, weight : (n,) time from some origin [d], light with weighted mean zero, 1/sigma^2
    frequency : (m,) [1/d];  bins : (m,) int64 phase bins to use
    least : fewest points in a box
    out : (m, 8) gain of one box, of two boxes, of all bins; start and width of both boxes [cycles]; occupied bins
    """
    top = 0
    for i in range(bins.size):
        top = max(top, bins[i])
    sums = np.empty(top)
    mass = np.empty(top)
    count = np.empty(top)
    sum_to = np.empty(2 * top + 1)
    mass_to = np.empty(2 * top + 1)
    count_to = np.empty(2 * top + 1)
    total = weight.sum()
    for i in range(frequency.size):
        n = bins[i]
        f = frequency[i]
        sums[:n] = 0.0
        mass[:n] = 0.0
        count[:n] = 0.0
        for j in range(time.size):
            phase = time[j] * f
            phase -= np.floor(phase)
            cell = int(phase * n)
            if cell >= n:
                cell = n - 1
            sums[cell] += weight[j] * value[j]
            mass[cell] += weight[j]
            count[cell] += 1.0
        dispersion = 0.0
        occupied = 0
        sum_to[0] = 0.0
        mass_to[0] = 0.0
        count_to[0] = 0.0
        for cell in range(2 * n):
            real = cell if cell < n else cell - n
            sum_to[cell + 1] = sum_to[cell] + sums[real]
            mass_to[cell + 1] = mass_to[cell] + mass[real]
            count_to[cell + 1] = count_to[cell] + count[real]
            if cell < n and mass[real] > 0:
                dispersion += sums[real] ** 2 / mass[real]
                occupied += 1
        gain, place, width = _best_box(sum_to, mass_to, count_to, n, total, 0.0, 0.0, -1, 0, least)
        out[i, 0] = gain
        out[i, 1] = gain
        out[i, 2] = dispersion
        out[i, 3] = place / n
        out[i, 4] = width / n
        out[i, 5] = 0.0
        out[i, 6] = 0.0
        out[i, 7] = occupied
        if width > 0:
            s1 = sum_to[place + width] - sum_to[place]
            m1 = mass_to[place + width] - mass_to[place]
            gain2, place2, width2 = _best_box(
                sum_to, mass_to, count_to, n, total, s1, m1, place, width, least
            )
            if width2 > 0 and gain2 > gain:
                out[i, 1] = gain2
                out[i, 5] = place2 / n
                out[i, 6] = width2 / n


@njit(cache=True, nogil=True, error_model="numpy")
def _best_box(sum_to, mass_to, count_to, n, total, s1, m1, start1, width1, least):  # type: ignore[no-untyped-def]
    """Gain, start and width [bins] of the best box beside a first one (start1 < 0: none)."""
    best = 0.0
    found = 0
    found_width = 0
    first = s1 * s1 / m1 if m1 > 0 else 0.0
    width = 1
    while width <= n // 4:
        for j in range(n):
            if start1 >= 0:
                # The box and its own width around the first one stay free.
                ahead = j - (start1 - width1 // 2)
                if ahead < 0:
                    ahead += n
                if ahead < 2 * width1 or ahead + width > n:
                    continue
            m = mass_to[j + width] - mass_to[j]
            s = sum_to[j + width] - sum_to[j]
            rest = total - m - m1
            if s >= 0 or rest <= 0 or m <= 0:
                continue
            if count_to[j + width] - count_to[j] < least:
                continue
            mean = s / m
            level = -(s + s1) / rest
            if mean >= level:
                continue
            gain = first + s * mean + level * level * rest
            if gain > best:
                best = gain
                found = j
                found_width = width
        width = max(width + 1, int(width * 1.4))
    return best, found, found_width
