"""Keys, and numbers as people read them."""

from __future__ import annotations

import re
from math import inf, isfinite, nan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from shadowscale.quantities import (
    QUANTITIES,
    Key,
    decimals_for,
    key,
    parse_key,
    quantity_of,
    written,
)

names = st.sampled_from(sorted(QUANTITIES))
labels = st.none() | st.text(
    st.characters(exclude_characters="[]", exclude_categories=["Cs", "Cc"]), min_size=1, max_size=8
)
numbers = st.none() | st.integers(1, 9)


# ---------------------------------------------------------------- keys


@given(names, labels, numbers)
def test_keys_come_back(name: str, label: str | None, number: int | None) -> None:
    wanted = Key(name, label, number)

    assert parse_key(str(wanted)) == wanted
    assert key(name, label, number) == str(wanted)


@pytest.mark.parametrize(
    ("text", "parts"),
    [
        ("M1", ("M1", None, None)),
        ("third_light[V]", ("third_light", "V", None)),
        ("limb_darkening2[Sloan r'].2", ("limb_darkening2", "Sloan r'", 2)),
        ("offset1[north]", ("offset1", "north", None)),
        ("  K1 ", ("K1", None, None)),
    ],
)
def test_keys_are_taken_apart(text: str, parts: tuple[object, ...]) -> None:
    found = parse_key(text)

    assert (found.name, found.label, found.number) == parts
    assert quantity_of(text) is QUANTITIES[found.name]


@pytest.mark.parametrize(
    "text", ["", "m1", "M3", "third_light[V", "third_light[]", "M1.0", "M1.10", "M1 M2", "M1[V]x"]
)
def test_what_is_no_key_is_refused_with_its_text(text: str) -> None:
    with pytest.raises(ValueError, match=re.escape(f"{text!r} is not the name of a quantity")):
        parse_key(text)


@given(st.text(max_size=20))
def test_parsing_never_does_anything_else(text: str) -> None:
    try:
        found = parse_key(text)
    except ValueError:
        return
    assert found.name in QUANTITIES
    assert str(found) == text.strip()


# ---------------------------------------------------------------- numbers as people read them


@pytest.mark.parametrize(
    ("value", "minus", "plus", "text"),
    [
        (1.23456, 0.0123, 0.0123, "1.235 ± 0.012"),
        (1.23456, 0.0123, 0.0344, "1.235 +0.034 -0.012"),
        (2459000.312691, 2.27e-5, 2.27e-5, "2459000.312691 ± 0.000023"),
        (5772.4, 81.0, 81.0, "5772 ± 81"),
        (98765.4, 1234.0, 1234.0, "98800 ± 1200"),
        (0.5, 0.00996, 0.00996, "0.500 ± 0.010"),
        (6450.0, 99.7, 99.7, "6450 ± 100"),
        (1.5e-7, 2.34e-10, 2.34e-10, "0.00000015000 ± 0.00000000023"),
        (-0.0312, 0.0009, 0.0009, "-0.03120 ± 0.00090"),
        (0.5, None, None, "0.5"),
        (1.5, 0.0, 0.0, "1.5"),
        (0.62, None, 0.012, "0.620 +0.012 -0.000"),
    ],
)
def test_written(value: float, minus: float | None, plus: float | None, text: str) -> None:
    """Two digits of the (smaller) error, the value to the same place (common practice)."""
    assert written(value, minus, plus) == text


@given(
    st.floats(-1e7, 1e7),
    st.floats(1e-9, 1e5),
    st.floats(1.0, 50.0),
)
def test_written_loses_little(value: float, error: float, lopsided: float) -> None:
    """What is read back is the value within a part of its error, and the errors within 5 per cent."""
    text = written(value, error, error * lopsided)
    if "±" in text:
        shown, low = text.split(" ± ")
        high = low
    else:
        shown, high, low = text.replace("+", "").split(" ")
        low = low.removeprefix("-")

    assert abs(float(shown) - value) <= 0.051 * error + 1e-9 * abs(value)
    assert float(low) == pytest.approx(error, rel=0.051)
    assert float(high) == pytest.approx(error * lopsided, rel=0.051)
    places = [len(part.partition(".")[2]) for part in (shown, low, high)]
    assert len(set(places)) == 1


@given(st.floats(1e-9, 1e9))
def test_an_error_shows_two_digits(error: float) -> None:
    places = decimals_for(error)
    digits = f"{round(error, places):.{max(places, 0)}f}".replace(".", "").strip("0")
    assert len(digits) <= 2
    assert abs(round(error, places) - error) <= 0.051 * error


@pytest.mark.parametrize("error", [0.0, -1.0, nan, inf])
def test_no_error_no_rule(error: float) -> None:
    assert decimals_for(error) == 6
    assert not isfinite(error) or error <= 0
    assert written(2.0, error, error) == "2"
