"""Rows of the photometry in stretches of phase, by places in the order of phase: quick however many there are."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.session.session import Span
from shadowscale.view.last import Last
from shadowscale.view.light_points import folded_time

Places = tuple[tuple[int, int], ...]  # [from, to) in the order of phase, apart and rising


@dataclass(frozen=True, eq=False)
class Ordered:
    """Rows that take part, in the order of their phases.

    phase : (n,) float64, rising [cycles];  rows : (n,) int64, of the photometry
    """

    phase: Floats
    rows: Ints

    def places(self, spans: Iterable[Span]) -> Places:
        """Where the spans lie, whatever cycle they are written in."""
        found: list[tuple[int, int]] = []
        for low, high in spans:
            for turn in (-1.0, 0.0, 1.0):
                first = int(np.searchsorted(self.phase, low + turn, side="left"))
                last = int(np.searchsorted(self.phase, high + turn, side="right"))
                if last > first:
                    found.append((first, last))
        return _merged(found)

    def beside(self, places: Places) -> Places:
        """Everything else."""
        edges = [0, *(edge for pair in places for edge in pair), self.phase.size]
        pairs = zip(edges[::2], edges[1::2], strict=True)
        return tuple(pair for pair in pairs if pair[1] > pair[0])

    def both(self, first: Places, second: Places) -> Places:
        """What lies in the one and in the other."""
        return self.beside(_merged([*self.beside(first), *self.beside(second)]))

    def rows_at(self, places: Places) -> Ints:
        """The photometry's rows there."""
        parts = [self.rows[first:last] for first, last in places]
        return np.concatenate(parts) if parts else self.rows[:0]


def ordered(photometry: Photometry, period: float, epoch: float) -> Ordered:
    """The rows that take part by phase; the last answer is kept."""
    return _ORDERED.of(photometry, period, epoch)


def _in_order(photometry: Photometry, period: float, epoch: float) -> Ordered:
    rows = np.flatnonzero(photometry.used)
    phase = folded_time(photometry, period, epoch)[rows]
    order = np.argsort(phase, kind="stable")
    return Ordered(phase[order], rows[order])


def _merged(places: Sequence[tuple[int, int]]) -> Places:
    found: list[tuple[int, int]] = []
    for first, last in sorted(places):
        if found and first <= found[-1][1]:
            found[-1] = (found[-1][0], max(last, found[-1][1]))
        else:
            found.append((first, last))
    return tuple(found)


_ORDERED = Last(_in_order)
