"""The spectrum of boxes, against sums over every box computed with numpy."""

import numpy as np
import pytest

from shadowscale.progress import SILENT
from shadowscale.timing import _box_kernels as boxes
from shadowscale.timing.box_search import FEWEST_IN_BOX, MOST_PARTS, phase_bins, spectrum
from shadowscale.timing.search_data import SearchData

PERIOD = 2.37


def light(seed, *, points=900, span=60.0, depth=0.05):
    """Flat light with two box-shaped eclipses, the second half as deep, and noise of 1 %."""
    random = np.random.default_rng(seed)
    time = np.sort(random.uniform(0, span, points))
    phase = time / PERIOD % 1
    value = 0.01 * random.standard_normal(points)
    value -= depth * (abs(phase - 0.3) < 0.03) + depth / 2 * (abs(phase - 0.83) < 0.03)
    weight = random.uniform(0.5, 2.0, points) * 1e4
    time, value = time - time[0], value - weight @ value / weight.sum()
    return SearchData(0.0, time, value, weight)


def table_of(data, frequency, *, parts=1, best=0.0, bins=None):
    bins = phase_bins(frequency) if bins is None else bins
    table = np.empty((frequency.size, 8))
    boxes.box_spectrum(
        data.time, data.value, data.weight, frequency, bins, parts, 1, FEWEST_IN_BOX, best, table
    )
    return table


def every_box(data, frequency, bins):
    """Gain of all bins, and the largest of one box, by trying every place and width of the kernel."""
    cell = np.minimum((data.time * frequency % 1 * bins).astype(int), bins - 1)
    light, mass, count = (
        np.bincount(cell, each, bins) for each in (data.weight * data.value, data.weight, None)
    )
    filled = mass > 0
    best, width = 0.0, 1
    while width <= min(bins // 4, boxes.WIDEST):
        for start in range(bins):
            rows = (start + np.arange(width)) % bins
            s, m = light[rows].sum(), mass[rows].sum()
            if s < 0 and count[rows].sum() >= FEWEST_IN_BOX:
                best = max(best, s * s * mass.sum() / (m * (mass.sum() - m)))
        width = max(width + 1, int(width * 1.4))
    return float((light[filled] ** 2 / mass[filled]).sum()), best


@pytest.mark.parametrize("seed", range(4))
@pytest.mark.parametrize("frequency", [1 / PERIOD, 0.3, 1.7])
def test_gains_are_those_of_every_box(seed, frequency):
    data = light(seed)
    (row,) = table_of(data, np.array([frequency]), bins=np.array([80]))
    dispersion, best = every_box(data, frequency, 80)
    assert row[boxes.GAIN_BINS] == pytest.approx(dispersion, rel=1e-9)
    assert row[boxes.GAIN_ONE] == pytest.approx(best, rel=1e-9)
    assert row[boxes.GAIN_TWO] >= row[boxes.GAIN_ONE]


def test_both_eclipses_are_found_where_they_are():
    (row,) = table_of(light(5), np.array([1 / PERIOD]))
    first = row[boxes.PHASE] + row[boxes.WIDTH] / 2
    second = row[boxes.PHASE_TWO] + row[boxes.WIDTH_TWO] / 2
    zero = np.sort(np.random.default_rng(5).uniform(0, 60.0, 900))[0] / PERIOD % 1
    assert first % 1 == pytest.approx((0.3 - zero) % 1, abs=0.02)
    assert second % 1 == pytest.approx((0.83 - zero) % 1, abs=0.02)


@pytest.mark.parametrize("seed", range(3))
def test_frequencies_folded_together_gain_what_each_gains_alone(seed):
    data = light(seed, points=6000, span=200.0)
    step = 0.6 * 0.03 / 200
    frequency = 1 / PERIOD + step * np.arange(-150.0, 150.0)
    alone, together = (table_of(data, frequency, parts=parts) for parts in (1, MOST_PARTS))
    peak = int(np.argmax(alone[:, boxes.GAIN_TWO]))
    assert abs(int(np.argmax(together[:, boxes.GAIN_TWO])) - peak) <= 1
    most = [float(each[:, boxes.GAIN_TWO].max()) for each in (alone, together)]
    assert most[1] == pytest.approx(most[0], rel=0.1)
    assert not np.array_equal(alone, together)


@pytest.mark.parametrize("points", [300, 3000])
def test_only_what_cannot_gain_enough_is_passed_over(points):
    data = light(7, points=points)
    frequency = np.append(np.linspace(0.02, 3.0, 400), 1 / PERIOD)
    alone = np.concatenate([table_of(data, frequency[n : n + 1]) for n in range(frequency.size)])
    best = float(alone[:, boxes.GAIN_TWO].max())
    spared = table_of(data, frequency, best=best)
    passed = spared[:, boxes.GAIN_ONE] == 0
    assert passed.mean() > 0.1
    assert alone[passed, boxes.GAIN_TWO].max() < boxes.PART * best
    kept = spared[~passed, boxes.GAIN_ONE]
    np.testing.assert_allclose(kept, alone[~passed, boxes.GAIN_ONE], rtol=1e-9)


def test_few_points_and_few_frequencies_are_enough():
    data = light(8, points=25)
    for count in (1, 2, 17):
        seen = spectrum(data, np.linspace(0.3, 0.5, count), SILENT)
        assert seen.table.shape == (count, 8)
        assert np.isfinite(seen.table).all()
