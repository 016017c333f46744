"""Compiled shape of an eclipse: light and derivatives, least squares, many shapes on a grid."""

from __future__ import annotations

import numpy as np

from shadowscale._compiled import compiled
from shadowscale.data.photometry import Floats, Ints


@compiled
def eclipse_rows(
    phase: Floats,
    band: Ints,
    bands: int,
    centre: float,
    nodes: Floats,
    node_weights: Floats,
    table: Floats,
    values: Floats,
    model: Floats,
    jacobian: Floats,
) -> None:
    """Light of one eclipse and its derivatives (the equations are those of `shape_fit`).

    phase : (n,) [cycles];  band : (n,) int64;  nodes, node_weights : (j,) parts of the exposure [cycles]
    table : (2, s + 1) light lost, and its slope over the separation, on even separations 0...1;
        (2, 0) for a trapezoid
    values : (5 + 2 bands,) middle, duration, shape of ingress and of egress, depths, levels, slope
    model : (n,), jacobian : (n, 5 + 2 bands), written
    """
    middle, duration = values[0], values[1]
    edge = np.pi * duration
    sine_edge = np.sin(edge)
    for i in range(phase.size):
        lost = 0.0
        by_middle = 0.0
        by_duration = 0.0
        by_ingress = 0.0
        by_egress = 0.0
        for j in range(nodes.size):
            angle = 2 * np.pi * (phase[i] + nodes[j] - middle)
            # Beyond a quarter cycle the other side of the orbit begins.
            if abs(angle) > np.pi / 2:
                continue
            x = np.sin(angle) / sine_edge
            if abs(x) >= 1:
                continue
            right = angle > 0
            f, by_x, by_shape = _lost(x, values[3] if right else values[2], table)
            w = node_weights[j]
            lost += w * f
            by_middle -= w * by_x * 2 * np.pi * np.cos(angle) / sine_edge
            by_duration -= w * by_x * x * np.pi * np.cos(edge) / sine_edge
            if right:
                by_egress += w * by_shape
            else:
                by_ingress += w * by_shape
        b = band[i]
        depth = values[4 + b]
        level = values[4 + bands + b]
        away = phase[i] - centre
        tilt = 1 + values[values.size - 1] * away
        light = 1 - depth * lost
        dark = -level * tilt * depth
        model[i] = level * tilt * light
        for column in range(values.size):
            jacobian[i, column] = 0.0
        jacobian[i, 0] = dark * by_middle
        jacobian[i, 1] = dark * by_duration
        jacobian[i, 2] = dark * by_ingress
        jacobian[i, 3] = dark * by_egress
        jacobian[i, 4 + b] = -level * tilt * lost
        jacobian[i, 4 + bands + b] = tilt * light
        jacobian[i, values.size - 1] = level * away * light


@compiled
def _lost(
    x: float,
    shape: float,
    table: Floats,
) -> tuple[float, float, float]:
    """Light lost relative to the middle, its derivatives by x and by the shape parameter."""
    if table.shape[1] == 0:
        raw = (1 - abs(x)) / shape
        if raw >= 1:
            return 1.0, 0.0, 0.0
        return raw, -np.sign(x) / shape, -raw / shape
    value, curve = _read(np.sqrt(shape + (1 - shape) * x * x), table)
    peak, peak_curve = _read(np.sqrt(shape), table)
    value /= peak
    curve /= peak
    by_shape = curve * (1 - x * x) / 2 - value * peak_curve / (2 * peak)
    return value, curve * (1 - shape) * x, by_shape


@compiled
def _read(
    separation: float,
    table: Floats,
) -> tuple[float, float]:
    """A table of even steps read at a separation 0...1, with its slope over the separation (finite at 0)."""
    steps = table.shape[1] - 1
    place = min(separation, 1.0) * steps
    low = min(int(place), steps - 1)
    part = place - low
    value = table[0, low] * (1 - part) + table[0, low + 1] * part
    return value, table[1, low] * (1 - part) + table[1, low + 1] * part


@compiled
def least_shape(
    phase: Floats,
    flux: Floats,
    sigma: Floats,
    band: Ints,
    bands: int,
    centre: float,
    nodes: Floats,
    node_weights: Floats,
    table: Floats,
    low: Floats,
    high: Floats,
    symmetric: bool,
    stop: Floats,
    values: Floats,
    normal: Floats,
) -> float:
    """Levenberg-Marquardt for the shape of one eclipse within limits; returns the least chi2.

    The first arrays as in `eclipse_rows`; low, high : (m,) limits
    symmetric : egress like ingress;  stop : most steps, gain in chi2 that ends them, and that in parts of chi2
    values : (m,) start, then the solution;  normal : (m, m) information matrix there, written
    """
    size = values.size
    model = np.empty(phase.size)
    jacobian = np.empty((phase.size, size))
    gradient = np.empty(size)
    trial_normal = np.empty((size, size))
    trial_gradient = np.empty(size)
    trial = np.empty(size)
    _bound(values, low, high, symmetric)
    eclipse_rows(phase, band, bands, centre, nodes, node_weights, table, values, model, jacobian)
    chi2 = _information(flux, sigma, model, jacobian, symmetric, normal, gradient)
    damping = 1e-3
    for _ in range(int(stop[0])):
        trial[:] = values
        _add_step(trial, normal, gradient, low, high, damping)
        _bound(trial, low, high, symmetric)
        eclipse_rows(phase, band, bands, centre, nodes, node_weights, table, trial, model, jacobian)
        gain = chi2 - _information(
            flux, sigma, model, jacobian, symmetric, trial_normal, trial_gradient
        )
        if gain >= 0:
            values[:] = trial
            normal[:] = trial_normal
            gradient[:] = trial_gradient
            chi2 -= gain
            if gain < stop[1] + stop[2] * chi2 and damping <= 1:
                break
            damping = max(damping / 10, 1e-9)
        elif damping > 1e5:
            break
        else:
            damping *= 10
    return chi2


@compiled
def _bound(values: Floats, low: Floats, high: Floats, symmetric: bool) -> None:
    """Into the limits, and the egress like the ingress where those are tied."""
    for i in range(values.size):
        values[i] = min(max(values[i], low[i]), high[i])
    if symmetric:
        values[3] = values[2]


@compiled
def _information(
    flux: Floats,
    sigma: Floats,
    model: Floats,
    jacobian: Floats,
    symmetric: bool,
    normal: Floats,
    gradient: Floats,
) -> float:
    """chi2; the normal matrix (m, m) and gradient (m,) are written. A tied egress has none of its own."""
    size = gradient.size
    normal[:] = 0.0
    gradient[:] = 0.0
    chi2 = 0.0
    for i in range(flux.size):
        weight = 1 / sigma[i]
        residual = (flux[i] - model[i]) * weight
        chi2 += residual * residual
        row = jacobian[i]
        if symmetric:
            row[2] += row[3]
            row[3] = 0.0
        for a in range(size):
            left = row[a] * weight
            if left == 0.0:
                continue
            gradient[a] += left * residual
            for b in range(a + 1):
                normal[a, b] += left * row[b] * weight
    for a in range(size):
        for b in range(a):
            normal[b, a] = normal[a, b]
    return chi2


@compiled
def _add_step(
    values: Floats, normal: Floats, gradient: Floats, low: Floats, high: Floats, damping: float
) -> None:
    """Add a damped step; what stands at a limit and is pushed outward takes no part in it."""
    size = values.size
    top = 0.0
    for a in range(size):
        top = max(top, normal[a, a])
    free = np.empty(size, np.int64)
    count = 0
    for a in range(size):
        outward = (values[a] <= low[a] and gradient[a] < 0) or (
            values[a] >= high[a] and gradient[a] > 0
        )
        if not outward and normal[a, a] > 0:
            free[count] = a
            count += 1
    # Cholesky factor of the damped matrix of the free parameters, then both substitutions.
    factor = np.zeros((count, count))
    step = np.zeros(count)
    for a in range(count):
        for b in range(a + 1):
            total = normal[free[a], free[b]]
            if a == b:
                total = total * (1 + damping) + 1e-12 * top
            for c in range(b):
                total -= factor[a, c] * factor[b, c]
            if a == b:
                factor[a, a] = np.sqrt(max(total, 1e-14 * top))
            else:
                factor[a, b] = total / factor[b, b]
        total = gradient[free[a]]
        for c in range(a):
            total -= factor[a, c] * step[c]
        step[a] = total / factor[a, a]
    for a in range(count - 1, -1, -1):
        total = step[a]
        for c in range(a + 1, count):
            total -= factor[c, a] * step[c]
        step[a] = total / factor[a, a]
        values[free[a]] += step[a]


@compiled
def shape_grid(
    phase: Floats,
    flux: Floats,
    sigma: Floats,
    band: Ints,
    bands: int,
    middle: float,
    durations: Floats,
    shapes: Floats,
    tables: Floats,
    stretches: Floats,
    chi2: Floats,
) -> None:
    """chi2 of many shapes, with the depth and level of each band solved for each.

    durations, shapes : (k, s) first guess of the duration and the shape parameter for each table
    tables : (k, 2, steps + 1);  stretches : (t,) factors on the durations;  chi2 : (k, s, t), written
    """
    sums = np.empty((bands, 6))
    for k in range(tables.shape[0]):
        for s in range(shapes.shape[1]):
            for t in range(stretches.size):
                sine_edge = np.sin(np.pi * durations[k, s] * stretches[t])
                sums[:] = 0.0
                for i in range(phase.size):
                    angle = 2 * np.pi * (phase[i] - middle)
                    x = np.sin(angle) / sine_edge
                    f = 0.0
                    if abs(x) < 1 and abs(angle) < np.pi / 2:
                        f = _lost(x, shapes[k, s], tables[k])[0]
                    w = 1 / sigma[i] ** 2
                    row = sums[band[i]]
                    row[0] += w
                    row[1] += w * f
                    row[2] += w * f * f
                    row[3] += w * flux[i]
                    row[4] += w * flux[i] * f
                    row[5] += w * flux[i] * flux[i]
                total = 0.0
                for b in range(bands):
                    n, sf, sff, sy, syf, syy = sums[b]
                    if n == 0:
                        continue
                    total += syy - sy * sy / n
                    spread = sff - sf * sf / n
                    if spread > 0:
                        total -= (syf - sf * sy / n) ** 2 / spread
                chi2[k, s, t] = total
