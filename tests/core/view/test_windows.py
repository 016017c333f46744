"""What the eclipse windows and the stretches outside eclipse do to the contact solution and to the fit."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from made_up import EPOCH, PERIOD, made_up_session
from shadowscale.errors import NoSolutionError
from shadowscale.session.session import Markers, Session
from shadowscale.session.spans import within
from shadowscale.view.contacts import contact_solution_of_markers, with_measured_contacts
from shadowscale.view.light_points import folded_time, light_over_phase
from shadowscale.view.stretches import ordered
from shadowscale.view.wishes import asks_for_solution

FAINT = 0.04  # light lost in the stretch that is spoiled


def marked(**changes: object) -> Session:
    """The invented pair with plain windows and other markers as told."""
    session = made_up_session()
    plain = replace(session.markers, level=(), excluded=())
    return replace(session, markers=replace(plain, **changes))


def spoiled(session: Session, span: tuple[float, float]) -> Session:
    """The session with less light in a span of phases."""
    photometry = session.photometry
    rows = within((photometry.time - EPOCH) / PERIOD, (span,))
    flux = np.where(rows, photometry.flux * (1 - FAINT), photometry.flux)
    return replace(session, photometry=replace(photometry, flux=flux))


def depth(session: Session) -> float:
    return float(contact_solution_of_markers(session).primary.depth)


def test_the_light_outside_eclipse_comes_from_outside_the_windows() -> None:
    """Everything outside is fainter by the same part: the depth shrinks by it, unless a stretch says otherwise."""
    markers = marked().markers
    outside = (markers.primary_window[1], markers.secondary_window[0])
    beyond = (markers.secondary_window[1], 1 + markers.primary_window[0])
    session = spoiled(spoiled(marked(), outside), beyond)
    level = 1 - depth(marked())

    assert depth(session) == pytest.approx(1 - level / (1 - FAINT), abs=2e-3)


def test_stretches_for_the_level_alone_give_the_light_outside_eclipse() -> None:
    session = spoiled(marked(), (0.2, 0.3))
    within_it = replace(session, markers=replace(session.markers, level=((0.21, 0.29),)))
    beside_it = replace(session, markers=replace(session.markers, level=((0.31, 0.38),)))

    assert depth(beside_it) - depth(within_it) == pytest.approx(
        (1 - depth(marked())) * FAINT, abs=4e-3
    )


def test_excluded_stretches_are_no_light_outside_eclipse() -> None:
    session = spoiled(marked(level=((0.2, 0.4),)), (0.2, 0.32))
    cut = replace(session.markers, excluded=((0.19, 0.33),))

    assert depth(replace(session, markers=cut)) == pytest.approx(depth(marked()), abs=3e-3)


def test_spans_may_be_written_in_any_cycle() -> None:
    phase = np.array([-0.02, 0.02, 0.5, 0.98, 1.02])

    assert within(phase, ((-0.05, 0.05),)).tolist() == [True, True, False, True, True]
    assert within(phase, ((0.95, 1.05),)).tolist() == [True, True, False, True, True]
    assert not within(phase, ()).any()


def test_contacts_are_measured_again_in_the_windows() -> None:
    """Markers put wrongly, and no secondary: the windows alone say where to look."""
    truth = made_up_session().markers
    wrong = Markers(primary=(-0.06, -0.03, 0.03, 0.06), secondary=None)

    found = with_measured_contacts(marked(**vars(wrong))).markers

    assert np.abs(np.subtract(found.primary, truth.primary)).max() < 4e-3
    assert np.abs(np.subtract(found.secondary, truth.secondary)).max() < 6e-3
    assert (found.primary_window, found.secondary_window) == ((-0.1, 0.1), (0.4, 0.6))


def test_a_window_beside_the_eclipse_finds_none_there() -> None:
    session = marked(secondary=None, secondary_window=(0.2, 0.3))

    assert with_measured_contacts(session).markers.secondary is None
    nowhere = marked(
        primary=(0.2, 0.21, 0.22, 0.23), primary_window=(0.18, 0.25),
        secondary=None, secondary_window=(0.27, 0.36),
    )  # fmt: skip
    with pytest.raises(NoSolutionError, match="no eclipse stands out"):
        with_measured_contacts(nowhere)


def test_stretches_ask_for_a_fit_and_windows_only_beside_them() -> None:
    plain = marked()
    wider = replace(plain, markers=replace(plain.markers, primary_window=(-0.12, 0.12)))
    level = marked(level=((0.2, 0.3),))

    assert not asks_for_solution(plain, wider)
    assert asks_for_solution(plain, level)
    assert asks_for_solution(
        level, replace(level, markers=replace(level.markers, primary_window=(-0.12, 0.12)))
    )


def test_rows_that_a_person_left_out_are_no_outliers_in_the_picture() -> None:
    session = made_up_session()
    light = session.solution.light
    why = light.why.copy()
    why[100:110] = len(light.reasons)
    result = replace(light, why=why, reasons=(*light.reasons, "in a window that was excluded"))
    session = replace(session, solution=replace(session.solution, light=result))

    points = light_over_phase(session)[0]

    assert np.flatnonzero(points.outlier).tolist() == [11]
    assert not points.used[100:110].any()


@given(
    spans=st.lists(st.tuples(st.floats(-0.4, 0.9), st.floats(0.0, 0.4)), max_size=4),
    others=st.lists(st.tuples(st.floats(-0.4, 0.9), st.floats(0.0, 0.4)), max_size=3),
)
def test_places_in_the_order_of_phase_are_the_rows_within(
    spans: list[tuple[float, float]], others: list[tuple[float, float]]
) -> None:
    photometry = made_up_session().photometry
    order = ordered(photometry, PERIOD, EPOCH)
    phase = folded_time(photometry, PERIOD, EPOCH)
    first, second = ([(low, low + width) for low, width in each] for each in (spans, others))
    inside = within(phase, first)

    places = order.places(first)
    assert set(order.rows_at(places)) == set(np.flatnonzero(inside & photometry.used))
    assert set(order.rows_at(order.beside(places))) == set(
        np.flatnonzero(~inside & photometry.used)
    )
    both = order.both(places, order.places(second))
    assert set(order.rows_at(both)) == set(
        np.flatnonzero(inside & within(phase, second) & photometry.used)
    )


def test_where_the_windows_leave_nothing_the_light_beside_the_contacts_counts() -> None:
    session = marked(primary_window=(-0.25, 0.25), secondary_window=(0.25, 0.75))

    assert depth(session) == pytest.approx(depth(marked()), abs=1e-3)
