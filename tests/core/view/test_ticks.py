"""Few round numbers on an axis."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from shadowscale.view.ticks import few_ticks


def test_zero_and_one_on_each_side() -> None:
    assert few_ticks(-0.0049, 0.0047) == (0.003, (-0.003, 0.0, 0.003))
    assert few_ticks(-2.9, 2.4)[1] == (-2.0, 0.0, 2.0)
    assert few_ticks(-7.2, 6.1)[1] == (-5.0, 0.0, 5.0)
    assert few_ticks(0.0, 0.0)[1] == ()


@given(high=st.floats(1e-9, 1e9), share=st.floats(0.75, 1.0))
def test_they_never_crowd(high: float, share: float) -> None:
    step, values = few_ticks(-share * high, high)

    assert len(values) == 3
    assert all(-share * high <= value * (1 + 1e-12) and value <= high for value in values)
    assert values == pytest.approx([round(value / step) * step for value in values])
