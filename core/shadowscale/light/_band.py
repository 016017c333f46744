"""Compiled: one band's light curve with its derivatives, and its normal equations.

The local quantities of a band, in the order of the derivative's columns:

    0 period [d]   1 epoch [d]   2 r1+r2   3 k   4 cos^2 i   5 e cos w   6 e sin w
    7 light time [cycles per a]   8 J   9 third light
    10 ... 10+m-1 limb darkening of star 1   10+m ... 10+2m-1 of star 2
    then, where the small effects are on: ellipsoidal 1, 2, reflection 1, 2, beaming 1, 2

    F = (1 - l3) [lam1 (1 - beta1) + lam2 (1 - beta2) + prox] + l3

No checks, nothing allocated per point, the GIL released.
"""

from __future__ import annotations

import numpy as np
from numba import njit

from shadowscale.light._table import read_table, read_table_value
from shadowscale.light.proximity import (
    SHAPES_FULL_SIZE,
    SHAPES_SIZE,
    proximity_full,
    proximity_shapes,
)
from shadowscale.orbit._kernels import (
    COS_L,
    RHO,
    SIN_L,
    SKY_FULL_SIZE,
    sky_full,
    sky_point,
    sky_point_value,
)

SHARED = 10  # columns before limb darkening
EFFECTS = 6  # columns after it


@njit(cache=True, nogil=True, error_model="numpy")
def secondary_phase(ecosw, esinw):
    """Phase of the conjunction with star 2 behind (Sterne's exact formula; Kopal 1959)."""
    root = np.sqrt(1.0 - ecosw * ecosw - esinw * esinw)
    return 0.5 + (np.arctan(ecosw / root) + ecosw * root / (1.0 - esinw * esinw)) / np.pi


@njit(cache=True, nogil=True, error_model="numpy")
def _edge(constants, light_time, radius_sum, start, step):
    """Phase, walking from a conjunction, at which the discs are surely apart."""
    walked = start
    for count in range(400):
        walked += step
        delta, _ = sky_point_value(walked, constants, light_time)
        if delta > radius_sum and count >= 3:
            break
        if abs(walked - start) > 0.5:
            break
    return walked


@njit(cache=True, nogil=True, error_model="numpy")
def eclipse_windows(constants, light_time, radius_sum, ecosw, esinw, margin, out):
    """Phases between which an eclipse may happen: out = (low, high) of primary, then secondary."""
    step = radius_sum / (16.0 * np.pi)
    for eclipse in range(2):
        middle = 0.0 if eclipse == 0 else secondary_phase(ecosw, esinw)
        out[2 * eclipse] = _edge(constants, light_time, radius_sum, middle, -step) - margin
        out[2 * eclipse + 1] = _edge(constants, light_time, radius_sum, middle, step) + margin


@njit(cache=True, nogil=True, error_model="numpy")
def _inside(cycles, low, high):
    return cycles - low - np.floor(cycles - low) <= high - low


@njit(cache=True, nogil=True, error_model="numpy")
def _prox(share1, amplitudes, shapes):
    """The small effects together, from their shapes."""
    share2 = 1.0 - share1
    return (
        (share1 * amplitudes[0] + share2 * amplitudes[1]) * shapes[0]
        + amplitudes[2] * shapes[1]
        + amplitudes[3] * shapes[2]
        + share1 * amplitudes[4] * shapes[3]
        + share2 * amplitudes[5] * shapes[4]
    )


@njit(cache=True, nogil=True, error_model="numpy")
def _effects(sky, sin2i, ecosw, share1, amplitudes, shapes, local, first):
    """The small effects at one instant and their derivatives (into `local`).

    `shapes` receives behind SHAPES_FULL_SIZE the effects' light and its derivative to lam2/lam1.
    Returns the derivative to cycles.
    """
    share2 = 1.0 - share1
    proximity_full(sky, sin2i, ecosw, shapes)
    by_cycles = 0.0
    ell = share1 * amplitudes[0] + share2 * amplitudes[1]
    beam1, beam2 = share1 * amplitudes[4], share2 * amplitudes[5]
    for j in range(5):
        slope = (
            ell * shapes[5 + j]
            + amplitudes[2] * shapes[10 + j]
            + amplitudes[3] * shapes[15 + j]
            + beam1 * shapes[20 + j]
            + beam2 * shapes[25 + j]
        )
        if j == 0:
            by_cycles = slope
        elif j == 1:
            local[5] += slope
        elif j == 2:
            local[6] += slope
        elif j == 3:
            local[4] += slope
        else:
            local[7] += slope
    local[first] = share1 * shapes[0]
    local[first + 1] = share2 * shapes[0]
    local[first + 2] = shapes[1]
    local[first + 3] = shapes[2]
    local[first + 4] = share1 * shapes[3]
    local[first + 5] = share2 * shapes[4]
    own = (amplitudes[1] - amplitudes[0]) * shapes[0]
    own += amplitudes[5] * shapes[4] - amplitudes[4] * shapes[3]
    shapes[SHAPES_FULL_SIZE] = _prox(share1, amplitudes, shapes)
    shapes[SHAPES_FULL_SIZE + 1] = own * share1 * share1
    return by_cycles


@njit(cache=True, nogil=True, error_model="numpy")
def band_values(
    time, period, epoch, constants, light_time, radius_sum, ratio, share1, third, windows,
    offsets, weights, table1, table2, effects_on, amplitudes, sin2i, ecosw, flux,
):  # fmt: skip
    """Model light of one band at `time` (n,) [d] into `flux` (n,); no derivatives."""
    r1 = radius_sum / (1.0 + ratio)
    r2 = radius_sum - r1
    share2 = 1.0 - share1
    sky = np.empty(SKY_FULL_SIZE)
    shapes = np.empty(SHAPES_SIZE)
    inverse = 1.0 / ratio
    for i in range(time.size):
        cycles = (time[i] - epoch) / period
        near = _inside(cycles, windows[0], windows[1]) or _inside(cycles, windows[2], windows[3])
        if not near and not effects_on:
            flux[i] = 1.0
            continue
        total = 0.0
        for node in range(offsets.size):
            light = 1.0
            at = cycles + offsets[node]
            if effects_on:
                sky_full(at, constants, light_time, sky)
                delta, z = sky[0], sky[1]
                proximity_shapes(sky[RHO], sky[SIN_L], sky[COS_L], sin2i, ecosw, shapes)
                light += _prox(share1, amplitudes, shapes)
            else:
                delta, z = sky_point_value(at, constants, light_time)
            if delta < radius_sum:
                if z < 0.0:
                    light -= share1 * read_table_value(table1, ratio, delta / r1)
                else:
                    light -= share2 * read_table_value(table2, inverse, delta / r2)
            total += weights[node] * light
        flux[i] = (1.0 - third) * total + third


@njit(cache=True, nogil=True, error_model="numpy")
def band_rows(
    time, period, epoch, constants, light_time, radius_sum, ratio, brightness, share1, third,
    windows, offsets, weights, table1, table2, mean1, mean2, effects_on, amplitudes, sin2i,
    ecosw, flux, active, rows,
):  # fmt: skip
    """Model light into `flux` (n,), and derivatives of the points that have any.

    `active` (n,) receives their indices, `rows` (n, columns) their derivatives; returns their number.
    `mean1`, `mean2` hold the disc means Lambda and their gradients.
    """
    count_ld = mean1.size - 1
    r1 = radius_sum / (1.0 + ratio)
    r2 = radius_sum - r1
    share2 = 1.0 - share1
    light_ratio = share2 / share1
    inverse = 1.0 / ratio
    dark = 1.0 - third
    size_table = 3 + count_ld
    hidden = np.empty(size_table)
    sky = np.empty(SKY_FULL_SIZE)
    shapes = np.empty(SHAPES_FULL_SIZE + 2)
    effects_at = SHARED + 2 * count_ld
    columns = effects_at + (EFFECTS if effects_on else 0)
    local = np.empty(columns)
    found = 0
    for i in range(time.size):
        cycles = (time[i] - epoch) / period
        near = _inside(cycles, windows[0], windows[1]) or _inside(cycles, windows[2], windows[3])
        if not near and not effects_on:
            flux[i] = 1.0
            continue
        row = rows[found]
        for j in range(columns):
            row[j] = 0.0
        total = 0.0
        touched = effects_on
        for node in range(offsets.size):
            at = cycles + offsets[node]
            for j in range(columns):
                local[j] = 0.0
            light = 1.0
            by_ratio = 0.0  # d light / d (lam2/lam1)
            by_cycles = 0.0
            if effects_on:
                sky_full(at, constants, light_time, sky)
                by_cycles = _effects(
                    sky, sin2i, ecosw, share1, amplitudes, shapes, local, effects_at
                )
                light += shapes[SHAPES_FULL_SIZE]
                by_ratio += shapes[SHAPES_FULL_SIZE + 1]
            else:
                sky_point(at, constants, light_time, sky)
            delta = sky[0]
            if delta < radius_sum:
                touched = True
                if sky[1] < 0.0:
                    d = delta / r1
                    read_table(table1, ratio, d, hidden)
                    light -= share1 * hidden[0]
                    by_ratio += hidden[0] * share1 * share1
                    by_delta = -share1 * hidden[1] / r1
                    local[3] += -share1 * (hidden[1] * d / (1.0 + ratio) + hidden[2])
                    local[2] += share1 * hidden[1] * d / radius_sum
                    for j in range(count_ld):
                        local[SHARED + j] += -share1 * hidden[3 + j]
                else:
                    d = delta / r2
                    read_table(table2, inverse, d, hidden)
                    light -= share2 * hidden[0]
                    by_ratio -= hidden[0] * share1 * share1
                    by_delta = -share2 * hidden[1] / r2
                    local[3] += share2 * (
                        hidden[1] * d / (ratio * (1.0 + ratio)) + hidden[2] * inverse * inverse
                    )
                    local[2] += share2 * hidden[1] * d / radius_sum
                    for j in range(count_ld):
                        local[SHARED + count_ld + j] += -share2 * hidden[3 + j]
                by_cycles += by_delta * sky[2]
                local[4] += by_delta * sky[5]
                local[5] += by_delta * sky[3]
                local[6] += by_delta * sky[4]
                local[7] += by_delta * sky[6]
            # lam2/lam1 = J k^2 Lambda2/Lambda1
            local[3] += by_ratio * 2.0 * light_ratio * inverse
            local[8] += by_ratio * light_ratio / brightness
            for j in range(count_ld):
                local[SHARED + j] -= by_ratio * light_ratio * mean1[1 + j] / mean1[0]
                local[SHARED + count_ld + j] += by_ratio * light_ratio * mean2[1 + j] / mean2[0]
            local[0] += -by_cycles * cycles / period
            local[1] += -by_cycles / period
            total += weights[node] * light
            for j in range(columns):
                row[j] += weights[node] * dark * local[j]
        flux[i] = dark * total + third
        row[9] = 1.0 - total
        if touched:
            active[found] = i
            found += 1
    return found


@njit(cache=True, nogil=True, error_model="numpy")
def normal_equations(
    model, observed, weight, starts, trend, slopes, active, found, rows, columns, matrix, gradient,
    levels, expected,
):  # fmt: skip
    """Solve the levels, then accumulate the normal equations with the levels eliminated.

    starts : (s+1,) first row of each segment; trend : (n,) time within the segment, about -1...1
    slopes : bool, a slope beside the level
    matrix (columns, columns), gradient (columns,) : J^T W J and J^T W r are added in place
    levels : (s, 2) receives level and slope; expected : (n,) receives level times model
    Returns chi-squared. Levels and model derivatives are solved together (variable projection):
    the Schur complement of the level block is what is left for the model.
    """
    chi2 = 0.0
    cursor = 0
    cross = np.zeros((2, columns))
    for s in range(starts.size - 1):
        low, high = starts[s], starts[s + 1]
        a00 = a01 = a11 = b0 = b1 = 0.0
        for i in range(low, high):
            wf = weight[i] * model[i]
            a00 += wf * model[i]
            b0 += wf * observed[i]
            if slopes:
                a01 += wf * model[i] * trend[i]
                a11 += wf * model[i] * trend[i] * trend[i]
                b1 += wf * observed[i] * trend[i]
        if a00 <= 0.0:
            levels[s, 0] = 1.0
            levels[s, 1] = 0.0
            for i in range(low, high):
                expected[i] = model[i]
            while cursor < found and active[cursor] < high:
                cursor += 1
            continue
        determinant = a00 * a11 - a01 * a01
        sloped = slopes and determinant > 1e-12 * a00 * a00
        if sloped:
            levels[s, 0] = (b0 * a11 - b1 * a01) / determinant
            levels[s, 1] = (b1 * a00 - b0 * a01) / determinant
        else:
            levels[s, 0] = b0 / a00
            levels[s, 1] = 0.0
        for i in range(low, high):
            expected[i] = (levels[s, 0] + levels[s, 1] * trend[i]) * model[i]
            residual = observed[i] - expected[i]
            chi2 += weight[i] * residual * residual
        cross[:] = 0.0
        while cursor < found and active[cursor] < high:
            i = active[cursor]
            row = rows[cursor]
            level = levels[s, 0] + levels[s, 1] * trend[i]
            wl = weight[i] * level
            wr = wl * (observed[i] - expected[i])
            wll = wl * level
            wf = wl * model[i]
            wft = wf * trend[i]
            for j in range(columns):
                gradient[j] += wr * row[j]
                cross[0, j] += wf * row[j]
                cross[1, j] += wft * row[j]
                factor = wll * row[j]
                for k in range(j + 1):
                    matrix[j, k] += factor * row[k]
            cursor += 1
        for j in range(columns):
            if sloped:
                x0 = (cross[0, j] * a11 - cross[1, j] * a01) / determinant
                x1 = (cross[1, j] * a00 - cross[0, j] * a01) / determinant
            else:
                x0 = cross[0, j] / a00
                x1 = 0.0
            for k in range(j + 1):
                matrix[j, k] -= x0 * cross[0, k] + x1 * cross[1, k]
    for j in range(columns):
        for k in range(j):
            matrix[k, j] = matrix[j, k]
    return chi2
