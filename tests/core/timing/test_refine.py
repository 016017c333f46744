"""The last digits of an ephemeris: templates that fit, and a period within its error of the truth."""

import numpy as np
import pytest

from shadowscale.timing.fold import Dip
from shadowscale.timing.light_points import light_points
from shadowscale.timing.profile import Discs
from shadowscale.timing.refine import polished, refined
from simple_eclipses import SimpleBinary, ground_times, observe


@pytest.mark.parametrize("ratio", [0.25, 0.5, 0.9])
def test_discs_stay_good_templates_in_every_round(ratio):
    """Against the period of an independent simulation of discs."""
    rng = np.random.default_rng(91)
    pair = SimpleBinary(3.2, 2459003.3, 0.15, ratio, 88.5)
    points = light_points(observe(pair, ground_times(rng, nights=40), 5e-4, rng))
    origin = float(np.median(points.time))
    middle = (pair.epoch - origin) / pair.period % 1
    dips = tuple(Dip((middle + away) % 1, 0.06, 0.1 * ratio, 100.0) for away in (0.0, 0.5))
    rough = refined(points, pair.period * (1 + 2e-6), origin, dips)
    better = polished(points, rough)
    assert better is not rough
    assert abs(better.period - pair.period) < 4 * better.period_error
    for before, after in zip(rough.eclipses, better.eclipses, strict=True):
        assert isinstance(after.fit.best.profile, Discs)
        assert after.fit.best.scale < min(2.0, before.fit.best.scale)
