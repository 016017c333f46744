"""Derivatives, chi-squared and normal equations of one band against differences and dense matrices."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise
from math import acos, cos, degrees, radians, sqrt

import numpy as np
import pytest

from derivatives import check_derivatives
from pair_light import BAND, LIMB, PAIRS, dense_times, pair
from shadowscale.fit import band_model
from shadowscale.fit.band_model import BandModel
from shadowscale.fit.observed import BandData
from shadowscale.fit.vector import band_keys
from shadowscale.light import _band

EFFECTS = {
    "ellipsoidal1": 0.012, "ellipsoidal2": 0.008, "reflection1": 0.004, "reflection2": 0.006,
    "beaming1": 0.001, "beaming2": 0.002,
}  # fmt: skip
LIGHT_TIME = 2e-5


@pytest.fixture(autouse=True)
def light_time_of_its_own(monkeypatch):
    """Light time as a quantity like the others, not tied to the velocities."""
    monkeypatch.setattr(
        band_model, "light_time_of", lambda values: values.get("light time", LIGHT_TIME)
    )


def local_point(system):
    """The local quantities of a system, in the kernel's order."""
    values = {**system.values, "light time": LIGHT_TIME}
    values["inclination"] = cos(radians(values["inclination"])) ** 2
    keys = ["light time" if name is None else name for name in band_keys(system, BAND)]
    return [name for name in keys if name in values], np.array(
        [values[name] for name in keys if name in values]
    )


def light_at(system, names, times):
    """The light as a function of the local quantities."""

    def light(point):
        values = {**system.values, **dict(zip(names, point, strict=True))}
        values["inclination"] = degrees(acos(sqrt(max(values["inclination"], 0.0))))
        return BandModel.at(system, values, BAND).light(times)

    return light


def calm_times(system, margin=2e-3):
    """Sorted times that stay away from contacts, where second derivatives are infinite."""
    times = dense_times(system, 600)
    model = BandModel.at(system, system.values, BAND)
    cycles = (times - system.value("epoch")) / system.value("period")
    keep = np.ones(times.size, dtype=bool)
    reach = margin + model.curve[_band.HALF_EXPOSURE] * np.array([-1.0, 0.0, 1.0])
    for middle, half, *_ in model.pieces[: int(model.pieces[8, 0])]:
        for end in (middle - half, middle + half):
            for shift in reach - margin:
                away = cycles + shift - end
                keep &= np.abs(away - np.round(away)) > margin
    return times[keep]


@pytest.mark.parametrize("exposure", [0.0, 1800.0])
@pytest.mark.parametrize("law", LIMB)
@pytest.mark.parametrize("name", ["total", "partial", "eccentric", "larger companion"])
def test_derivatives_are_those_of_the_light(name, law, exposure):
    system = pair(name, law, epoch=0.3127, exposure=exposure, light_time=True, effects=EFFECTS)
    times = calm_times(system)
    names, point = local_point(system)

    rows = BandModel.at(system, system.values, BAND, derivatives=True).derivatives(times)

    assert rows.shape == (times.size, len(names))
    # The period shifts far cycles, so that its difference needs a smaller step than the others.
    light = light_at(system, names, times)
    check_derivatives(
        lambda period: light(np.concatenate([period, point[1:]])), rows[:, :1], point[:1],
        step=2e-6, tolerance=3e-5,
    )  # fmt: skip
    check_derivatives(
        lambda rest: light(np.concatenate([point[:1], rest])), rows[:, 1:], point[1:],
        step=1e-5, tolerance=6e-5,
    )  # fmt: skip


@pytest.mark.parametrize("name", PAIRS)
def test_light_is_the_same_with_and_without_derivatives(name):
    system = pair(name, effects=EFFECTS)
    times = dense_times(system)

    plain = BandModel.at(system, system.values, BAND).light(times)
    rich = BandModel.at(system, system.values, BAND, derivatives=True).light(times)

    np.testing.assert_allclose(plain, rich, rtol=0, atol=1e-13)


def test_times_may_come_in_any_order():
    system = pair("eccentric", effects=EFFECTS, exposure=600.0)
    times = dense_times(system)
    mixed = np.random.default_rng(1).permutation(times.size)
    model = BandModel.at(system, system.values, BAND)

    np.testing.assert_array_equal(model.light(times[mixed]), model.light(times)[mixed])


def test_times_that_are_no_numbers_have_no_light():
    model = BandModel.at(pair("total"), pair("total").values, BAND)
    times = np.array([2459000.3127, np.nan, 2459000.9, -np.inf, np.inf])

    light = model.light(times)

    np.testing.assert_array_equal(np.isnan(light), ~np.isfinite(times))
    np.testing.assert_array_equal(light[[0, 2]], model.light(times[[0, 2]]))
    assert model.light(np.empty(0)).size == 0


def made_up(system, levels, *, seed=4, count=3000):
    """Noisy light in segments with levels and slopes of their own."""
    random = np.random.default_rng(seed)
    times = dense_times(system, count)
    nights = np.zeros(times.size) if levels == "one" else np.floor(times - system.value("epoch"))
    starts = np.concatenate([[0], np.flatnonzero(np.diff(nights)) + 1, [times.size]])
    trend = np.concatenate([np.linspace(-1, 1, high - low) for low, high in pairwise(starts)])
    segment = np.repeat(np.arange(starts.size - 1), np.diff(starts))
    level = 1.02 + 0.01 * random.standard_normal(starts.size - 1)[segment]
    flux = BandModel.at(system, system.values, BAND).light(times) * (level + 0.003 * trend)
    flux += 1e-3 * random.standard_normal(times.size)
    weight = 1e6 * random.uniform(0.5, 2.0, times.size)
    data = BandData(
        BAND, times, flux, weight, starts.astype(np.int64), trend, np.arange(times.size)
    )
    return data, segment


def dense_normal(data, segment, model, slopes):
    """Chi-squared, J^T W r and J^T W J by solving for all columns, levels and slopes explicit."""
    light, rows = model.light(data.time), model.derivatives(data.time)
    own = np.zeros((data.time.size, data.segments))
    own[np.arange(data.time.size), segment] = light
    linear = np.hstack([own, own * data.trend[:, None]]) if slopes else own
    root = np.sqrt(data.weight)
    solved = np.linalg.lstsq(linear * root[:, None], data.flux * root, rcond=1e-13)[0]
    expected = linear @ solved
    level = expected / light
    jacobian = rows * (level * root)[:, None]
    residual = (data.flux - expected) * root
    # What the levels can imitate is taken out of each column (Golub & Pereyra 1973, variable projection).
    q, r = np.linalg.qr(linear * root[:, None])
    q = q[:, np.abs(np.diag(r)) > 1e-9 * np.abs(r).max()]
    jacobian = jacobian - q @ (q.T @ jacobian)
    return residual @ residual, jacobian.T @ residual, jacobian.T @ jacobian


def chi2_of(data, model, wanted, *, slopes):
    size = data.time.size
    matrix, gradient = np.empty((wanted.size, wanted.size)), np.empty(wanted.size)
    levels = np.empty((data.segments, 2))
    chi2 = _band.band_chi2(
        data.time, data.flux, data.weight, data.starts, data.trend, slopes, data.reference,
        data.blocks, model.curve, model.pieces, model.cells, model.effects, wanted,
        np.empty(size, dtype=np.int64), np.empty((3, size)), np.empty((_band.PLACES, size)),
        matrix, gradient, levels,
    )  # fmt: skip
    return chi2, gradient, matrix


@pytest.mark.parametrize("levels", ["one", "night", "trend"])
@pytest.mark.parametrize(
    ("name", "changes"),
    [
        ("total", {}),
        ("eccentric", {"exposure": 1800.0}),
        ("partial", {"effects": EFFECTS, "light_time": True}),
        ("one eclipse", {"effects": EFFECTS, "exposure": 600.0}),
    ],
)
def test_normal_equations_are_those_of_dense_matrices(name, changes, levels):
    system = pair(name, **changes)
    data, segment = made_up(system, levels)
    moved = {**system.values, "radius_sum": system.value("radius_sum") * 1.0003}
    model = BandModel.at(system, moved, BAND, derivatives=True)
    slopes = levels == "trend"

    chi2, gradient, matrix = chi2_of(data, model, np.arange(model.columns), slopes=slopes)

    chi2_dense, gradient_dense, matrix_dense = dense_normal(data, segment, model, slopes)
    size = np.sqrt(np.maximum(np.diag(matrix_dense), 1e-12))
    assert chi2 == pytest.approx(chi2_dense, rel=1e-10)
    np.testing.assert_allclose(gradient / size, gradient_dense / size, rtol=0, atol=1e-5)
    np.testing.assert_allclose(
        matrix / np.outer(size, size), matrix_dense / np.outer(size, size), rtol=0, atol=1e-7
    )


def test_only_wanted_quantities_are_accumulated():
    system = pair("total", effects=EFFECTS)
    data, _ = made_up(system, "night")
    model = BandModel.at(system, system.values, BAND, derivatives=True)
    some = np.array([9, 2, 4])

    chi2, gradient, matrix = chi2_of(data, model, np.arange(model.columns), slopes=False)
    chi2_some, gradient_some, matrix_some = chi2_of(data, model, some, slopes=False)
    plain = BandModel.at(system, system.values, BAND)
    chi2_alone, *_ = chi2_of(data, plain, np.empty(0, dtype=np.int64), slopes=False)

    assert chi2_some == chi2
    assert chi2_alone == pytest.approx(chi2, rel=1e-12)
    np.testing.assert_allclose(gradient_some, gradient[some], rtol=1e-9)
    np.testing.assert_allclose(matrix_some, matrix[np.ix_(some, some)], rtol=1e-12)


def test_points_outside_eclipse_count_though_nobody_looks_at_them():
    """Chi-squared of a bad point far from any eclipse, summed in its block."""
    system = pair("wide")
    data, _ = made_up(system, "one")
    quiet = int(np.argmax(BandModel.at(system, system.values, BAND).light(data.time) == 1.0)) + 40
    flux = data.flux.copy()
    flux[quiet] += 0.5
    spoilt = replace(data, flux=flux)
    model = BandModel.at(system, system.values, BAND)
    none = np.empty(0, dtype=np.int64)

    before, *_ = chi2_of(data, model, none, slopes=False)
    after, *_ = chi2_of(spoilt, model, none, slopes=False)

    light = model.light(data.time)
    for each, chi2 in ((data, before), (spoilt, after)):
        level = (each.weight * each.flux * light).sum() / (each.weight * light**2).sum()
        expected = (each.weight * (each.flux - level * light) ** 2).sum()
        assert chi2 == pytest.approx(expected, rel=1e-11)


def test_the_same_numbers_every_time():
    system = pair("eccentric", effects=EFFECTS)
    data, _ = made_up(system, "trend")
    model = BandModel.at(system, system.values, BAND, derivatives=True)

    first = chi2_of(data, model, np.arange(model.columns), slopes=True)
    second = chi2_of(data, model, np.arange(model.columns), slopes=True)

    assert first[0] == second[0]
    np.testing.assert_array_equal(first[1], second[1])
    np.testing.assert_array_equal(first[2], second[2])
