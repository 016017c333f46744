"""Where the fit starts: which period velocities choose, how a period may be told, what cannot tell it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from fit_examples import EPOCH, PERIOD, ordinary
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.start import period_of_velocities, seen_once, wished
from shadowscale.timing.eclipses import measure_eclipses
from shadowscale.timing.results import PeriodCandidate, PeriodSearch


def _search(*candidates: tuple[float, float]) -> PeriodSearch:
    """A search with candidates (part of the true period, score), the first chosen."""
    listed = tuple(PeriodCandidate(PERIOD * n, EPOCH, score, "") for n, score in candidates)
    return PeriodSearch(
        period=listed[0].period, epoch=EPOCH, period_error=1e-5, candidates=listed, words="",
        ambiguous=False, other=None, numbers={},
    )  # fmt: skip


@pytest.mark.parametrize("score", [0.9, 0.005], ids=["fits as well", "fits much worse"])
@pytest.mark.parametrize("wrong", [0.5, 2.0, 1.5])
def test_velocities_choose_the_period(wrong: float, score: float) -> None:
    found, _ = period_of_velocities(_search((wrong, 1.0), (1.0, score)), ordinary().velocities)

    assert found == PERIOD


def test_velocities_leave_the_right_period() -> None:
    search = _search((1.0, 1.0), (2.0, 0.9), (0.5, 0.9), (1.0003, 0.01))

    assert period_of_velocities(search, ordinary().velocities) == (PERIOD, EPOCH)


def test_without_velocities_the_eclipses_decide() -> None:
    assert period_of_velocities(_search((0.5, 1.0), (1.0, 0.9)), None) == (0.5 * PERIOD, EPOCH)


@pytest.mark.parametrize(
    "plan",
    [
        Plan(period=PERIOD),
        Plan(fixed={"period": (PERIOD,)}),
        Plan(priors=(Prior("period", (PERIOD,), (1e-5,)),)),
    ],
    ids=["given", "held", "prior"],
)
def test_a_period_may_be_told_in_three_ways(plan: Plan) -> None:
    assert wished(plan, "period") == PERIOD
    assert wished(plan, "epoch") is None


def test_one_cycle_tells_no_period() -> None:
    known = ordinary()
    measured = measure_eclipses(known.photometry, period=PERIOD, epoch=EPOCH)
    cycles = (known.photometry.time - EPOCH) / PERIOD
    first = cycles - cycles.min() < 0.9
    reasons = (*known.photometry.reasons, "later")
    later = np.where(first, known.photometry.why, len(reasons))

    assert not seen_once(measured, known.photometry)
    assert seen_once(measured, replace(known.photometry, why=later, reasons=reasons))
