"""The tree of errors: exit status, sentences made from the data, and the data themselves."""

from __future__ import annotations

import json

import pytest

from shadowscale import errors
from shadowscale.errors import (
    ColumnError,
    InputError,
    NoSolutionError,
    NotConstrainedError,
    NotConvergedError,
    NotDetachedError,
    Problem,
    SessionError,
    ShadowscaleError,
    Stopped,
    TableError,
    TimeScaleError,
    UnitError,
    UsageError,
)

TREE = {
    UsageError: (2, ShadowscaleError),
    InputError: (3, ShadowscaleError),
    TableError: (3, InputError),
    ColumnError: (3, InputError),
    UnitError: (3, InputError),
    TimeScaleError: (3, InputError),
    SessionError: (3, InputError),
    NoSolutionError: (4, ShadowscaleError),
    NotDetachedError: (4, NoSolutionError),
    NotConvergedError: (4, NoSolutionError),
    NotConstrainedError: (4, NoSolutionError),
}


@pytest.mark.parametrize("kind", TREE)
def test_exit_status_and_place_in_the_tree(kind: type[ShadowscaleError]) -> None:
    """Exit statuses are a promise to scripts: 2 usage, 3 input, 4 no solution."""
    status, parent = TREE[kind]

    assert kind.exit_status == status
    assert issubclass(kind, parent)


def test_every_error_of_the_tree_is_tested() -> None:
    found = {
        item for item in vars(errors).values()
        if isinstance(item, type) and issubclass(item, ShadowscaleError)
    }  # fmt: skip

    assert found == {*TREE, ShadowscaleError}


def test_stopping_is_no_error() -> None:
    assert not issubclass(Stopped, ShadowscaleError)


def test_usage_says_what_is_allowed_and_what_was_meant() -> None:
    error = UsageError("--law", "quadratc", ("linear", "quadratic"))

    assert str(error) == (
        "--law: expected one of linear, quadratic, found 'quadratc'; did you mean 'quadratic'?"
    )
    assert error.details() == {
        "error": "UsageError",
        "message": str(error),
        "option": "--law",
        "found": "quadratc",
        "expected": "",
        "allowed": ["linear", "quadratic"],
    }


def test_usage_in_own_words() -> None:
    assert str(UsageError("--seed", "x", expected="a whole number")) == (
        "--seed: expected a whole number, found 'x'"
    )


def test_nothing_near_is_not_proposed() -> None:
    assert "did you mean" not in str(UsageError("--law", "zzz", ("linear", "quadratic")))


def test_a_problem_says_where() -> None:
    problem = Problem(
        "night3.csv", "a number", "'12,43'", line=418, column="mag",
        help="is the comma a decimal mark?",
    )  # fmt: skip

    assert str(problem) == (
        "night3.csv, line 418, column 'mag': expected a number, found '12,43'; "
        "is the comma a decimal mark?"
    )
    assert (
        str(Problem("a.fits", "a table", "an image")) == "a.fits: expected a table, found an image"
    )


def test_problems_are_gathered_and_counted() -> None:
    problems = [Problem("a.csv", "a number", "'x'", line=n) for n in range(1, 26)]
    error = TableError(*problems)
    lines = str(error).splitlines()

    assert len(lines) == 21
    assert lines[0] == "a.csv, line 1: expected a number, found 'x'"
    assert lines[-1] == "... and 5 more"
    assert len(error.details()["problems"]) == 25  # type: ignore[arg-type]


def test_no_solution_gives_reason_numbers_and_help() -> None:
    error = NotDetachedError("the stars touch", {"fill-out": 1.0625}, "this program is for others")

    assert str(error) == "the stars touch (fill-out = 1.0625); this program is for others"
    assert str(NoSolutionError("no eclipses")) == "no eclipses"
    assert error.details()["numbers"] == {"fill-out": 1.0625}


@pytest.mark.parametrize(
    "error",
    [
        UsageError("--law", "x", ("linear",)),
        TableError(Problem("a", "b", "c", line=1, column="d", help="e")),
        NotConvergedError("it did not settle", {"steps": 60.0}, "hold something"),
    ],
)
def test_details_are_json(error: ShadowscaleError) -> None:
    found = json.loads(json.dumps(error.details()))

    assert found["error"] == type(error).__name__
    assert found["message"] == str(error)
