"""The rules by which markers move."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from made_up import made_up_markers
from shadowscale.session.session import Markers
from shadowscale.view.markers import (
    describe_move,
    handle,
    handles,
    moved,
    with_new_span,
    with_span,
    without_span,
)

PARTIAL = Markers(primary=(-0.05, 0.0, 0.0, 0.05))


@given(
    name=st.sampled_from([h.name for h in handles(made_up_markers())]),
    phase=st.floats(-0.5, 1.0),
    symmetric=st.booleans(),
)
def test_whatever_is_pulled_contacts_and_spans_stay_in_order(
    name: str, phase: float, symmetric: bool
) -> None:
    after = moved(made_up_markers(), name, phase, symmetric=symmetric)

    for contacts in (after.primary, after.secondary):
        assert contacts[0] < contacts[1] <= contacts[2] < contacts[3]
        assert contacts[3] - contacts[0] < 0.5  # no eclipse takes half the orbit
    for span in (after.primary_window, after.secondary_window, *after.level, *after.excluded):
        assert span[0] < span[1]


@given(phase=st.floats(-0.2, 0.2), number=st.sampled_from([0, 1, 2, 3]))
def test_symmetric_pulling_keeps_the_middle(phase: float, number: int) -> None:
    before = made_up_markers()

    after = moved(before, f"primary.{number}", phase, symmetric=True)

    assert sum(before.primary) == pytest.approx(sum(after.primary), abs=1e-12)
    assert before.secondary == after.secondary


def test_one_side_alone_leaves_all_others() -> None:
    after = moved(made_up_markers(), "secondary.3", 0.56)

    assert made_up_markers().secondary[:3] == after.secondary[:3]
    assert after.secondary[3] == 0.56


def test_the_inner_contacts_of_a_partial_eclipse_may_meet() -> None:
    after = moved(PARTIAL, "primary.1", -0.02, symmetric=True)
    assert after.primary[1:3] == (-0.02, 0.02)

    again = moved(after, "primary.1", 0.0, symmetric=True)

    assert again.primary[1:3] == (0.0, 0.0)


def test_handles_have_words_for_people() -> None:
    assert handle(made_up_markers(), "primary.0").words == "first contact of primary eclipse"
    assert (
        describe_move(made_up_markers(), "excluded.0.1") == "Move right edge of excluded stretch 1"
    )
    with pytest.raises(KeyError, match=r"primary\.7"):
        handle(made_up_markers(), "primary.7")


def test_without_a_secondary_only_its_window_can_be_pulled_to_where_it_should_be() -> None:
    names = [h.name for h in handles(PARTIAL) if h.name.startswith("secondary")]

    assert names == ["secondary_window.0", "secondary_window.1"]
    assert moved(PARTIAL, "secondary_window.1", 0.45).secondary_window == (0.4, 0.45)


def test_a_window_always_holds_its_contacts() -> None:
    pushed = moved(made_up_markers(), "primary.0", -0.14)
    assert pushed.primary_window[0] == pushed.primary[0] == -0.14

    stopped = moved(made_up_markers(), "primary_window.1", 0.0)

    assert stopped.primary_window[1] == made_up_markers().primary[3]


def test_every_handle_says_what_it_does() -> None:
    words = {h.group: h.effect for h in handles(made_up_markers())}

    assert set(words) == {"contact", "window", "level", "excluded"}
    assert all(len(each) > 30 for each in words.values())


def test_stretches_come_in_order_and_go() -> None:
    more = with_span(with_new_span(PARTIAL, "level", 0.3, width=0.1), "level", (0.2, 0.1))
    assert ((0.1, 0.2), pytest.approx((0.25, 0.35))) == more.level

    assert (pytest.approx((0.25, 0.35)),) == without_span(more, "level.0.1").level
    assert more is without_span(more, "primary.0")
