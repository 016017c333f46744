"""Values to JSON and back: bit for bit, and clear words where a document does not fit."""

import json
from dataclasses import dataclass, field
from math import inf, nan

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays
from numpy.typing import NDArray

from same import assert_same
from shadowscale.fit.plan import Plan, Prior
from shadowscale.session.plain import PLAIN_LENGTH, PlainError, from_plain, to_plain


@dataclass(frozen=True, eq=False)
class Holder:
    numbers: NDArray[np.float64]
    codes: NDArray[np.int64]
    words: tuple[str, ...] = ()
    span: tuple[float, float] | None = None
    more: dict[str, float] = field(default_factory=dict)


def through_json(value):
    return from_plain(type(value), json.loads(json.dumps(to_plain(value), allow_nan=False)))


floats = st.floats(width=64, allow_nan=True, allow_infinity=True)


@given(
    numbers=arrays(np.float64, st.integers(0, 3 * PLAIN_LENGTH), elements=floats),
    codes=arrays(np.int64, st.integers(0, 3 * PLAIN_LENGTH)),
    span=st.none() | st.tuples(floats, floats),
    more=st.dictionaries(st.text(), floats),
)
def test_everything_comes_back_bit_for_bit(numbers, codes, span, more):
    numbers = np.where(np.isnan(numbers), nan, numbers)  # one kind of NaN
    holder = Holder(numbers, codes, ("a", "\N{GREEK SMALL LETTER MU}"), span, more)
    assert_same(holder, through_json(holder))


def test_a_matrix_and_an_empty_array_keep_their_shape():
    holder = Holder(np.array([[1.0, -0.0], [nan, inf]]), np.array([], dtype=np.int64))
    assert_same(holder, through_json(holder))


def test_long_arrays_are_packed_smaller_than_their_digits():
    holder = Holder(np.full(10_000, 1 / 3), np.zeros(10_000, dtype=np.int64))
    assert len(json.dumps(to_plain(holder))) < 5_000


def test_what_is_left_out_gets_its_default():
    assert from_plain(Plan, {}) == Plan()
    assert to_plain(Plan()) == {}
    assert to_plain(Plan(seed=3, priors=(Prior("K1", (1.0,), (0.5,)),))) == {
        "seed": 3,
        "priors": [{"name": "K1", "values": [1.0], "sigmas": [0.5]}],
    }


def test_ties_come_back():
    plan = Plan(ties={"gamma2": "gamma1"})
    assert to_plain(plan) == {"ties": {"gamma2": "gamma1"}}
    assert from_plain(Plan, to_plain(plan)) == plan


@pytest.mark.parametrize(
    ("document", "words"),
    [
        ({"perod": 1.0}, r"plan\.perod: expected 'period', found 'perod'"),
        ({"period": "one"}, r"plan\.period: expected a number, found 'one'"),
        ({"period": True}, r"plan\.period: expected a number, found True"),
        ({"seed": 1.5}, r"plan\.seed: expected a whole number, found 1\.5"),
        ({"seed": True}, r"plan\.seed: expected a whole number, found True"),
        ({"teff1": [1.0]}, r"plan\.teff1: expected 2 values, found 1"),
        ({"free": "K1"}, r"plan\.free: expected a list, found 'K1'"),
        ({"priors": [{"name": "K1"}]}, r"plan\.priors\[0\]: expected a value for 'values'"),
        ([], r"plan: expected an object, found \[\]"),
    ],
)
def test_what_does_not_fit_is_named_with_its_place(document, words):
    with pytest.raises(PlainError, match=words):
        from_plain(Plan, document)


@pytest.mark.parametrize(
    ("numbers", "words"),
    [
        ({"length": 3, "type": "<f8", "packed": "AAAA"}, "damaged data"),
        ({"length": 3, "type": "<f8", "packed": "\N{SNOWMAN}"}, "damaged data"),
        ({"length": 10**12, "type": "<f8", "packed": ""}, "a length that fits in memory"),
        ({"length": 3, "type": ">f8", "packed": ""}, "a list or a packed array"),
        ([[1.0], [1.0, 2.0]], "rows of one length"),
        (["x"], "expected a number"),
    ],
)
def test_a_damaged_array_is_refused(numbers, words):
    with pytest.raises(PlainError, match=words):
        from_plain(Holder, {"numbers": numbers, "codes": []})


def test_a_packed_array_of_another_length_is_refused():
    packed = to_plain(np.arange(100.0))
    for length in (99, 101):
        document = {"numbers": {**packed, "length": length}, "codes": []}
        with pytest.raises(PlainError, match="packed values"):
            from_plain(Holder, document)


def test_what_has_no_plain_form_is_refused():
    with pytest.raises(TypeError, match="set has no plain form"):
        to_plain({1})
