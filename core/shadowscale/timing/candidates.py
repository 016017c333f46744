"""Periods worth a closer look: peaks of the spectrum and their multiples, weighed on the folded light."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.timing import _box_kernels as boxes
from shadowscale.timing.box_search import (
    DRIFT,
    FEWEST_IN_BOX,
    Spectrum,
    narrowest,
    peaks,
    phase_bins,
)
from shadowscale.timing.fold import Dip, phases
from shadowscale.timing.search_data import SearchData

PEAKS = 12
MULTIPLES = (1 / 3, 1 / 2, 2 / 3, 3 / 2, 2.0, 3.0)
FINER = 8  # steps of the close look in one step of the search
SHAPE_CELLS = 12  # cells over the window of one eclipse
WINDOW = 0.4  # what the window adds to the box on either side, in widths of the box


@dataclass(frozen=True)
class Candidate:
    """A period with its dips (phases from the data's origin), and how badly the folded light fits.

    chi2 : of any shape inside the dips' windows and one level outside;  shape : number of cells used
    """

    period: float
    dips: tuple[Dip, ...]
    chi2: float
    shape: int
    cost: float = np.inf


def candidates(
    data: SearchData, spectrum: Spectrum, limits: tuple[float, float]
) -> list[Candidate]:
    """Candidates in order of cost, the best first.

    The cost is chi2 over its scale plus log(n) for each cell of shape (Schwarz 1978, Annals of
    Statistics 6, 461), so that a multiple, which fits as well with more cells, comes after the period.
    """
    seeds = _seeds(spectrum, data.span)
    best = [1 / seed for seed in seeds[:3]]
    more = [period * factor for period in best for factor in MULTIPLES]
    periods = [1 / seed for seed in seeds] + more
    found = [close_look(data, period) for period in periods if limits[0] <= period <= limits[1]]
    found = [each for each in found if each.dips]
    return ranked(found, data.time.size)


def ranked(found: list[Candidate], points: int) -> list[Candidate]:
    """Costs on the common scale of the least chi2; copies of a period are dropped."""
    if not found:
        return []
    scale = max(1e-9, min(each.chi2 / max(points - each.shape, 10) for each in found))
    costed = [replace(each, cost=each.chi2 / scale + each.shape * np.log(points)) for each in found]
    costed.sort(key=lambda each: each.cost)
    kept: list[Candidate] = []
    for each in costed:
        if all(abs(each.period / other.period - 1) > 3e-3 for other in kept):
            kept.append(each)
    return kept


def close_look(data: SearchData, period: float) -> Candidate:
    """The best period in a fine comb around a seed, with its dips."""
    step = DRIFT * float(narrowest(np.array(period))) / data.span / FINER
    comb: Floats = 1 / period + step * np.arange(-2.0 * FINER, 2 * FINER + 1)
    comb = comb[comb > 0]
    bins = np.minimum(3 * phase_bins(comb), 1500)
    table = np.empty((comb.size, 8))
    boxes.box_spectrum(
        data.time, data.value, data.weight, comb, bins, 1, 3, FEWEST_IN_BOX, 0.0, table
    )
    best = int(np.argmax(table[:, boxes.GAIN_TWO]))
    return _candidate(data, float(1 / comb[best]), table[best])


def _seeds(spectrum: Spectrum, span: float) -> list[float]:
    """Frequencies of the highest peaks of one box, two boxes, and the dispersion of the bins."""
    table, frequency = spectrum.table, spectrum.frequency
    heights = (
        table[:, boxes.GAIN_TWO],
        table[:, boxes.GAIN_ONE],
        table[:, boxes.GAIN_BINS] - 3 * table[:, boxes.OCCUPIED],
    )
    seeds: list[float] = []
    for height in heights:
        for index in peaks(height, frequency, PEAKS, 1 / span):
            if all(abs(frequency[index] - seed) > 0.2 / span for seed in seeds):
                seeds.append(float(frequency[index]))
    return seeds


def _candidate(data: SearchData, period: float, row: Floats) -> Candidate:
    phase = phases(data.time, period, 0.0)
    dips = []
    for start, width in (row[3:5], row[5:7]):
        if width > 0:
            dips.append(_dip(data, phase, (start + width / 2) % 1, width))
    chi2, shape = _shape_cost(data, phase, dips)
    return Candidate(period, tuple(dips), chi2, shape)


def _dip(data: SearchData, phase: Floats, middle: float, width: float) -> Dip:
    inside = np.abs((phase - middle + 0.5) % 1 - 0.5) <= width / 2
    mass = data.weight[inside].sum()
    rest = data.weight[~inside]
    level = rest @ data.value[~inside] / rest.sum()
    depth = level - data.weight[inside] @ data.value[inside] / max(mass, 1e-300)
    return Dip(float(middle), float(width), float(depth), float(depth**2 * mass))


def _shape_cost(data: SearchData, phase: Floats, dips: list[Dip]) -> tuple[float, int]:
    """chi2 of any shape in the windows of the dips and one level elsewhere, and the number of cells."""
    cell = np.zeros(phase.size, np.int64)
    for number, dip in enumerate(dips):
        width = dip.width * (1 + 2 * WINDOW)
        place = ((phase - dip.middle + width / 2) % 1) / width
        inside = place < 1
        first = 1 + number * SHAPE_CELLS
        cell[inside] = first + (place[inside] * SHAPE_CELLS).astype(np.int64)
    mass = np.bincount(cell, data.weight)
    total = np.bincount(cell, data.weight * data.value)
    filled = mass > 0
    return data.chi2 - float(np.sum(total[filled] ** 2 / mass[filled])), int(filled.sum())
