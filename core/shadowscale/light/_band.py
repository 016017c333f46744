"""Compiled: one band's light curve with its derivatives, chi-squared and normal equations.

The local quantities of a band, in the order of the derivative's columns:

    0 period [d]   1 epoch [d]   2 r1+r2   3 k   4 cos^2 i   5 e cos w   6 e sin w
    7 light time [cycles per a]   8 J   9 third light
    10 ... 10+m-1 limb darkening of star 1   10+m ... 10+2m-1 of star 2
    then, where the small effects are on: ellipsoidal 1, 2, reflection 1, 2, beaming 1, 2

    F = (1 - l3) [1 - loss + prox] + l3,     loss = lam1 beta1 + lam2 beta2

The loss and the small effects are read from polynomials over phase (`_grid`, `_smooth`). Times come
sorted, so that the runs of points outside eclipse are found by search and never looked at: there F = 1,
and their weights are summed in blocks beforehand. No checks, nothing allocated per point, the GIL
released.

Arrays
------
curve : (MEANS + 2m,)
    period, epoch, half an exposure [cycles], third light, and what the derivatives need; names below.
pieces, cells : of `_grid`; effects : of `_smooth`, no rows where they are off.
active (n,), cycles (n,), places (PLACES, n)
    Indices of the points that differ from 1 or may, in order; cycles since the epoch; in rows of places:
    0 the place in `cells` (of the exposure's end), -1 where no eclipse is near; EARLY_ROW that of its
    begin; TURNS_ROW whole turns between the two; EFFECT_ROW the place in `effects`.
blocks : (6, n/BLOCK)
    Sums over blocks of points, see `block_sums`.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import fused, summed
from shadowscale.light._grid import (
    FIXED,
    ORDER,
    PIECES_SIZE,
    SPANS,
    eclipse_shape,
    fill_cells,
    integral_spot,
    lay_pieces,
    next_window,
    read_rows,
    read_values,
    settle_places,
    shortest_piece,
    spans_of,
    spot,
)
from shadowscale.light._kernels import mean_intensity_point
from shadowscale.light._smooth import (
    EFFECT_COLUMNS,
    EFFECTS,
    effect_cells,
    effect_place,
    fill_effects,
)
from shadowscale.orbit._kernels import CONSTANTS_SIZE, ECC, orbit_constants

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Model = tuple[Floats, Floats, Floats, Floats]

SHARED = 10  # columns before limb darkening
BLOCK = 16
BATCH = 64
EARLY_ROW, TURNS_ROW, EFFECT_ROW, PLACES = 3, 6, 7, 8  # rows of places
W, V, VV, T, TT, VT = range(6)  # sums of weight times: 1, v, v^2, t, t^2, v t
SUMS = 6
INSTANT = 1e-4  # exposures shorter than this part of an ingress change the light by less than 1e-7

PERIOD, EPOCH, HALF_EXPOSURE, THIRD, RATIO, BRIGHTNESS, MEANS = range(7)  # places in `curve`


@fused
def prepare_band(
    given: Floats,
    law: int,
    limb1: Floats,
    limb2: Floats,
    amplitudes: Floats,
    derivatives: bool,
) -> Model:
    """Everything that points are read from: curve, pieces, cells and effects.

    given : (11,) period, epoch, half an exposure [cycles], third light, r1+r2, k, J, e cos w, e sin w,
        cos^2 i, light time [cycles per a]
    limb1, limb2 : (m,) coefficients of the law
    amplitudes : of the small effects in the order of the derivatives, or none where they are off
    Behind MEANS of the curve stand d ln Lambda1/dc (m,) and d ln Lambda2/dc (m,).
    """
    period, epoch, half_exposure, third = given[0], given[1], given[2], given[3]
    radius_sum, ratio, brightness = given[4], given[5], given[6]
    ecosw, esinw, cos2i, light_time = given[7], given[8], given[9], given[10]
    count = limb1.size
    mean1, mean2 = np.empty(1 + count), np.empty(1 + count)
    mean_intensity_point(law, limb1, mean1)
    mean_intensity_point(law, limb2, mean2)
    share1 = 1.0 / (1.0 + brightness * ratio * ratio * mean2[0] / mean1[0])
    constants = np.empty(CONSTANTS_SIZE)
    orbit_constants(ecosw, esinw, cos2i, constants)
    pieces = np.empty((PIECES_SIZE, 5))
    number = lay_pieces(
        constants, light_time, radius_sum, ratio, ecosw, esinw, half_exposure > 0.0, pieces
    )
    if half_exposure < INSTANT * shortest_piece(pieces):
        half_exposure = 0.0
    columns = (FIXED + 2 * count + 3) // 4 * 4 if derivatives else 1
    cells = np.empty((number, ORDER, columns))
    fill_cells(
        pieces, constants, light_time, radius_sum, ratio, share1, brightness, law, limb1, limb2,
        mean1, mean2, half_exposure > 0.0, cells,
    )  # fmt: skip
    curve = np.empty(MEANS + 2 * count)
    curve[PERIOD], curve[EPOCH], curve[HALF_EXPOSURE] = period, epoch, half_exposure
    curve[THIRD], curve[RATIO], curve[BRIGHTNESS] = third, ratio, brightness
    curve[MEANS : MEANS + count] = mean1[1:] / mean1[0]
    curve[MEANS + count :] = mean2[1:] / mean2[0]
    wide = effect_cells(constants[ECC]) if amplitudes.size > 0 else 0
    effects = np.empty((wide, ORDER, EFFECT_COLUMNS))
    if wide > 0:
        fill_effects(
            constants, light_time, half_exposure, share1, amplitudes, 1.0 - cos2i, ecosw, effects
        )
    return curve, pieces, cells, effects


@fused
def find_active(
    time: Floats,
    low: int,
    high: int,
    curve: Floats,
    pieces: Floats,
    effect_cells: int,
    active: Ints,
    cycles: Floats,
    places: Floats,
) -> int:
    """List those of the points low...high-1, sorted in time, that an eclipse touches; all with effects.

    Returns their number.
    """
    period, epoch, half = curve[PERIOD], curve[EPOCH], curve[HALF_EXPOSURE]
    spans = spans_of(pieces)
    shape0, shape1 = eclipse_shape(pieces, 0), eclipse_shape(pieces, 1)
    found = 0
    i = low
    while i < high:
        here = (time[i] - epoch) / period
        begin, end, eclipse, turn = next_window(here, spans, half)
        stop = i
        if begin > here:
            stop = _first_from(time, i, high, epoch + period * begin)
        if stop > i:
            if effect_cells > 0:
                for at in range(i, stop):
                    active[found] = at
                    cycles[found] = (time[at] - epoch) / period
                    for row in range(EFFECT_ROW):
                        places[row, found] = 0.0
                    places[2, found] = places[5, found] = -1.0
                    found += 1
            i = stop
            continue
        while True:
            active[found] = i
            cycles[found] = here
            if half > 0.0:
                cosine, count, first, late = integral_spot(here + half, spans, shape0, shape1)
                places[0, found], places[1, found], places[2, found] = cosine, count, first
                cosine, count, first, early = integral_spot(here - half, spans, shape0, shape1)
                places[3, found], places[4, found], places[5, found] = cosine, count, first
                places[TURNS_ROW, found] = late - early
            else:
                phase = here - turn
                if eclipse == 0:
                    phase = min(max(phase, spans[0]), spans[1])
                    cosine, count, first = spot(phase, shape0)
                else:
                    phase = min(max(phase, spans[3]), spans[4])
                    cosine, count, first = spot(phase, shape1)
                places[0, found], places[1, found], places[2, found] = cosine, count, first
            found += 1
            i += 1
            if i == high:
                break
            here = (time[i] - epoch) / period
            if here > end:
                break
    settle_places(places, 0, found)
    if half > 0.0:
        settle_places(places, EARLY_ROW, found)
    if effect_cells > 0:
        for n in range(found):
            places[EFFECT_ROW, n] = effect_place(cycles[n], effect_cells)
    return found


@fused
def _first_from(time: Floats, low: int, high: int, instant: float) -> int:
    """The first of low...high whose time is not before `instant`; by steps that double, then halving."""
    step = 1
    while low < high and time[low] < instant:
        further = min(low + step, high)
        if further == high or time[further] >= instant:
            low += 1
            while low < further:
                middle = (low + further) // 2
                if time[middle] < instant:
                    low = middle + 1
                else:
                    further = middle
            return low
        low = further
        step *= 2
    return low


@fused
def _light(
    curve: Floats,
    pieces: Floats,
    cells: Floats,
    effects: Floats,
    places: Floats,
    found: int,
    early: Floats,
    light: Floats,
) -> None:
    """F of all active points into light (found,); early (found,) is scratch."""
    third, dark = curve[THIRD], 1.0 - curve[THIRD]
    read_values(cells, places, 0, 0, found, light)
    if curve[HALF_EXPOSURE] > 0.0:
        read_values(cells, places, EARLY_ROW, 0, found, early)
        scale = 0.5 / curve[HALF_EXPOSURE]
        whole = cells[int(pieces[SPANS + 1, 2]), 0, 0]
        for n in range(found):
            light[n] = scale * (light[n] - early[n] + whole * places[TURNS_ROW, n])
    if effects.shape[0] > 0:
        read_values(effects, places, EFFECT_ROW, 0, found, early)
        for n in range(found):
            light[n] -= early[n]
    for n in range(found):
        light[n] = dark * (1.0 - light[n]) + third


@fused
def band_values(
    time: Floats, curve: Floats, pieces: Floats, cells: Floats, effects: Floats, flux: Floats
) -> None:
    """F at sorted times (n,) into `flux` (n,)."""
    size = 4096
    active, places = np.empty(size, np.int64), np.empty((PLACES, size))
    cycles, early, light = np.empty(size), np.empty(size), np.empty(size)
    for low in range(0, time.size, size):
        high = min(low + size, time.size)
        found = find_active(
            time, low, high, curve, pieces, effects.shape[0], active, cycles, places
        )
        _light(curve, pieces, cells, effects, places, found, early, light)
        for i in range(low, high):
            flux[i] = 1.0
        for n in range(found):
            flux[active[n]] = light[n]


@fused
def _local_rows(
    curve: Floats,
    pieces: Floats,
    cells: Floats,
    effects: Floats,
    cycles: Floats,
    places: Floats,
    low: int,
    high: int,
    loss: Floats,
    early: Floats,
    prox: Floats,
    rows: Floats,
) -> None:
    """Derivatives of the active points low...high-1 into the first columns of rows (local, BATCH).

    loss, early (BATCH, columns of cells), prox (BATCH, EFFECT_COLUMNS) : scratch
    """
    count = (curve.size - MEANS) // 2
    dark = 1.0 - curve[THIRD]
    read_rows(cells, places, 0, low, high, loss)
    if curve[HALF_EXPOSURE] > 0.0:
        read_rows(cells, places, EARLY_ROW, low, high, early)
        scale = 0.5 / curve[HALF_EXPOSURE]
        constant = int(pieces[SPANS + 1, 2])
        for n in range(high - low):
            turns = places[TURNS_ROW, low + n]
            for j in range(cells.shape[2]):
                loss[n, j] = scale * (loss[n, j] - early[n, j] + turns * cells[constant, 0, j])
    for n in range(high - low):
        by_epoch = dark * loss[n, 1] / curve[PERIOD]
        rows[0, n] = by_epoch * cycles[low + n]
        rows[1, n] = by_epoch
        for j in range(2, FIXED):
            rows[j, n] = -dark * loss[n, j]
        rows[9, n] = loss[n, 0]
        for j in range(2 * count):
            rows[SHARED + j, n] = -dark * loss[n, FIXED + j]
    if effects.shape[0] == 0:
        return
    read_rows(effects, places, EFFECT_ROW, low, high, prox)
    for n in range(high - low):
        by_epoch = dark * prox[n, 1] / curve[PERIOD]
        rows[0, n] -= by_epoch * cycles[low + n]
        rows[1, n] -= by_epoch
        rows[5, n] += dark * prox[n, 2]
        rows[6, n] += dark * prox[n, 3]
        rows[4, n] += dark * prox[n, 4]
        rows[7, n] += dark * prox[n, 5]
        by_ratio = dark * prox[n, 6]
        rows[3, n] += by_ratio * 2.0 / curve[RATIO]
        rows[8, n] += by_ratio / curve[BRIGHTNESS]
        rows[9, n] -= prox[n, 0]
        for j in range(count):
            rows[SHARED + j, n] -= by_ratio * curve[MEANS + j]
            rows[SHARED + count + j, n] += by_ratio * curve[MEANS + count + j]
        for j in range(EFFECTS):
            rows[SHARED + 2 * count + j, n] = dark * prox[n, 7 + j]


@fused
def band_rows(
    time: Floats, curve: Floats, pieces: Floats, cells: Floats, effects: Floats, rows: Floats
) -> None:
    """Derivatives of F to the local quantities at sorted times (n,), into rows (n, columns)."""
    active, places, cycles = (
        np.empty(time.size, np.int64), np.empty((PLACES, time.size)), np.empty(time.size),
    )  # fmt: skip
    loss, early = np.empty((BATCH, cells.shape[2])), np.empty((BATCH, cells.shape[2]))
    prox, local = np.empty((BATCH, EFFECT_COLUMNS)), np.empty((rows.shape[1], BATCH))
    rows[:] = 0.0
    found = find_active(time, 0, time.size, curve, pieces, effects.shape[0], active, cycles, places)
    for low in range(0, found, BATCH):
        high = min(low + BATCH, found)
        _local_rows(
            curve, pieces, cells, effects, cycles, places, low, high, loss, early, prox, local
        )
        for n in range(high - low):
            for j in range(rows.shape[1]):
                rows[active[low + n], j] = local[j, n]


@fused
def block_sums(
    observed: Floats, weight: Floats, starts: Ints, trend: Floats, reference: Floats, blocks: Floats
) -> None:
    """Sums over BLOCK points at a time of w, w v, w v^2, w t, w t^2, w v t, into blocks (SUMS, n/BLOCK).

    v is the observed flux less the reference of its segment: chi-squared of points outside eclipse
    follows from such sums without loss of figures. Blocks that hold two segments are never read.
    """
    blocks[:] = 0.0
    for s in range(starts.size - 1):
        for i in range(starts[s], starts[s + 1]):
            at = i // BLOCK
            if at < blocks.shape[1]:
                _add_point(i, observed, weight, trend, reference[s], blocks[:, at])


@fused
def _add_point(
    i: int, observed: Floats, weight: Floats, trend: Floats, reference: float, sums: Floats
) -> None:
    w, v, t = weight[i], observed[i] - reference, trend[i]
    sums[W] += w
    sums[V] += w * v
    sums[VV] += w * v * v
    sums[T] += w * t
    sums[TT] += w * t * t
    sums[VT] += w * v * t


@fused
def _add_run(
    low: int,
    high: int,
    observed: Floats,
    weight: Floats,
    trend: Floats,
    reference: float,
    blocks: Floats,
    sums: Floats,
) -> None:
    """Add the sums of the points low...high-1, whole blocks at a time where they lie inside."""
    first, last = -(-low // BLOCK), high // BLOCK
    if first >= last:
        for i in range(low, high):
            _add_point(i, observed, weight, trend, reference, sums)
        return
    for i in range(low, first * BLOCK):
        _add_point(i, observed, weight, trend, reference, sums)
    for number in range(SUMS):
        for at in range(first, last):
            sums[number] += blocks[number, at]
    for i in range(last * BLOCK, high):
        _add_point(i, observed, weight, trend, reference, sums)


@fused
def _solve_level(
    flux: Floats,
    active: Ints,
    found: int,
    observed: Floats,
    weight: Floats,
    trend: Floats,
    slopes: bool,
    reference: float,
    sums: Floats,
    solved: Floats,
) -> float:
    """Level and slope of one segment and its chi-squared.

    solved : receives level, slope, then the inverse of their normal matrix (00, 01, 11).
    """
    a00, a01, a11 = sums[W], sums[T], sums[TT]
    b0, b1 = sums[V] + reference * sums[W], sums[VT] + reference * sums[T]
    for n in range(found):
        i = active[n]
        wf = weight[i] * flux[n]
        wff = wf * flux[n]
        a00 += wff
        a01 += wff * trend[i]
        a11 += wff * trend[i] * trend[i]
        b0 += wf * observed[i]
        b1 += wf * observed[i] * trend[i]
    solved[:] = 0.0
    determinant = a00 * a11 - a01 * a01
    if a00 <= 0.0:
        solved[0] = 1.0
    elif slopes and determinant > 1e-12 * a00 * a00:
        solved[0] = (b0 * a11 - b1 * a01) / determinant
        solved[1] = (b1 * a00 - b0 * a01) / determinant
        solved[2] = a11 / determinant
        solved[3] = -a01 / determinant
        solved[4] = a00 / determinant
    else:
        solved[0] = b0 / a00
        solved[2] = 1.0 / a00
    level, slope = solved[0] - reference, solved[1]
    chi2: float = (
        sums[VV]
        - 2.0 * (level * sums[V] + slope * sums[VT])
        + level * level * sums[W]
        + 2.0 * level * slope * sums[T]
        + slope * slope * sums[TT]
    )
    for n in range(found):
        i = active[n]
        residual = observed[i] - (solved[0] + solved[1] * trend[i]) * flux[n]
        chi2 += weight[i] * residual * residual
    return chi2


@fused
def band_chi2(
    time: Floats,
    observed: Floats,
    weight: Floats,
    starts: Ints,
    trend: Floats,
    slopes: bool,
    reference: Floats,
    blocks: Floats,
    curve: Floats,
    pieces: Floats,
    cells: Floats,
    effects: Floats,
    wanted: Ints,
    active: Ints,
    scratch: Floats,
    places: Floats,
    matrix: Floats,
    gradient: Floats,
    levels: Floats,
) -> float:
    """Chi-squared with levels solved and, where any are wanted, its normal equations.

    starts : (s+1,) first row of each segment; trend : (n,) time within the segment, -1...1
    slopes : bool, a slope beside the level
    reference : (s,) a flux near the level of each segment
    wanted : (m,) local quantities whose derivatives are wanted; none: chi-squared alone
    active, scratch (3, n), places (PLACES, n) : scratch, n the points of the longest segment
    matrix (m, m), gradient (m,) : receive J^T W J and J^T W r
    levels : (s, 2) receives level and slope
    Levels and model derivatives are solved together (variable projection): the Schur complement of
    the level block is what is left for the model.
    """
    chi2 = 0.0
    size = wanted.size
    cycles, early, flux = scratch[0], scratch[1], scratch[2]
    sums, solved = np.empty(SUMS), np.empty(5)
    cross = np.zeros((2, size))
    matrix[:] = 0.0
    gradient[:] = 0.0
    for s in range(starts.size - 1):
        low, high = starts[s], starts[s + 1]
        found = find_active(
            time, low, high, curve, pieces, effects.shape[0], active, cycles, places
        )
        _light(curve, pieces, cells, effects, places, found, early, flux)
        sums[:] = 0.0
        behind = low
        for n in range(found):
            i = active[n]
            if i > behind:
                _add_run(behind, i, observed, weight, trend, reference[s], blocks, sums)
            behind = i + 1
        _add_run(behind, high, observed, weight, trend, reference[s], blocks, sums)
        chi2 += _solve_level(
            flux, active, found, observed, weight, trend, slopes, reference[s], sums, solved
        )
        levels[s] = solved[:2]
        if size > 0:
            _accumulate(
                observed, weight, trend, curve, pieces, cells, effects, wanted, active, cycles,
                places, flux, found, solved, matrix, gradient, cross,
            )  # fmt: skip
            for j in range(size):
                x0 = solved[2] * cross[0, j] + solved[3] * cross[1, j]
                x1 = solved[3] * cross[0, j] + solved[4] * cross[1, j]
                for k in range(j + 1):
                    matrix[j, k] -= x0 * cross[0, k] + x1 * cross[1, k]
    for j in range(size):
        for k in range(j):
            matrix[k, j] = matrix[j, k]
    return chi2


@fused
def _accumulate(
    observed: Floats,
    weight: Floats,
    trend: Floats,
    curve: Floats,
    pieces: Floats,
    cells: Floats,
    effects: Floats,
    wanted: Ints,
    active: Ints,
    cycles: Floats,
    places: Floats,
    flux: Floats,
    found: int,
    solved: Floats,
    matrix: Floats,
    gradient: Floats,
    cross: Floats,
) -> None:
    """Add one segment's normal equations; `cross` (2, m) receives the products with level and slope."""
    loss, early = np.empty((BATCH, cells.shape[2])), np.empty((BATCH, cells.shape[2]))
    prox = np.empty((BATCH, EFFECT_COLUMNS))
    local = np.empty((SHARED + curve.size - MEANS + EFFECTS, BATCH))
    weights = np.empty((4, BATCH))
    cross[:] = 0.0
    for low in range(0, found, BATCH):
        high = min(low + BATCH, found)
        _local_rows(
            curve, pieces, cells, effects, cycles, places, low, high, loss, early, prox, local
        )
        for b in range(high - low):
            n = low + b
            i = active[n]
            level = solved[0] + solved[1] * trend[i]
            wl = weight[i] * level
            weights[0, b] = wl * level
            weights[1, b] = wl * (observed[i] - level * flux[n])
            weights[2, b] = wl * flux[n]
            weights[3, b] = wl * flux[n] * trend[i]
        _add_products(local, wanted, weights, high - low, matrix, gradient, cross)


@summed
def _add_products(
    local: Floats,
    wanted: Ints,
    weights: Floats,
    length: int,
    matrix: Floats,
    gradient: Floats,
    cross: Floats,
) -> None:
    """Weighted sums of the products of the wanted rows of local (local, BATCH) over a batch of points."""
    scaled = np.empty(BATCH)
    for j in range(wanted.size):
        one = wanted[j]
        a = b = c = 0.0
        for n in range(length):
            scaled[n] = weights[0, n] * local[one, n]
            a += weights[1, n] * local[one, n]
            b += weights[2, n] * local[one, n]
            c += weights[3, n] * local[one, n]
        gradient[j] += a
        cross[0, j] += b
        cross[1, j] += c
        for k in range(j + 1):
            other = wanted[k]
            total = 0.0
            for n in range(length):
                total += scaled[n] * local[other, n]
            matrix[j, k] += total


@fused
def in_order(time: Floats) -> bool:
    """Whether all times are finite and none is before the one in front of it."""
    wrong = 0
    for i in range(1, time.size):
        wrong += 0 if time[i] >= time[i - 1] else 1
    return time.size == 0 or (wrong == 0 and np.isfinite(time[0]) and np.isfinite(time[-1]))
