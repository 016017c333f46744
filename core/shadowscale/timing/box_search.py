"""Trial periods, and the spectrum of repeating dips over them."""

from __future__ import annotations

import os
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats, Ints
from shadowscale.errors import Stopped
from shadowscale.progress import Progress
from shadowscale.timing._box_kernels import GAIN_TWO, box_spectrum
from shadowscale.timing.results import Span
from shadowscale.timing.search_data import SearchData

SHORTEST = 0.2  # [d]
NARROWEST = 0.02  # T14/P of a period of one day; a third of that of two suns, seen edge on
DRIFT = 0.6  # phase drift over the whole span between trial frequencies, in narrowest durations
FEWEST_IN_BOX = 3
WORDS = "searching periods"
MOST_PARTS = 16  # frequencies folded together
_BLOCK, _ROUND = 1024, 8  # trial periods in a block, blocks between two reports


@dataclass(frozen=True, eq=False)
class Spectrum:
    """Gains at trial frequencies; the columns of `table` are those of `_box_kernels.box_spectrum`.

    left : shortest and longest period that was not searched before a stop [d]; None where all were
    """

    frequency: Floats
    table: Floats
    left: Span | None = None


def narrowest(period: Floats) -> Floats:
    """Shortest eclipse looked for [cycles]: a density of the stars is behind it, so P^(-2/3)."""
    return np.clip(NARROWEST * np.asarray(period) ** (-2 / 3), 0.0015, 0.03)


def frequencies(shortest: float, longest: float, span: float) -> Floats:
    """Trial frequencies [1/d] so close that no eclipse is passed over."""
    # With q = narrowest(1/f), df = DRIFT q/span: integrate 1/df over f and invert on even steps.
    edge = np.geomspace(1 / longest, 1 / shortest, 2000)
    density = span / (DRIFT * narrowest(1 / edge))
    steps = np.concatenate([[0], np.cumsum(np.diff(edge) * (density[1:] + density[:-1]) / 2)])
    return np.asarray(np.interp(np.arange(0, steps[-1], 1.0), steps, edge))


def phase_bins(frequency: Floats) -> Ints:
    """Bins so that the narrowest eclipse fills one and a half."""
    return np.clip(1.6 / narrowest(1 / frequency), 50, 1000).astype(np.int64)


def spectrum(
    data: SearchData, frequency: Floats, progress: Progress, *, keep: bool = False
) -> Spectrum:
    """The spectrum of dips, on all processors; `Progress` is told and may stop it.

    Short periods come first: they are commoner, and what is found there spares boxes at the long ones.
    With `keep`, what was searched before a stop is the result, if anything was.
    """
    table = np.empty((frequency.size, 8))
    bins = phase_bins(frequency)
    starts = list(range(0, frequency.size, _BLOCK))[::-1]
    best, done = 0.0, frequency.size

    def fill(low: int) -> None:
        rows = slice(low, low + _BLOCK)
        box_spectrum(
            data.time, data.value, data.weight, frequency[rows], bins[rows],
            MOST_PARTS, 1, FEWEST_IN_BOX, best, table[rows],
        )  # fmt: skip

    progress.report(0.0, WORDS)
    try:
        with ThreadPoolExecutor(os.cpu_count()) as pool:
            # Blocks of one round know the best of the rounds before: the same on any machine.
            for first in range(0, len(starts), _ROUND):
                blocks = starts[first : first + _ROUND]
                list(pool.map(fill, blocks))
                done = blocks[-1]
                best = float(table[done:, GAIN_TWO].max())
                progress.report(1 - done / frequency.size, WORDS)
    except Stopped:
        if not keep or done == frequency.size:
            raise
    left = (float(1 / frequency[done - 1]), float(1 / frequency[0])) if done else None
    return Spectrum(frequency[done:], table[done:], left)


def peaks(height: Floats, frequency: Floats, count: int, apart: float) -> list[int]:
    """Indices of the highest points that are at least `apart` [1/d] from each other."""
    order = np.argsort(height)[::-1]
    chosen: list[int] = []
    for index in order[: 400 * count]:
        if all(abs(frequency[index] - frequency[other]) > apart for other in chosen):
            chosen.append(int(index))
            if len(chosen) == count:
                break
    return chosen
