"""An axis of a low picture: zero and a round number on each side of it."""

from __future__ import annotations

import pyqtgraph as pg

from shadowscale.view.ticks import few_ticks


class FewAxis(pg.AxisItem):
    """Labels that never crowd."""

    def tickValues(self, low: float, high: float, size: float) -> list[tuple[float, list[float]]]:
        """One level of ticks."""
        step, values = few_ticks(min(low, high), max(low, high))
        return [(step, list(values))]
