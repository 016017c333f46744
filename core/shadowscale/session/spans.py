"""Which phases lie in the stretches that a session's markers name."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats
from shadowscale.session.session import Span


def within(phase: Floats, spans: Iterable[Span]) -> NDArray[np.bool_]:
    """(n,) bool: which phases [cycles] lie in any of the spans, whatever cycle these are written in."""
    found = np.zeros(phase.size, dtype=bool)
    for low, high in spans:
        found |= np.mod(phase - low, 1.0) <= high - low
    return found
