"""Undo and redo."""

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from shadowscale.session import History, Session


def named(name):
    return Session(name=name)


def test_undo_and_redo_walk_the_same_states():
    history = History(named("a"))
    history.push("to b", named("b"))
    history.push("to c", named("c"))
    assert (history.undo_label, history.redo_label) == ("to c", None)
    assert history.undo().name == "b"
    assert (history.undo_label, history.redo_label) == ("to b", "to c")
    assert history.undo().name == "a"
    assert history.undo_label is None
    assert history.undo().name == "a"
    assert history.redo().name == "b"
    assert history.redo().name == "c"
    assert history.redo().name == "c"


def test_a_drag_is_one_step():
    history = History(named("a"))
    for place in range(100):
        history.push("move a marker", named(f"at {place}"), merge="primary, first contact")
    history.close()
    history.push("move a marker", named("again"), merge="primary, first contact")
    assert history.labels == ("start", "move a marker", "move a marker")
    assert history.undo().name == "at 99"
    assert history.undo().name == "a"


def test_an_undo_ends_the_gesture():
    history = History(named("a"))
    history.push("move", named("b"), merge="marker")
    history.undo()
    history.redo()
    history.push("move", named("c"), merge="marker")
    assert history.undo().name == "b"


def test_a_change_after_undo_forgets_what_was_undone():
    history = History(named("a"))
    history.push("to b", named("b"))
    history.undo()
    history.push("to c", named("c"))
    assert history.labels == ("start", "to c")
    assert history.redo_label is None


def test_a_result_can_arrive_without_a_step():
    history = History(named("a"))
    history.push("to b", named("b"))
    history.amend(replace(history.session, command="solved"))
    assert history.session.command == "solved"
    assert history.undo().name == "a"


def test_the_oldest_steps_go_first():
    history = History(named("0"), length=5)
    for number in range(1, 20):
        history.push(str(number), named(str(number)))
    for _ in range(50):
        history.undo()
    assert history.session.name == "14"
    with pytest.raises(ValueError, match="length must be at least 1, found 0"):
        History(named("a"), length=0)


@given(st.lists(st.sampled_from("udpmc"), max_size=60))
def test_it_agrees_with_a_plain_model(moves):
    """Against two stacks, the textbook form of undo (common practice)."""
    history, done, undone, merging = History(named("start")), ["start"], [], False
    for number, move in enumerate(moves):
        if move == "u":
            history.undo()
            if len(done) > 1:
                undone.append(done.pop())
            merging = False
        elif move == "d":
            history.redo()
            if undone:
                done.append(undone.pop())
            merging = False
        elif move == "c":
            history.close()
            merging = False
        else:
            history.push("x", named(str(number)), merge="drag" if move == "m" else None)
            undone.clear()
            if move == "m" and merging:
                done.pop()
            done.append(str(number))
            merging = move == "m"
        assert history.session.name == done[-1]
