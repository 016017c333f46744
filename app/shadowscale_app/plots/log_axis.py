"""A logarithmic axis with plain numbers at 1, 2 and 5 of each decade."""

from __future__ import annotations

from math import floor

import pyqtgraph as pg

SHOWN = (1, 2, 5)


class LogAxis(pg.AxisItem):
    """Axis values are logarithms to base 10."""

    def logTickStrings(self, values: list[float], scale: float, spacing: float) -> list[str]:
        """Numbers where they have room, nothing elsewhere."""
        return [_text(value) for value in values]


def _text(logarithm: float) -> str:
    decade = floor(logarithm + 1e-9)
    digit = 10 ** (logarithm - decade)
    if not any(abs(digit - shown) < 1e-6 for shown in SHOWN):
        return ""
    return f"{10**logarithm:.{max(0, -decade)}f}"
