"""Compiled: one band's light curve with its derivatives, and its normal equations.

The local quantities of a band, in the order of the derivative's columns:

    0 period [d]   1 epoch [d]   2 r1+r2   3 k   4 cos^2 i   5 e cos w   6 e sin w
    7 light time [cycles per a]   8 J   9 third light
    10 ... 10+m-1 limb darkening of star 1   10+m ... 10+2m-1 of star 2
    then, where the small effects are on: ellipsoidal 1, 2, reflection 1, 2, beaming 1, 2

    F = (1 - l3) [1 - loss + prox] + l3,     loss = lam1 beta1 + lam2 beta2

The loss of light and its derivatives are functions of phase alone, so they are computed once on a
grid of phases and read from it for every point (`_grid`). The small effects are smooth and cheap: they
are computed at each point. No checks, nothing allocated per point, the GIL released.
"""

from __future__ import annotations

import numpy as np

from shadowscale._compiled import compiled
from shadowscale.light._grid import FIXED, grid_loss, grid_losses
from shadowscale.light.proximity import (
    SHAPES_FULL_SIZE,
    SHAPES_SIZE,
    proximity_full,
    proximity_shapes,
)
from shadowscale.orbit._kernels import COS_L, RHO, SIN_L, SKY_FULL_SIZE, sky_full

SHARED = 10  # columns before limb darkening
EFFECTS = 6  # columns after it

# Three Gauss-Legendre nodes average the small effects over an exposure: they turn twice an orbit at
# most, so that half a tenth of a cycle is exact to 1e-9.
_NODES = np.array([-np.sqrt(0.6), 0.0, np.sqrt(0.6)])
_WEIGHTS = np.array([5.0, 8.0, 5.0]) / 18.0


@compiled
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


@compiled
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


@compiled
def band_values(
    time, period, epoch, half_exposure, third, grid, columns, constants, light_time, share1,
    effects_on, amplitudes, sin2i, ecosw, flux,
):  # fmt: skip
    """Model light of one band at `time` (n,) [d] into `flux` (n,); no derivatives."""
    sky = np.empty(SKY_FULL_SIZE)
    shapes = np.empty(SHAPES_SIZE)
    for i in range(time.size):
        cycles = (time[i] - epoch) / period
        light = 1.0 - grid_loss(grid, columns, cycles, half_exposure)
        if effects_on:
            for node in range(3):
                sky_full(cycles + half_exposure * _NODES[node], constants, light_time, sky)
                proximity_shapes(sky[RHO], sky[SIN_L], sky[COS_L], sin2i, ecosw, shapes)
                light += _WEIGHTS[node] * _prox(share1, amplitudes, shapes)
        flux[i] = (1.0 - third) * light + third


@compiled
def band_rows(
    time, period, epoch, half_exposure, third, grid, constants, light_time, share1, brightness,
    ratio, mean1, mean2, effects_on, amplitudes, sin2i, ecosw, flux, active, rows,
):  # fmt: skip
    """Model light into `flux` (n,), and derivatives of the points that have any.

    `active` (n,) receives their indices, `rows` (n, columns) their derivatives; returns their number.
    """
    count_ld = mean1.size - 1
    dark = 1.0 - third
    light_ratio = (1.0 - share1) / share1
    inner = FIXED + 2 * count_ld
    losses = np.empty(inner)
    sky = np.empty(SKY_FULL_SIZE)
    shapes = np.empty(SHAPES_FULL_SIZE + 2)
    effects_at = SHARED + 2 * count_ld
    columns = effects_at + (EFFECTS if effects_on else 0)
    local = np.zeros(columns)
    found = 0
    for i in range(time.size):
        cycles = (time[i] - epoch) / period
        touched = grid_losses(grid, inner, cycles, half_exposure, losses)
        if not touched and not effects_on:
            flux[i] = 1.0
            continue
        row = rows[found]
        light = 1.0
        by_cycles = 0.0
        for j in range(columns):
            row[j] = 0.0
        if touched:
            # losses: 0 loss, 1 to cycles, 2 r1+r2, 3 k, 4 cos2i, 5, 6, 7 light time, 8 J, limb darkening
            light -= losses[0]
            by_cycles -= losses[1]
            for j in range(2, 9):
                row[j] = -dark * losses[j]
            for j in range(2 * count_ld):
                row[SHARED + j] = -dark * losses[9 + j]
        if effects_on:
            by_ratio = 0.0
            for node in range(3):
                sky_full(cycles + half_exposure * _NODES[node], constants, light_time, sky)
                for j in range(columns):
                    local[j] = 0.0
                turn = _effects(sky, sin2i, ecosw, share1, amplitudes, shapes, local, effects_at)
                weight = _WEIGHTS[node]
                by_cycles += weight * turn
                light += weight * shapes[SHAPES_FULL_SIZE]
                by_ratio += weight * shapes[SHAPES_FULL_SIZE + 1]
                for j in range(columns):
                    row[j] += weight * dark * local[j]
            by_ratio *= dark * light_ratio
            row[3] += by_ratio * 2.0 / ratio
            row[8] += by_ratio / brightness
            for j in range(count_ld):
                row[SHARED + j] -= by_ratio * mean1[1 + j] / mean1[0]
                row[SHARED + count_ld + j] += by_ratio * mean2[1 + j] / mean2[0]
        flux[i] = dark * light + third
        row[0] = -dark * by_cycles * cycles / period
        row[1] = -dark * by_cycles / period
        row[9] = 1.0 - light
        active[found] = i
        found += 1
    return found


@compiled
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
