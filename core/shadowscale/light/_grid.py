"""Compiled: the loss of light of one band on a grid of phases, and reading it at any phase.

With everything else given, loss = lam1 beta1 + lam2 beta2 is a function of phase. It is smooth except
at the contacts, where it goes with half-integer powers (and x^2 log x) of the distance x. Each eclipse
is therefore cut at its contacts, and each piece is covered by nodes uniform in theta,

    phase = middle - half cos theta,     0 <= theta <= pi,

which crowds them quadratically at both ends and makes the loss a smooth function of theta. Between
nodes: cubic Hermite interpolation, from exact slopes for the loss itself and from fourth-order
differences for its derivatives.

Averaged over an exposure the loss is [L(phase + h) - L(phase - h)]/(2h) with L its integral over
phase; the integral of the very interpolant, exact in each cell, so that the average is as accurate as
the loss at a point, for every exposure and at the same cost.

Layout of the grid, (HEADER + nodes, 2 or 3 times the columns): first values, then slopes in units of a
cell, then (for exposures) running integrals; the header has a row a piece:

    0 middle [cycles]   1 half [cycles]   2 cells   3 row of its first node   4 eclipse (0, 1)

and in row MOST_PIECES the number of pieces, then first and last phase of each eclipse. Columns: 0 loss,
1 to cycles, 2 r1+r2, 3 k, 4 cos^2 i, 5 e cos w, 6 e sin w, 7 light time, 8 J, then both stars' limb
darkening. For exposures the values are integrands in theta.
"""

from __future__ import annotations

import numpy as np

from shadowscale._compiled import compiled
from shadowscale.light._table import read_table
from shadowscale.orbit._kernels import SKY_SIZE, sky_point, sky_point_value

MOST_PIECES = 8
HEADER = MOST_PIECES + 1
FIXED = 9  # columns before limb darkening
CELLS, FINE_CELLS = 96, 320
CLOSE = 0.04  # |1 - k| over min(1, k) below which the inner contacts are crowded by the outer radii
_TINY = 1e-12


@compiled
def secondary_phase(ecosw, esinw):
    """Phase of the conjunction with star 2 behind (Sterne's exact formula; Kopal 1959)."""
    root = np.sqrt(1.0 - ecosw * ecosw - esinw * esinw)
    return 0.5 + (np.arctan(ecosw / root) + ecosw * root / (1.0 - esinw * esinw)) / np.pi


@compiled
def _closest(constants, light_time, conjunction, reach, sky):
    """Phase of least separation near a conjunction."""
    low, high = conjunction - reach, conjunction + reach
    for _ in range(60):
        middle = 0.5 * (low + high)
        sky_point(middle, constants, light_time, sky)
        if sky[2] > 0.0:
            high = middle
        else:
            low = middle
        if high - low < 1e-14:
            break
    return 0.5 * (low + high)


@compiled
def _crossing(constants, light_time, wanted, inside, step):
    """Phase, away from `inside` in the direction of `step`, where the separation reaches `wanted`."""
    near = inside
    far = inside
    for _ in range(200):
        far = near + step
        if sky_point_value(far, constants, light_time)[0] >= wanted or abs(far - inside) > 0.5:
            break
        near = far
    for _ in range(60):
        middle = 0.5 * (near + far)
        if sky_point_value(middle, constants, light_time)[0] >= wanted:
            far = middle
        else:
            near = middle
        if abs(far - near) < 1e-15 + 1e-14 * abs(far - inside):
            break
    return 0.5 * (near + far)


@compiled
def _add_piece(grid, low, high, cells, eclipse):
    """One more piece in the header."""
    number = int(grid[MOST_PIECES, 0])
    row = HEADER
    if number > 0:
        row = int(grid[number - 1, 3]) + int(grid[number - 1, 2]) + 1
    grid[number, 0] = 0.5 * (low + high)
    grid[number, 1] = max(0.5 * (high - low), _TINY)
    grid[number, 2] = cells
    grid[number, 3] = row
    grid[number, 4] = eclipse
    grid[MOST_PIECES, 0] = number + 1


@compiled
def lay_pieces(constants, light_time, radius_sum, ratio, ecosw, esinw, grid):
    """Cut both eclipses at their contacts; returns the rows that the grid needs.

    `grid` (at least HEADER rows, 6 columns): only the header is written.
    """
    sky = np.empty(SKY_SIZE)
    inner = radius_sum * abs(1.0 - ratio) / (1.0 + ratio)
    smaller = min(1.0, ratio)
    step = radius_sum / (8.0 * np.pi)
    cells = FINE_CELLS if abs(1.0 - ratio) < CLOSE * smaller else CELLS
    grid[MOST_PIECES, 0] = 0.0
    for eclipse in range(2):
        conjunction = 0.0 if eclipse == 0 else secondary_phase(ecosw, esinw)
        middle = _closest(constants, light_time, conjunction, 0.12, sky)
        sky_point(middle, constants, light_time, sky)
        grid[MOST_PIECES, 1 + 2 * eclipse] = 1.0
        grid[MOST_PIECES, 2 + 2 * eclipse] = -1.0
        if sky[0] >= radius_sum:
            continue
        first = _crossing(constants, light_time, radius_sum, middle, -step)
        last = _crossing(constants, light_time, radius_sum, middle, step)
        grid[MOST_PIECES, 1 + 2 * eclipse] = first
        grid[MOST_PIECES, 2 + 2 * eclipse] = last
        if sky[0] < inner:
            second = _crossing(constants, light_time, inner, middle, -step)
            third = _crossing(constants, light_time, inner, middle, step)
            _add_piece(grid, first, second, cells, eclipse)
            _add_piece(grid, second, third, CELLS, eclipse)
            _add_piece(grid, third, last, cells, eclipse)
        else:
            _add_piece(grid, first, middle, cells, eclipse)
            _add_piece(grid, middle, last, cells, eclipse)
    number = int(grid[MOST_PIECES, 0])
    if number == 0:
        return HEADER
    return int(grid[number - 1, 3]) + int(grid[number - 1, 2]) + 1


@compiled
def fill_grid(
    constants, light_time, radius_sum, ratio, share1, brightness, mean1, mean2, table1, table2,
    averaged, grid,
):  # fmt: skip
    """Fill the nodes of a grid whose header is laid; (rows, 2 or 3 times the columns).

    averaged : bool, store integrands and running integrals for exposures.
    """
    count_ld = mean1.size - 1
    columns = FIXED + 2 * count_ld
    sky = np.empty(SKY_SIZE)
    hidden = np.empty(3 + count_ld)
    for number in range(int(grid[MOST_PIECES, 0])):
        middle, half = grid[number, 0], grid[number, 1]
        cells, start = int(grid[number, 2]), int(grid[number, 3])
        primary = grid[number, 4] == 0.0
        width = np.pi / cells
        for node in range(cells + 1):
            theta = width * node
            sine, cosine = np.sin(theta), np.cos(theta)
            row = grid[start + node]
            sky_point(middle - half * cosine, constants, light_time, sky)
            _loss(sky, primary, radius_sum, ratio, share1, brightness, mean1, mean2, table1, table2,
                  hidden, row)  # fmt: skip
            row[columns] = row[1] * half * sine * width  # exact slope, in units of a cell
            if averaged:
                row[columns] = row[columns] * half * sine + row[0] * half * cosine * width
                for j in range(columns):
                    row[j] *= half * sine
        _slopes(grid, start, cells, columns)
    if averaged:
        _integrate(grid, columns)


@compiled
def _loss(
    sky, primary, radius_sum, ratio, share1, brightness, mean1, mean2, table1, table2, hidden, row
):  # fmt: skip
    """Loss of light and its derivatives at one phase."""
    count_ld = mean1.size - 1
    share2 = 1.0 - share1
    light_ratio = share2 / share1
    inverse = 1.0 / ratio
    for j in range(2, FIXED + 2 * count_ld):
        row[j] = 0.0
    delta = min(sky[0], radius_sum)
    if primary:
        radius = radius_sum / (1.0 + ratio)
        d = delta / radius
        read_table(table1, ratio, d, hidden)
        row[0] = share1 * hidden[0]
        row[3] = share1 * (hidden[1] * d / (1.0 + ratio) + hidden[2])
        for j in range(count_ld):
            row[FIXED + j] = share1 * hidden[3 + j]
        share = share1
        by_ratio = -hidden[0] * share1 * share1
    else:
        radius = radius_sum * ratio / (1.0 + ratio)
        d = delta / radius
        read_table(table2, inverse, d, hidden)
        row[0] = share2 * hidden[0]
        row[3] = -share2 * (hidden[1] * d / (ratio * (1.0 + ratio)) + hidden[2] * inverse * inverse)
        for j in range(count_ld):
            row[FIXED + count_ld + j] = share2 * hidden[3 + j]
        share = share2
        by_ratio = hidden[0] * share1 * share1
    by_delta = share * hidden[1] / radius
    row[1] = by_delta * sky[2]
    row[2] = -share * hidden[1] * d / radius_sum
    row[4] = by_delta * sky[5]
    row[5] = by_delta * sky[3]
    row[6] = by_delta * sky[4]
    row[7] = by_delta * sky[6]
    # lam2/lam1 = J k^2 Lambda2/Lambda1
    by_ratio *= light_ratio
    row[3] += by_ratio * 2.0 * inverse
    row[8] = by_ratio / brightness
    for j in range(count_ld):
        row[FIXED + j] -= by_ratio * mean1[1 + j] / mean1[0]
        row[FIXED + count_ld + j] += by_ratio * mean2[1 + j] / mean2[0]


@compiled
def _slopes(grid, start, cells, columns):
    """Slopes of the derivative columns by fourth-order differences, one-sided at the ends."""
    last = start + cells
    for at in range(start, last + 1):
        if at == start:
            a, c0, c1, c2, c3, c4 = at, -25.0, 48.0, -36.0, 16.0, -3.0
        elif at == start + 1:
            a, c0, c1, c2, c3, c4 = at - 1, -3.0, -10.0, 18.0, -6.0, 1.0
        elif at == last - 1:
            a, c0, c1, c2, c3, c4 = at - 3, -1.0, 6.0, -18.0, 10.0, 3.0
        elif at == last:
            a, c0, c1, c2, c3, c4 = at - 4, 3.0, -16.0, 36.0, -48.0, 25.0
        else:
            a, c0, c1, c2, c3, c4 = at - 2, 1.0, -8.0, 0.0, 8.0, -1.0
        for j in range(1, columns):
            grid[at, columns + j] = (
                c0 * grid[a, j] + c1 * grid[a + 1, j] + c2 * grid[a + 2, j]
                + c3 * grid[a + 3, j] + c4 * grid[a + 4, j]
            ) / 12.0  # fmt: skip


@compiled
def _integrate(grid, columns):
    """Running integrals of every column over phase, from the first piece of each eclipse on."""
    for number in range(int(grid[MOST_PIECES, 0])):
        cells, start = int(grid[number, 2]), int(grid[number, 3])
        width = np.pi / cells
        follows = number > 0 and grid[number, 4] == grid[number - 1, 4]
        for j in range(columns):
            total = 0.0
            if follows:
                total = grid[start - 1, 2 * columns + j]
            grid[start, 2 * columns + j] = total
            for at in range(start, start + cells):
                total += width * (
                    0.5 * (grid[at, j] + grid[at + 1, j])
                    + (grid[at, columns + j] - grid[at + 1, columns + j]) / 12.0
                )
                grid[at + 1, 2 * columns + j] = total


@compiled
def _cell(grid, phase, eclipse):
    """Row of the node before `phase` and the place in the cell; the phase lies inside the eclipse."""
    number = 0
    while grid[number, 4] != eclipse:
        number += 1
    pieces = int(grid[MOST_PIECES, 0])
    while (
        number + 1 < pieces
        and grid[number + 1, 4] == eclipse
        and phase > grid[number, 0] + grid[number, 1]
    ):
        number += 1
    cosine = (grid[number, 0] - phase) / grid[number, 1]
    cells = int(grid[number, 2])
    place = np.arccos(min(1.0, max(-1.0, cosine))) * cells / np.pi
    cell = min(int(place), cells - 1)
    return int(grid[number, 3]) + cell, place - cell, np.pi / cells


@compiled
def _near(grid, cycles, eclipse, margin):
    """The phase of `cycles` beside an eclipse, and whether the eclipse (with a margin) holds it."""
    first, last = grid[MOST_PIECES, 1 + 2 * eclipse], grid[MOST_PIECES, 2 + 2 * eclipse]
    low = first - margin
    phase = cycles - np.floor(cycles - low)
    return phase, last > first and phase <= last + margin


@compiled
def _integral(grid, phase, eclipse, column, columns):
    """The integral of one column up to `phase`."""
    first, last = grid[MOST_PIECES, 1 + 2 * eclipse], grid[MOST_PIECES, 2 + 2 * eclipse]
    if phase <= first:
        return 0.0
    row, t, width = _cell(grid, min(phase, last), eclipse)
    return _cell_integral(grid, row, t, width, column, columns)


@compiled
def _cell_integral(grid, row, t, width, column, columns):
    """The running integral at the place t in the cell after `row`."""
    t2 = t * t
    t3, t4 = t2 * t, t2 * t2
    return grid[row, 2 * columns + column] + width * (
        grid[row, column] * (t - t3 + 0.5 * t4)
        + grid[row, columns + column] * (0.5 * t2 - 2.0 * t3 / 3.0 + 0.25 * t4)
        + grid[row + 1, column] * (t3 - 0.5 * t4)
        + grid[row + 1, columns + column] * (0.25 * t4 - t3 / 3.0)
    )


@compiled
def grid_loss(grid, columns, cycles, half_exposure):
    """The loss of light at `cycles`, averaged over the exposure."""
    total = 0.0
    for eclipse in range(2):
        phase, inside = _near(grid, cycles, eclipse, half_exposure)
        if not inside:
            continue
        if half_exposure > 0.0:
            total += (
                _integral(grid, phase + half_exposure, eclipse, 0, columns)
                - _integral(grid, phase - half_exposure, eclipse, 0, columns)
            ) / (2.0 * half_exposure)
        else:
            row, t, _ = _cell(grid, phase, eclipse)
            u = 1.0 - t
            total += u * u * ((1.0 + 2.0 * t) * grid[row, 0] + t * grid[row, columns]) + t * t * (
                (3.0 - 2.0 * t) * grid[row + 1, 0] - u * grid[row + 1, columns]
            )
    return total


@compiled
def grid_losses(grid, columns, cycles, half_exposure, out):
    """The loss and its derivatives into `out` (columns,); returns whether there is any."""
    touched = False
    for eclipse in range(2):
        phase, inside = _near(grid, cycles, eclipse, half_exposure)
        if not inside:
            continue
        if not touched:
            for j in range(columns):
                out[j] = 0.0
        touched = True
        if half_exposure > 0.0:
            _add_average(grid, columns, phase, eclipse, half_exposure, out)
            continue
        row, t, _ = _cell(grid, phase, eclipse)
        u = 1.0 - t
        h00, h10 = u * u * (1.0 + 2.0 * t), u * u * t
        h01, h11 = t * t * (3.0 - 2.0 * t), -t * t * u
        here, there = grid[row], grid[row + 1]
        for j in range(columns):
            out[j] += (
                h00 * here[j] + h10 * here[columns + j] + h01 * there[j] + h11 * there[columns + j]
            )
    return touched


@compiled
def _add_average(grid, columns, phase, eclipse, half_exposure, out):
    """Add the exposure's average of every column."""
    first, last = grid[MOST_PIECES, 1 + 2 * eclipse], grid[MOST_PIECES, 2 + 2 * eclipse]
    scale = 1.0 / (2.0 * half_exposure)
    row, t, width = _cell(grid, min(phase + half_exposure, last), eclipse)
    for j in range(columns):
        out[j] += scale * _cell_integral(grid, row, t, width, j, columns)
    if phase - half_exposure > first:
        row, t, width = _cell(grid, phase - half_exposure, eclipse)
        for j in range(columns):
            out[j] -= scale * _cell_integral(grid, row, t, width, j, columns)
