"""Trial periods, and the spectrum of repeating dips over them."""

from __future__ import annotations

import os
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats, Ints
from shadowscale.progress import Progress
from shadowscale.timing._kernels import box_spectrum
from shadowscale.timing.search_data import SearchData

SHORTEST = 0.2  # [d]
NARROWEST = 0.02  # T14/P of a period of one day; a third of that of two suns, seen edge on
DRIFT = 0.6  # phase drift over the whole span between trial frequencies, in narrowest durations
FEWEST_IN_BOX = 3
_BLOCK = 4000


@dataclass(frozen=True, eq=False)
class Spectrum:
    """Gains at trial frequencies; the columns of `table` are those of `_kernels.box_spectrum`."""

    frequency: Floats
    table: Floats


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


def phase_bins(frequency: Floats, points: int) -> Ints:
    """Bins so that the narrowest eclipse fills one and a half."""
    return np.clip(1.6 / narrowest(1 / frequency), 50, 1000).astype(np.int64)


def spectrum(data: SearchData, frequency: Floats, progress: Progress, words: str = "") -> Spectrum:
    """The spectrum of dips, on all processors; `Progress` is told and may stop it."""
    table = np.empty((frequency.size, 8))
    bins = phase_bins(frequency, data.time.size)
    block = int(np.clip(3e7 / max(data.time.size, 2000), 100, _BLOCK * 5))

    def fill(low: int) -> int:
        rows = slice(low, low + block)
        box_spectrum(
            data.time, data.value, data.weight, frequency[rows], bins[rows],
            1, FEWEST_IN_BOX, table[rows],
        )  # fmt: skip
        return low + block

    pool = ThreadPoolExecutor(os.cpu_count())
    try:
        for done in pool.map(fill, range(0, frequency.size, block)):
            progress.report(min(1.0, done / frequency.size), words or "searching periods")
    finally:
        pool.shutdown(cancel_futures=True)
    return Spectrum(frequency, table)


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
