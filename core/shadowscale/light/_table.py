"""Compiled table of the hidden fraction against separation, for one pair of stars and one law.

The function has branch points at inner contact d = e = |1-p| and at outer contact d = 1+p, so the
table is made of three sides, each measured by the distance x from a contact:

    ring      x = e - d,     0 <= x <= e     (p < 1 only; for p >= 1 all is hidden)
    inner     x = d - e,     0 <= x <= h,    h = min(1, p)
    outer     x = 1+p - d,   0 <= x <= h

Seen from x > 0 every other branch point lies at x < 0, or at twice the end of the side. Close to the
contact nodes are uniform in z = (x/x1)^(1/8), where even mu^0.2 and x^2 log x are smooth; from x1 on
they are uniform in log(x/(2l-x)), l being the side's length. When the nearest other branch point is close (p near 1, or p small seen
from the ring), x1 follows it and a coarser part, uniform in log x, comes between. Every cell holds polynomials of degree five in its own unit coordinate: that of beta
from values and exact slopes, those of the derivatives from six nodes.

Layout: row 0 is the header (see `fill_table`), every other row a cell: six coefficients for each of beta,
dbeta/dd, dbeta/dp, dbeta/dc[0], ...
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import compiled
from shadowscale.light._kernels import eclipse_point

Floats = NDArray[np.float64]

_NEAR = 32  # cells close to a contact
_FAR = 32  # cells in the last, finest part
_FINE = 0.06  # where that part begins, as a fraction of the side
_REACH = 0.3  # x1 over the distance of the nearest other branch point
_COARSE = 0.2  # wanted step in log x between
_NEAREST = 1e-9  # |1-p| below it is not resolved: only derivatives at separations below it suffer
_FAR_START = _FINE / (2.0 - _FINE)
_FAR_STEP = -math.log(_FAR_START) / _FAR

# Six equidistant values, at -2...3, to the coefficients of their polynomial.
_LAGRANGE = np.linalg.inv(np.vander(np.arange(-2.0, 4.0), increasing=True))


def table_columns(count: int) -> int:
    """Columns of the table of a law with `count` coefficients."""
    return 6 * (3 + count)


@compiled
def _extent(side: int, p: float) -> tuple[float, float]:
    """Length of a side, and distance of the nearest other branch point behind its contact."""
    e = abs(1.0 - p)
    h = min(1.0, p)
    if side == 0:
        return (e, p) if p < 1.0 else (0.0, 1.0)
    if side == 1:
        return h, max(e, _NEAREST * h)
    return h, h


@compiled
def _parts(length: float, scale: float) -> tuple[float, int]:
    """x1 and the number of cells of the coarse part."""
    fine = _FINE * length
    first = min(fine, _REACH * scale)
    return first, math.ceil(math.log(fine / first) / _COARSE)


@compiled
def table_rows(p: float) -> int:
    """Rows that the table of a pair of stars needs."""
    rows = 1
    for side in range(3):
        length, scale = _extent(side, p)
        if length > 0.0:
            rows += _NEAR + _parts(length, scale)[1] + _FAR
    return rows


@compiled
def _point(side: int, x: float, p: float, law: int, c: Floats, out: Floats) -> None:
    """eclipse_point at distance x from a side's contact."""
    if side == 0:
        d = (1.0 - p) - x
    elif side == 1:
        d = max(abs(1.0 - p) + x, 1e-200)  # p = 1: the limit d -> 0, not total cover
    else:
        d = (1.0 + p) - x
    eclipse_point(abs(d), p, law, c, out)
    if d < 0.0:
        out[1] = -out[1]


@compiled
def _store(values: Floats, table: Floats, start: int, cells: int) -> None:
    """Polynomials of `cells` cells from nodes -2...cells+2; values[:, 0] is the slope of beta."""
    columns = values.shape[1] - 1
    for cell in range(cells):
        row = table[start + cell]
        n = cell + 2
        f0 = values[n, 1]
        f1 = values[n + 1, 1]
        g0 = values[n, 0]
        g1 = values[n + 1, 0]
        s0 = 2.0 * (f1 - 2.0 * f0 + values[n - 1, 1]) - 0.5 * (g1 - values[n - 1, 0])
        s1 = 2.0 * (values[n + 2, 1] - 2.0 * f1 + f0) - 0.5 * (values[n + 2, 0] - g0)
        rise = f1 - f0
        row[0] = f0
        row[1] = g0
        row[2] = 0.5 * s0
        row[3] = 10.0 * rise - 6.0 * g0 - 4.0 * g1 - 1.5 * s0 + 0.5 * s1
        row[4] = -15.0 * rise + 8.0 * g0 + 7.0 * g1 + 1.5 * s0 - s1
        row[5] = 6.0 * rise - 3.0 * (g0 + g1) - 0.5 * (s0 - s1)
        for j in range(1, columns):
            for i in range(6):
                total = 0.0
                for m in range(6):
                    total += _LAGRANGE[i, m] * values[cell + m, 1 + j]
                row[6 * j + i] = total


@compiled
def _fill_near(
    side: int, first: float, p: float, law: int, c: Floats, table: Floats, start: int
) -> None:
    """The part next to the contact; nodes beyond it are mirror images."""
    values = np.empty((_NEAR + 5, 4 + c.shape[0]))
    sign = 1.0 if side == 1 else -1.0
    for j in range(_NEAR + 3):
        z = j / _NEAR
        z2 = z * z
        z7 = z2 * z2 * z2 * z
        node = values[j + 2]
        _point(side, first * z7 * z, p, law, c, node[1:])
        node[0] = sign * node[2] * first * 8.0 * z7 / _NEAR
    for j in range(1, 3):
        values[2 - j] = values[2 + j]
        values[2 - j, 0] = -values[2 + j, 0]
    _store(values, table, start, _NEAR)


@compiled
def _fill_coarse(
    side: int,
    first: float,
    step: float,
    p: float,
    law: int,
    c: Floats,
    table: Floats,
    start: int,
    cells: int,
) -> None:
    """The part that is uniform in log x."""
    values = np.empty((cells + 5, 4 + c.shape[0]))
    sign = 1.0 if side == 1 else -1.0
    for j in range(-2, cells + 3):
        x = first * math.exp(step * j)
        node = values[j + 2]
        _point(side, x, p, law, c, node[1:])
        node[0] = sign * node[2] * x * step
    _store(values, table, start, cells)


@compiled
def _fill_far(
    side: int, length: float, p: float, law: int, c: Floats, table: Floats, start: int
) -> None:
    """The part that is uniform in log y, y = x/(2l-x)."""
    values = np.empty((_FAR + 5, 4 + c.shape[0]))
    sign = 1.0 if side == 1 else -1.0
    for j in range(-2, _FAR + 3):
        y = _FAR_START * math.exp(_FAR_STEP * j)
        x = 2.0 * length * y / (1.0 + y)
        node = values[j + 2]
        _point(side, x, p, law, c, node[1:])
        node[0] = sign * node[2] * x / (1.0 + y) * _FAR_STEP
    _store(values, table, start, _FAR)


@compiled
def fill_table(p: float, law: int, c: Floats, table: Floats) -> None:
    """Fill the table: (table_rows(p), table_columns(len(c))) float64, written in place.

    Header: [0] p, [1] |1-p|, [2] 1+p, then for each side 1/x1, first row, number of coarse cells,
    1/(coarse step), 2l, and the first row of the far part.
    """
    header = table[0]
    header[:] = 0.0
    header[0] = p
    header[1] = abs(1.0 - p)
    header[2] = 1.0 + p
    start = 1
    for side in range(3):
        length, scale = _extent(side, p)
        if length <= 0.0:
            continue
        first, cells = _parts(length, scale)
        at = 3 + 6 * side
        header[at] = 1.0 / first
        header[at + 1] = start
        header[at + 2] = cells
        header[at + 4] = 2.0 * length
        _fill_near(side, first, p, law, c, table, start)
        start += _NEAR
        if cells > 0:
            step = math.log(_FINE * length / first) / cells
            header[at + 3] = 1.0 / step
            _fill_coarse(side, first, step, p, law, c, table, start, cells)
            start += cells
        header[at + 5] = start
        _fill_far(side, length, p, law, c, table, start)
        start += _FAR


@compiled
def _locate(table: Floats, d: float) -> tuple[int, float]:
    """Row and place in its cell; row 0 outside eclipse, row -1 where all is hidden."""
    e = table[0, 1]
    if d >= table[0, 2]:
        return 0, 0.0
    if d < e or (d == e and table[0, 0] > 1.0):
        if table[0, 0] >= 1.0:
            return -1, 0.0
        at = 3
        x = e - d
    else:
        x = d - e
        at = 9
        back = table[0, 2] - d
        if back < x:
            x = back
            at = 15
    start = int(table[0, at + 1])
    scaled = x * table[0, at]
    if scaled < 1.0:
        place = _NEAR * math.sqrt(math.sqrt(math.sqrt(scaled)))
        cell = min(int(place), _NEAR - 1)
        return start + cell, place - cell
    y = x / (table[0, at + 4] - x) * (1.0 / _FAR_START)
    if y < 1.0:
        place = math.log(scaled) * table[0, at + 3]
        cell = min(int(place), int(table[0, at + 2]) - 1)
        return start + _NEAR + cell, place - cell
    place = math.log(y) * (1.0 / _FAR_STEP)
    cell = min(int(place), _FAR - 1)
    return int(table[0, at + 5]) + cell, place - cell


@compiled
def read_table_value(table: Floats, p: float, d: float) -> float:
    """The hidden fraction at separation d >= 0."""
    row, t = _locate(table, d)
    if row <= 0:
        return -float(row)
    a = table[row]
    value = a[0] + t * (a[1] + t * (a[2] + t * (a[3] + t * (a[4] + t * a[5]))))
    return float(min(1.0, max(0.0, value)))


@compiled
def read_table(table: Floats, p: float, d: float, out: Floats) -> None:
    """Hidden fraction and derivatives at separation d >= 0, in out as by eclipse_point."""
    columns = table.shape[1] // 6
    row, t = _locate(table, d)
    if row <= 0:
        for j in range(columns):
            out[j] = 0.0
        out[0] = -float(row)
        return
    a = table[row]
    for j in range(columns):
        i = 6 * j
        out[j] = a[i] + t * (
            a[i + 1] + t * (a[i + 2] + t * (a[i + 3] + t * (a[i + 4] + t * a[i + 5])))
        )
    out[0] = min(1.0, max(0.0, out[0]))
