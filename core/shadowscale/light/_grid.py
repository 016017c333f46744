"""Compiled: the loss of light of one band as polynomials over phase, and finding a phase's place.

With everything else given, loss = lam1 beta1 + lam2 beta2 is a function of phase. It is smooth except
at the contacts, where it goes with half-integer powers (and x^2 log x, x^(3+alpha)/2) of the distance
x. Each eclipse is therefore cut at its contacts, and each piece is covered by cells uniform in s,

    phase = middle - half cos theta,     theta = pi s^2 (3 - 2s),     0 <= s <= 1,

which crowds them with the fourth power at both ends and makes the loss a smooth function of s. In each
cell stands a polynomial of degree five in t = 0...1: that of the loss from values and exact slopes,
those of its derivatives from six nodes. Measured on 4000 random pairs of every kind: the light is right
to 1.1e-8 at the worst, 4e-10 in the median.

Averaged over an exposure the loss is [L(phase + h) - L(phase - h)]/(2h) with L its integral over phase.
Then the cells hold the integrals of such polynomials, of loss dphase/ds, exact in each cell: an
average is as accurate as the loss at a point, for every exposure, at the cost of reading two places. L
goes on through all phases: behind each eclipse stands a cell where it is constant.

Arrays
------
pieces : (PIECES_SIZE, 5)
    A row a piece: middle [cycles], half [cycles], number of cells, first cell, eclipse (0 primary, 1);
    row COUNTS: number of pieces, number of cells with the constant ones; row SPANS + eclipse: first
    and last phase, last before first where there is no eclipse, the constant cell behind, the phase
    of the closest approach and its separation.
cells : (number, ORDER, columns)
    Coefficients of t^0, t^1, ..., t^6 (zero but for integrals). Columns: 0 loss and, where
    derivatives are wanted, 1 to cycles, 2 r1+r2, 3 k, 4 cos^2 i, 5 e cos w, 6 e sin w, 7 light time,
    8 J, then both stars' limb darkening, filled up with zeros to a multiple of four.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import fused
from shadowscale.light._kernels import eclipse_point
from shadowscale.orbit._kernels import SKY_SIZE, sky_point, sky_point_value

Floats = NDArray[np.float64]
Spans = tuple[float, float, float, float, float, float]
Shape = tuple[float, ...]
Spot = tuple[float, float, float]
Counted = tuple[float, float, float, float]
Window = tuple[float, float, int, float]

MOST_PIECES = 8
COUNTS, SPANS = MOST_PIECES, MOST_PIECES + 1
PIECES_SIZE = MOST_PIECES + 3
FIXED = 9  # columns before limb darkening
ORDER = 7  # coefficients of a cell; the last is for integrals
CELLS, FINE_CELLS, FLAT_CELLS = 48, 80, 32
# Integrands vanish at both ends of a piece, where short exposures divide by as little: more cells.
AVERAGED = 1.5
CLOSE = 0.04  # |1 - k| over min(1, k) below which the inner contacts are crowded by the outer radii
REACH = 0.12  # of the search for the closest approach around a conjunction [cycles]
_TINY = 1e-12
_EXACT = 4e-16  # [cycles]

# Six values at -offset ... 5-offset to the coefficients of their polynomial, for each offset.
_LAGRANGE = np.array(
    [np.linalg.inv(np.vander(np.arange(6.0) - offset, increasing=True)) for offset in range(5)]
)

_NODES = 0.125 * (1.0 + np.cos(np.pi * (np.arange(13) + 0.5) / 13))  # in 0...1/4
_ARCSINE = np.linalg.solve(
    np.vander(_NODES, increasing=True), np.arcsin(np.sqrt(_NODES)) / np.sqrt(_NODES)
)  # asin(x)/x as a polynomial of x^2


@fused
def secondary_phase(ecosw: float, esinw: float) -> float:
    """Phase of the conjunction with star 2 behind (Sterne's exact formula; Kopal 1959)."""
    root = np.sqrt(1.0 - ecosw * ecosw - esinw * esinw)
    phase: float = 0.5 + (np.arctan(ecosw / root) + ecosw * root / (1.0 - esinw * esinw)) / np.pi
    return phase


@fused
def _far_end(
    constants: Floats, light_time: float, conjunction: float, step: float, side: float, sky: Floats
) -> float:
    """Phase beside a conjunction, on its side of the sky, from which the stars come closer towards it."""
    for _ in range(40):
        sky_point(conjunction + step, constants, light_time, sky)
        if sky[1] * side > 0.0 and sky[2] * step > 0.0:
            break
        step *= 0.7
    return conjunction + step


@fused
def _closest(
    constants: Floats, light_time: float, conjunction: float, side: float, sky: Floats
) -> float:
    """Phase of least separation near a conjunction, where delta ddelta/dphase has its root.

    Regula falsi with the Illinois rule (Dowell & Jarratt 1971, BIT 11, 168).
    """
    low = _far_end(constants, light_time, conjunction, -REACH, side, sky)
    at_low = sky[0] * sky[2]
    high = _far_end(constants, light_time, conjunction, REACH, side, sky)
    at_high = sky[0] * sky[2]
    middle = conjunction
    last = 0
    for _ in range(80):
        sky_point(middle, constants, light_time, sky)
        here = sky[0] * sky[2]
        if here > 0.0:
            high, at_high = middle, here
            if last == 1:
                at_low *= 0.5
            last = 1
        else:
            low, at_low = middle, here
            if last == -1:
                at_high *= 0.5
            last = -1
        if here == 0.0 or high - low < _EXACT:
            break
        before = middle
        middle = (low * at_high - high * at_low) / (at_high - at_low)
        if abs(middle - before) < _EXACT:
            break
    return middle


@fused
def _crossing(
    constants: Floats,
    light_time: float,
    wanted: float,
    inside: float,
    step: float,
    side: float,
    sky: Floats,
) -> float:
    """Phase, away from `inside` in the direction of `step`, where the separation reaches `wanted`.

    Newton's iteration on delta^2, which is nearly a parabola there, kept in a bracket. The bracket stays
    on its side of the sky, where some separation is larger than the radii, for the stars do not touch.
    """
    near = far = inside
    for _ in range(100):
        far = near + step
        apart, behind = sky_point_value(far, constants, light_time)
        if behind * side <= 0.0:
            step *= 0.5
        elif apart >= wanted:
            break
        else:
            near = far
            step *= 1.5
    at = far
    for _ in range(80):
        sky_point(at, constants, light_time, sky)
        excess = (sky[0] - wanted) * (sky[0] + wanted)
        if excess >= 0.0:
            far = at
        else:
            near = at
        new = at - excess / (2.0 * sky[0] * sky[2])
        if not min(near, far) < new < max(near, far):
            new = 0.5 * (near + far)
        moved = abs(new - at)
        at = new
        if moved < _EXACT:
            break
    return at


@fused
def _add_piece(pieces: Floats, low: float, high: float, cells: float, eclipse: int) -> None:
    """One more piece behind the others."""
    row = pieces[int(pieces[COUNTS, 0])]
    row[0] = 0.5 * (low + high)
    row[1] = max(0.5 * (high - low), _TINY)
    row[2] = cells
    row[3] = pieces[COUNTS, 1]
    row[4] = eclipse
    pieces[COUNTS, 0] += 1
    pieces[COUNTS, 1] += cells


@fused
def lay_pieces(
    constants: Floats,
    light_time: float,
    radius_sum: float,
    ratio: float,
    ecosw: float,
    esinw: float,
    averaged: bool,
    pieces: Floats,
) -> int:
    """Cut both eclipses at their contacts; fills `pieces` and returns the number of cells."""
    sky = np.empty(SKY_SIZE)
    inner = radius_sum * abs(1.0 - ratio) / (1.0 + ratio)
    step = radius_sum / 12.0
    more = AVERAGED if averaged else 1.0
    cells = more * (FINE_CELLS if abs(1.0 - ratio) < CLOSE * min(1.0, ratio) else CELLS)
    pieces[:] = 0.0
    for eclipse in range(2):
        conjunction = 0.0 if eclipse == 0 else secondary_phase(ecosw, esinw)
        side = -1.0 if eclipse == 0 else 1.0
        middle = _closest(constants, light_time, conjunction, side, sky)
        closest = sky_point_value(middle, constants, light_time)[0]
        first, last = 1.0, -1.0
        if closest < radius_sum:
            first = _crossing(constants, light_time, radius_sum, middle, -step, side, sky)
            last = _crossing(constants, light_time, radius_sum, middle, step, side, sky)
            if closest < inner:
                second = _crossing(constants, light_time, inner, middle, -step, side, sky)
                third = _crossing(constants, light_time, inner, middle, step, side, sky)
                _add_piece(pieces, first, second, cells, eclipse)
                _add_piece(pieces, second, third, more * FLAT_CELLS, eclipse)
                _add_piece(pieces, third, last, cells, eclipse)
            else:
                _add_piece(pieces, first, middle, cells, eclipse)
                _add_piece(pieces, middle, last, cells, eclipse)
        pieces[SPANS + eclipse, 0] = first
        pieces[SPANS + eclipse, 1] = last
        pieces[SPANS + eclipse, 2] = pieces[COUNTS, 1]
        pieces[SPANS + eclipse, 3] = middle
        pieces[SPANS + eclipse, 4] = closest
        pieces[COUNTS, 1] += 1
    return int(pieces[COUNTS, 1])


@fused
def shortest_piece(pieces: Floats) -> float:
    """Half the length of the shortest piece [cycles]; infinite if there are none."""
    found = np.inf
    for number in range(int(pieces[COUNTS, 0])):
        found = min(found, pieces[number, 1])
    return found


@fused
def fill_cells(
    pieces: Floats,
    constants: Floats,
    light_time: float,
    radius_sum: float,
    ratio: float,
    share1: float,
    brightness: float,
    law: int,
    limb1: Floats,
    limb2: Floats,
    mean1: Floats,
    mean2: Floats,
    averaged: bool,
    cells: Floats,
) -> None:
    """Fill the polynomials, of running integrals where the light is averaged over exposures.

    limb1, limb2 : (m,) coefficients; mean1, mean2 : (1+m,) disc means with their gradients
    """
    columns = cells.shape[2]
    cells[:] = 0.0
    most = int(AVERAGED * FINE_CELLS) + 1
    values, slopes = np.zeros((most, columns)), np.empty(most)
    row = np.empty(FIXED + 2 * limb1.size)
    used = min(columns, row.size)
    sky = np.empty(SKY_SIZE)
    hidden = np.empty(3 + limb1.size)
    for number in range(int(pieces[COUNTS, 0])):
        middle, half = pieces[number, 0], pieces[number, 1]
        count, first = int(pieces[number, 2]), int(pieces[number, 3])
        primary = pieces[number, 4] == 0.0
        width = 1.0 / count
        for node in range(count + 1):
            where, speed, bend = _phase(width * node)
            sky_point(middle - half * where, constants, light_time, sky)
            _loss(sky, primary, radius_sum, ratio, share1, brightness, law, limb1, limb2, mean1,
                  mean2, hidden, row)  # fmt: skip
            speed *= half * width  # of phase, in units of a cell
            slopes[node] = row[1] * speed
            if averaged:
                slopes[node] = slopes[node] * speed + row[0] * half * bend * width * width
                row *= speed
            values[node, :used] = row[:used]
        _set_polynomials(values, slopes, cells[first : first + count])
    if averaged:
        _integrate(pieces, cells)


@fused
def _phase(s: float) -> tuple[float, float, float]:
    """cos theta, and first and second derivative of -cos theta to s."""
    theta = np.pi * s * s * (3.0 - 2.0 * s)
    first, second = 6.0 * np.pi * s * (1.0 - s), 6.0 * np.pi * (1.0 - 2.0 * s)
    sine, cosine = np.sin(theta), np.cos(theta)
    return cosine, sine * first, cosine * first * first + sine * second


@fused
def _loss(
    sky: Floats,
    primary: bool,
    radius_sum: float,
    ratio: float,
    share1: float,
    brightness: float,
    law: int,
    limb1: Floats,
    limb2: Floats,
    mean1: Floats,
    mean2: Floats,
    hidden: Floats,
    row: Floats,
) -> None:
    """Loss of light and its derivatives at one phase."""
    count = limb1.size
    share2 = 1.0 - share1
    inverse = 1.0 / ratio
    row[:] = 0.0
    delta = min(sky[0], radius_sum)
    if primary:
        radius = radius_sum / (1.0 + ratio)
        d = delta / radius
        eclipse_point(d, ratio, law, limb1, hidden)
        share, at = share1, FIXED
        by_ratio = -hidden[0] * share1 * share2  # d loss / d ln(lam2/lam1)
        row[3] = share1 * (hidden[1] * d / (1.0 + ratio) + hidden[2])
    else:
        radius = radius_sum * ratio / (1.0 + ratio)
        d = delta / radius
        eclipse_point(d, inverse, law, limb2, hidden)
        share, at = share2, FIXED + count
        by_ratio = hidden[0] * share1 * share2
        row[3] = -share2 * (hidden[1] * d / (ratio * (1.0 + ratio)) + hidden[2] * inverse * inverse)
    by_delta = share * hidden[1] / radius
    row[0] = share * hidden[0]
    row[1] = by_delta * sky[2]
    row[2] = -share * hidden[1] * d / radius_sum
    row[4] = by_delta * sky[5]
    row[5] = by_delta * sky[3]
    row[6] = by_delta * sky[4]
    row[7] = by_delta * sky[6]
    # lam2/lam1 = J k^2 Lambda2/Lambda1
    row[3] += by_ratio * 2.0 * inverse
    row[8] = by_ratio / brightness
    for j in range(count):
        row[at + j] = share * hidden[3 + j]
    for j in range(count):
        row[FIXED + j] -= by_ratio * mean1[1 + j] / mean1[0]
        row[FIXED + count + j] += by_ratio * mean2[1 + j] / mean2[0]


@fused
def _set_polynomials(values: Floats, slopes: Floats, cells: Floats) -> None:
    """Polynomials of a piece's cells from its nodes."""
    count, columns = cells.shape[0], cells.shape[2]
    for at in range(count):
        cell = cells[at]
        if columns > 1:
            start = min(max(at - 2, 0), count - 5)
            weights = _LAGRANGE[at - start]
            for i in range(6):
                for m in range(6):
                    weight = weights[i, m]
                    for j in range(columns):
                        cell[i, j] += weight * values[start + m, j]
        f0, f1, g0, g1 = values[at, 0], values[at + 1, 0], slopes[at], slopes[at + 1]
        s0 = _curvature(values, slopes, at, count)
        s1 = _curvature(values, slopes, at + 1, count)
        rise = f1 - f0
        cell[0, 0] = f0
        cell[1, 0] = g0
        cell[2, 0] = 0.5 * s0
        cell[3, 0] = 10.0 * rise - 6.0 * g0 - 4.0 * g1 - 1.5 * s0 + 0.5 * s1
        cell[4, 0] = -15.0 * rise + 8.0 * g0 + 7.0 * g1 + 1.5 * s0 - s1
        cell[5, 0] = 6.0 * rise - 3.0 * (g0 + g1) - 0.5 * (s0 - s1)


@fused
def _curvature(values: Floats, slopes: Floats, node: int, last: int) -> float:
    """Second derivative of column 0 from values and slopes of three nodes; one-sided at the ends."""
    if node == 0:
        a, b = 1, 2
        sign = 1.0
    elif node == last:
        a, b = node - 1, node - 2
        sign = -1.0
    else:
        f = values[node - 1, 0] - 2.0 * values[node, 0] + values[node + 1, 0]
        curved: float = 2.0 * f - 0.5 * (slopes[node + 1] - slopes[node - 1])
        return curved
    f = -11.5 * values[node, 0] + 8.0 * values[a, 0] + 3.5 * values[b, 0]
    g = -6.0 * slopes[node] - 8.0 * slopes[a] - slopes[b]
    ended: float = f + sign * g
    return ended


@fused
def _integrate(pieces: Floats, cells: Floats) -> None:
    """Turn the integrands' polynomials in s into running integrals over all phases."""
    columns = cells.shape[2]
    total = np.zeros(columns)
    number = 0
    for eclipse in range(2):
        while number < int(pieces[COUNTS, 0]) and pieces[number, 4] == eclipse:
            count, first = int(pieces[number, 2]), int(pieces[number, 3])
            for at in range(first, first + count):
                cell = cells[at]
                for j in range(columns):
                    start = total[j]
                    for i in range(ORDER - 1, 0, -1):
                        cell[i, j] = cell[i - 1, j] / i
                        total[j] += cell[i, j]
                    cell[0, j] = start
            number += 1
        cells[int(pieces[SPANS + eclipse, 2]), 0, :] = total


# What follows is done for every point. Arrays handed on from function to function are counted, which costs
# more than reading them: per point there are only numbers and tuples, and loops over points inside.


@fused
def eclipse_shape(pieces: Floats, eclipse: int) -> Shape:
    """Of each of an eclipse's three pieces its end, middle, half, cells and first cell; two: the last twice."""
    at = 0
    while at < int(pieces[COUNTS, 0]) and pieces[at, 4] != eclipse:
        at += 1
    b = min(at + 1, MOST_PIECES - 1)
    c = min(at + 2, MOST_PIECES - 1)
    if at + 2 >= int(pieces[COUNTS, 0]) or pieces[c, 4] != eclipse:
        c = b
    return (
        pieces[at, 0] + pieces[at, 1], pieces[at, 0], pieces[at, 1], pieces[at, 2], pieces[at, 3],
        pieces[b, 0] + pieces[b, 1], pieces[b, 0], pieces[b, 1], pieces[b, 2], pieces[b, 3],
        np.inf, pieces[c, 0], pieces[c, 1], pieces[c, 2], pieces[c, 3],
    )  # fmt: skip


@fused
def spot(phase: float, shape: Shape) -> Spot:
    """Where a phase stands within an eclipse (its own cycle): cos theta, cells and first cell of its piece."""
    if phase <= shape[0]:
        middle, half, count, first = shape[1], shape[2], shape[3], shape[4]
    elif phase <= shape[5]:
        middle, half, count, first = shape[6], shape[7], shape[8], shape[9]
    else:
        middle, half, count, first = shape[11], shape[12], shape[13], shape[14]
    return (middle - phase) / half, count, first


@fused
def _arcsine(x: float) -> float:
    """asin x without branches, so that several are computed at once."""
    size = min(abs(x), 1.0)
    far = size > 0.5
    square = 0.5 * (1.0 - size) if far else size * size
    near = np.sqrt(square) if far else size
    value = _ARCSINE[12]
    for i in range(11, -1, -1):
        value = value * square + _ARCSINE[i]
    value *= near
    value = 0.5 * np.pi - 2.0 * value if far else value
    signed: float = -value if x < 0.0 else value
    return signed


@fused
def settle_places(places: Floats, which: int, found: int) -> None:
    """Turn the spots in rows which, which+1, which+2 of places into cell number plus t, in row which."""
    for n in range(found):
        turned = _arcsine(_arcsine(places[which, n]) * (2.0 / np.pi)) * (1.0 / 3.0)
        square = turned * turned
        sine = 1.0 / 6227020800.0
        sine = sine * square - 1.0 / 39916800.0
        sine = sine * square + 1.0 / 362880.0
        sine = sine * square - 1.0 / 5040.0
        sine = sine * square + 1.0 / 120.0
        sine = sine * square - 1.0 / 6.0
        within = 0.5 - turned * (1.0 + sine * square)
        within = min(max(within, 0.0), 1.0 - 1e-15)
        places[which, n] = places[which + 2, n] + within * places[which + 1, n]


@fused
def spans_of(pieces: Floats) -> Spans:
    """First and last phase of both eclipses and the constant cells behind them."""
    a, b = SPANS, SPANS + 1
    return (
        pieces[a, 0], pieces[a, 1], pieces[a, 2], pieces[b, 0], pieces[b, 1], pieces[b, 2]
    )  # fmt: skip


@fused
def integral_spot(phase: float, spans: Spans, shape0: Shape, shape1: Shape) -> Counted:
    """As `spot` for any phase, where the running integral is wanted; and the whole turns before it."""
    first0, last0, behind0, first1, last1, behind1 = spans
    turns = np.floor(phase - (first0 if last0 > first0 else first1))
    phase -= turns
    cosine, count, first = 0.0, 0.0, behind1
    if last0 > first0 and phase <= last0:
        cosine, count, first = spot(phase, shape0)
    elif last1 > first1 and phase < first1:
        first = behind0
    elif last1 > first1 and phase <= last1:
        cosine, count, first = spot(phase, shape1)
    return cosine, count, first, turns


@fused
def next_window(cycles: float, spans: Spans, margin: float) -> Window:
    """The first eclipse that ends at or after `cycles`: begin, end [cycles], which one, its turn.

    Eclipses are wider by `margin` at both sides; the begin is infinite if there are none.
    """
    begin, end, which, turn = np.inf, np.inf, 0, 0.0
    for eclipse in range(2):
        first, last = (spans[0], spans[1]) if eclipse == 0 else (spans[3], spans[4])
        if last > first:
            number = np.ceil(cycles - last - margin)
            if number + first - margin < begin:
                begin, end = number + first - margin, number + last + margin
                which, turn = eclipse, number
    return begin, end, which, turn


@fused
def read_values(
    cells: Floats, places: Floats, which: int, low: int, high: int, out: Floats
) -> None:
    """Column 0 at places[which, low...high-1], into the same places of out (n,); 0 at negative ones."""
    for n in range(low, high):
        where = places[which, n]
        value = 0.0
        if where >= 0.0:
            at = int(where)
            t = where - at
            value = cells[at, 6, 0]
            value = value * t + cells[at, 5, 0]
            value = value * t + cells[at, 4, 0]
            value = value * t + cells[at, 3, 0]
            value = value * t + cells[at, 2, 0]
            value = value * t + cells[at, 1, 0]
            value = value * t + cells[at, 0, 0]
        out[n] = value


@fused
def read_rows(cells: Floats, places: Floats, which: int, low: int, high: int, out: Floats) -> None:
    """All columns at places[which, low...high-1], into the first rows of out; 0 at negative ones."""
    columns = cells.shape[2]
    for n in range(low, high):
        where = places[which, n]
        row = n - low
        if where < 0.0:
            for j in range(columns):
                out[row, j] = 0.0
            continue
        at = int(where)
        t = where - at
        for j in range(columns):
            value = cells[at, 6, j]
            value = value * t + cells[at, 5, j]
            value = value * t + cells[at, 4, j]
            value = value * t + cells[at, 3, j]
            value = value * t + cells[at, 2, j]
            value = value * t + cells[at, 1, j]
            out[row, j] = value * t + cells[at, 0, j]
