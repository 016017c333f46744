"""Following a solution: the same minimum as the whole solver, and the refusals to follow."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from made_up import made_up_session
from shadowscale.fit.plan import Prior
from shadowscale.jobs.solve import solve_session
from shadowscale.session.session import Session
from shadowscale.session.store import open_session
from shadowscale.view.contacts import with_contact_solution, with_start_markers
from shadowscale.view.follow import FOLLOWED, can_follow, follow, origin_of
from shadowscale.view.markers import moved
from shadowscale.view.rows import with_state, with_value

LANTERN = Path(__file__).parents[3] / "sample_sessions" / "lantern" / "session.json"


@cache
def solved() -> Session:
    """A sample with everything in it that a solution can have: an eccentric orbit, long exposures."""
    return with_start_markers(solve_session(open_session(LANTERN)))


def pulled(session: Session) -> Session:
    """The first contact of primary eclipse pulled outwards by a tenth of the eclipse."""
    first, *_, fourth = session.markers.primary
    markers = moved(session.markers, "primary.0", first - 0.1 * (fourth - first), symmetric=True)
    return with_contact_solution(replace(session, markers=markers))


def test_a_pulled_marker_leads_back_to_the_minimum_that_the_solver_found() -> None:
    session = solved()

    found = follow(pulled(session), origin_of(session))

    assert found.solution.fit.chi2 == pytest.approx(session.solution.fit.chi2, abs=0.05)
    for name in ("M1", "R2", "radius_ratio", "inclination"):
        before, after = session.solution.estimates[name], found.solution.estimates[name]
        assert abs(after.value - before.value) < 0.1 * before.plus, name
    assert FOLLOWED in found.solution.notes
    assert len(found.audit) > 5


def test_a_held_value_stays_and_the_others_follow() -> None:
    session = solved()
    value = session.system.value("inclination") - 0.3
    held = with_value(with_state(session, "inclination", "held"), "inclination", value)
    assert can_follow(held, origin_of(session))

    found = follow(held, origin_of(session))

    assert found.system.value("inclination") == value
    assert "inclination" not in found.system.free
    assert found.solution.fit.chi2 > session.solution.fit.chi2 + 1
    assert found.system.value("radius_ratio") != session.system.value("radius_ratio")


def test_a_prior_pulls() -> None:
    session = solved()
    estimate = session.solution.estimates["radius_ratio"]
    wish = estimate.value + 5 * estimate.plus
    prior = Prior("radius_ratio", (wish,), (estimate.plus,))
    asked = replace(session, plan=replace(session.plan, priors=(prior,)))

    found = follow(asked, origin_of(session))

    shift = found.system.value("radius_ratio") - estimate.value
    # a prior as sharp as the data: half way, where the likelihood is a parabola
    assert shift == pytest.approx(2.5 * estimate.plus, rel=0.3)


def test_points_set_aside_take_no_part_and_outliers_stay_outliers() -> None:
    session = solved()
    rows = np.zeros(session.photometry.time.size, dtype=bool)
    rows[100:160] = True
    aside = replace(session, photometry=session.photometry.excluded(rows, "clouds"))

    found = follow(aside, origin_of(session))

    light, before = found.solution.light, session.solution.light
    used = int((before.why[rows] == 0).sum())
    assert found.solution.fit.points == session.solution.fit.points - used
    outlier = before.why == len(before.reasons) - 1
    assert {light.reasons[code] for code in light.why[outlier & ~rows]} <= {before.reasons[-1]}
    assert {light.reasons[code] for code in light.why[rows & (before.why == 0)]} == {"clouds"}


@pytest.mark.parametrize(
    "wish",
    [
        {"law": "quadratic"},
        {"orbit": "circular"},
        {"levels": "trend"},
        {"exposure": 30.0},
        {"free": ("third_light[V]",)},  # asked for, but not yet in the system
    ],
)
def test_another_model_is_not_followed(wish: dict[str, object]) -> None:
    session = made_up_session()

    assert can_follow(session, origin_of(session))
    assert not can_follow(replace(session, plan=replace(session.plan, **wish)), origin_of(session))


def test_a_wish_taken_back_is_for_the_solver() -> None:
    session = with_state(made_up_session(), "inclination", "held")
    back = replace(session, plan=replace(session.plan, fixed={}))

    assert not can_follow(back, origin_of(session))


def test_other_tables_are_not_followed() -> None:
    session = made_up_session()
    unsolved, two_bands = made_up_session(solved=False), made_up_session(("V", "I"))

    assert not can_follow(unsolved, origin_of(unsolved))
    assert not can_follow(replace(session, velocities=None), origin_of(session))
    assert not can_follow(replace(session, photometry=two_bands.photometry), origin_of(session))
