"""Compiled search for repeating dips: gains in chi2 of boxes on the folded light at each trial frequency.

Three levels are fitted to the folded light (first box, second box, the rest), after the box search of
Kovacs, Zucker & Mazeh (2002, A&A 391, 369) with a second box for the other eclipse; the same bins
give the phase dispersion (one-way analysis of variance, Schwarzenberg-Czerny 1989, MNRAS 241, 153).

Neighbouring frequencies are folded together: the data are cut into as many parts in time as there are
frequencies in a group, each part is folded once, on the frequency in the middle, and the folds are turned
against each other for each frequency (after the fast folding of Staelin 1969, Proc. IEEE 57, 724).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import compiled
from shadowscale.data.photometry import Floats, Ints

GAIN_ONE, GAIN_TWO, GAIN_BINS, PHASE, WIDTH, PHASE_TWO, WIDTH_TWO, OCCUPIED = range(8)
Cells = NDArray[np.int32]
PART = 0.4
WIDEST = 40  # widest box in narrowest ones


@compiled
def box_spectrum(
    time: Floats,
    value: Floats,
    weight: Floats,
    frequency: Floats,
    bins: Ints,
    most_parts: int,
    narrowest: int,
    least: int,
    best_gain: float,
    out: Floats,
) -> None:
    """Gains in chi2 at each frequency.

    time, value, weight : (n,) rising time from some origin [d], light with weighted mean zero, 1/sigma^2
    frequency : (m,) [1/d];  bins : (m,) int64 phase bins to use
    most_parts : most frequencies that are folded together; they must be evenly spaced, nearly, and so
        close that no eclipse is passed over between them. 1 for any frequencies
    narrowest : narrowest box [bins];  least : fewest points in a box
    best_gain : of other frequencies, 0 where none are known
    out : (m, 8) gain of one box, of two boxes, of all bins; start and width of both boxes [cycles]; occupied bins

    No boxes can gain more than all bins, so frequencies whose bins gain less than `PART` of the best boxes so
    far are passed over; their gains stay 0.
    """
    top = 0
    for i in range(bins.size):
        top = max(top, bins[i])
    product = weight * value
    cells = np.empty(time.size, np.int32)
    folded = np.empty((most_parts, 4 * top, 3))
    centres = np.empty(most_parts)
    fine = np.empty((2 * top, 3))
    to = np.empty((4, 2 * top + 1))
    losing = np.empty(top + 1, np.int64)
    total = weight.sum()
    first = 0
    while first < frequency.size:
        n = bins[first]
        # about where folding the points and turning the folds cost the same
        parts = min(most_parts, frequency.size - first, max(1, int(np.sqrt(time.size / n))))
        middle = frequency[first + parts // 2]
        _fold_parts(time, product, weight, middle, 2 * n, parts, cells, folded, centres)
        for i in range(first, first + parts):
            _turned(folded, centres, parts, frequency[i], n, fine)
            out[i, :] = 0.0
            out[i, 2], out[i, 7], many = _running_sums(fine, n, to, losing)
            starts = losing[:many]
            if out[i, 2] < PART * best_gain:
                continue
            _go_on(to, n)
            if _most_gain(to, n, _widest(n, narrowest), total) < PART * best_gain:
                continue
            gain, place, width = _first_box(to, n, total, narrowest, least, starts)
            out[i, 0] = gain
            out[i, 1] = gain
            out[i, 3] = place / n
            out[i, 4] = width / n
            best_gain = max(best_gain, gain)
            # A second box gains hardly more than the first and best one.
            if width > 0 and 2.2 * gain > best_gain:
                both, place2, width2 = _second_box(
                    to, n, total, place, width, narrowest, least, starts
                )
                if width2 > 0 and both > gain:
                    out[i, 1] = both
                    out[i, 5] = place2 / n
                    out[i, 6] = width2 / n
                    best_gain = max(best_gain, both)
        first += parts


@compiled
def _fold_parts(
    time: Floats,
    product: Floats,
    weight: Floats,
    frequency: float,
    cycle: int,
    parts: int,
    cells: Cells,
    folded: Floats,
    centres: Floats,
) -> None:
    """Weighted light, weight and number of points in the `cycle` cells of each part, phases from its centre.

    folded : (parts, 2 cycle, 3) written, each fold twice, so that any turn of it is one piece
    centres : (parts,) written [d]
    """
    low = 0
    span = time[-1]
    for part in range(parts):
        high = time.size
        centre = 0.0
        if parts > 1:
            high = np.searchsorted(time, span * (part + 1) / parts) if part + 1 < parts else high
            centre = span * (part + 0.5) / parts
        centres[part] = centre
        fold = folded[part]
        fold[:cycle] = 0.0
        _cells_of(time[low:high], centre, frequency, cycle, cells)
        _add_points(product[low:high], weight[low:high], cells, fold)
        for cell in range(cycle):
            for column in range(3):
                fold[cycle + cell, column] = fold[cell, column]
        low = high


@compiled
def _cells_of(time: Floats, centre: float, frequency: float, cycle: int, cells: Cells) -> None:
    """The cell of each time."""
    last = np.int32(cycle - 1)
    for j in range(time.size):
        phase = (time[j] - centre) * frequency
        cells[j] = min(np.int32((phase - np.floor(phase)) * cycle), last)


@compiled
def _add_points(product: Floats, weight: Floats, cells: Cells, fold: Floats) -> None:
    for j in range(product.size):
        row = fold[cells[j]]
        row[0] += product[j]
        row[1] += weight[j]
        row[2] += 1.0


@compiled
def _turned(
    folded: Floats, centres: Floats, parts: int, frequency: float, n: int, fine: Floats
) -> None:
    """The folds of the parts added (2 n, 3), with phases from the time zero at a frequency."""
    cycle = 2 * n
    total = fine[:cycle].reshape(-1)
    total[:] = 0.0
    for part in range(parts):
        turn = centres[part] * frequency
        start = cycle - int(np.rint((turn - np.floor(turn)) * cycle))
        fold = folded[part, start % cycle : start % cycle + cycle].reshape(-1)
        for k in range(total.size):
            total[k] += fold[k]


@compiled
def _running_sums(fine: Floats, n: int, to: Floats, starts: Ints) -> tuple[float, int, int]:
    """Running sums over a cycle of bins of two cells (4, n + 1), written, and the bins with light lost.

    The rows are weighted light, weight, points, and the gain of bins with light lost.
    Returns the bins' gain, how many are filled, and how many have light lost.
    """
    dispersion, losing = 0.0, 0.0
    occupied = 0
    many = 0
    light, mass, count = 0.0, 0.0, 0.0
    to[:, 0] = 0.0
    for cell in range(n):
        first, second = fine[2 * cell], fine[2 * cell + 1]
        s = first[0] + second[0]
        m = first[1] + second[1]
        light += s
        mass += m
        count += first[2] + second[2]
        to[0, cell + 1] = light
        to[1, cell + 1] = mass
        to[2, cell + 1] = count
        if m > 0:
            gain = s * s / m
            dispersion += gain
            losing += gain if s < 0 else 0.0
            occupied += 1
        to[3, cell + 1] = losing
        starts[many] = cell
        many += s < 0
    return dispersion, occupied, many


@compiled
def _go_on(to: Floats, n: int) -> None:
    """The running sums over a second cycle, for boxes that begin in the first and end in the next."""
    for row in range(4):
        line = to[row]
        whole, again = line[n], line[n:]
        for cell in range(1, n + 1):
            again[cell] = line[cell] + whole


@compiled
def _widest(n: int, narrowest: int) -> int:
    """The widest box that is tried [bins]."""
    return min(n // 4, WIDEST * narrowest)


@compiled
def _most_gain(to: Floats, n: int, width: int, total: float) -> float:
    """What two boxes of up to so many bins cannot gain more than.

    By Cauchy and Schwarz (sum s)^2 / sum m <= sum s^2/m: a box cannot gain more than its bins of light lost,
    and the level of the rest as much again as the boxes' share of its weight.
    """
    gain, mass = 0.0, 0.0
    gains, masses = to[3], to[1]
    gains_to, masses_to = gains[width:], masses[width:]
    for j in range(n):
        gain = max(gain, gains_to[j] - gains[j])
        mass = max(mass, masses_to[j] - masses[j])
    rest = total - 2 * mass
    return 2 * gain * total / rest if rest > 0 else np.inf


@compiled
def _first_box(
    to: Floats, n: int, total: float, narrowest: int, least: int, starts: Ints
) -> tuple[float, int, int]:
    """Gain, start and width [bins] of the best box; the light's weighted mean is zero.

    A box without a first bin of light lost would gain more without that bin.
    """
    best = 0.0
    room = 1.0  # gain = best/room; ratios are compared without dividing
    found = 0
    found_width = 0
    light, mass, count = to[0], to[1], to[2]
    width = narrowest
    while width <= _widest(n, narrowest):
        light_to, mass_to, count_to = light[width:], mass[width:], count[width:]
        for j in starts:
            s = light_to[j] - light[j]
            if s >= 0:
                continue
            m = mass_to[j] - mass[j]
            spread = m * (total - m)
            if s * s * room > best * spread and count_to[j] - count[j] >= least:
                best = s * s
                room = spread
                found = j
                found_width = width
        width = max(width + 1, int(width * 1.4))
    return best * total / room, found, found_width


@compiled
def _second_box(
    to: Floats,
    n: int,
    total: float,
    start: int,
    width1: int,
    narrowest: int,
    least: int,
    starts: Ints,
) -> tuple[float, int, int]:
    """Gain of both, start and width [bins] of the best box beside the first, with three levels in all."""
    light, mass, count = to[0], to[1], to[2]
    s1 = light[start + width1] - light[start]
    m1 = mass[start + width1] - mass[start]
    first = s1 * s1 / m1
    best = 0.0
    found = 0
    found_width = 0
    # The first box and half its own width on either side stay free.
    begin = start + width1 + width1 // 2 + 1
    end = start + n - width1 // 2 - 1
    width = narrowest
    while width <= _widest(n, narrowest):
        light_to, mass_to, count_to = light[width:], mass[width:], count[width:]
        for j in starts:
            s = light_to[j] - light[j]
            place = j if j >= begin else j + n
            if s >= 0 or place < begin or place > end - width:
                continue
            m = mass_to[j] - mass[j]
            rest = total - m - m1
            level = -(s + s1)
            gain = first + s * s / m + level * level / rest
            enough = count_to[j] - count[j] >= least
            if enough and gain > best and s * rest < level * m:
                best = gain
                found = j
                found_width = width
        width = max(width + 1, int(width * 1.4))
    return best, found, found_width
