"""Few round numbers for an axis that has no room for many."""

from __future__ import annotations

from math import ceil, floor, log10

STEPS = (8.0, 6.0, 5.0, 4.0, 3.0, 2.5, 2.0, 1.5, 1.2, 1.0)
ROOM = 0.7  # part of the longer side of zero that the outermost tick may take


def few_ticks(low: float, high: float) -> tuple[float, tuple[float, ...]]:
    """A round step, and its multiples in the range: zero and one on each side where zero is about the middle."""
    reach = ROOM * max(abs(low), abs(high)) if low < 0 < high else ROOM * (high - low)
    if not reach > 0:
        return 1.0, ()
    decade = 10.0 ** floor(log10(reach))
    step = next((factor * decade for factor in STEPS if factor * decade <= reach), decade)
    numbers = range(ceil(low / step), floor(high / step) + 1)
    return step, tuple(number * step for number in numbers)
