"""Folding: phases, binned curves, and where a folded curve dips."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats

_WIDTHS = (1, 2, 3, 4, 6, 8, 11, 15, 20, 27, 36, 48)


@dataclass(frozen=True)
class Dip:
    """A box-shaped dip of a folded curve: middle and width [cycles], depth, gain in chi2, points in it."""

    middle: float
    width: float
    depth: float
    gain: float


def phases(time: Floats, period: float, epoch: float) -> Floats:
    """Phases 0...1 of times."""
    cycles = (time - epoch) / period
    return cycles - np.floor(cycles)


def nearest(phase: Floats, centre: float) -> Floats:
    """Phases moved by whole cycles to within half a cycle of `centre`."""
    return np.asarray(phase - np.round(phase - centre))


def find_dips(
    phase: Floats,
    value: Floats,
    weight: Floats,
    *,
    bins: int = 400,
    besides: tuple[Dip, ...] = (),
) -> tuple[Dip, ...]:
    """The deepest box-shaped dip of a folded curve and the best second one beside it.

    Parameters
    ----------
    phase : (n,) float64 [cycles]
        0...1.
    value, weight : (n,) float64
        Flux relative to some level, and one over sigma squared.
    besides : tuple of Dip
        Places where the second dip is not to be looked for.

    Returns
    -------
    tuple of Dip
        None, one or two, in order of gain: the first is the one that explains most of the chi2.

    Notes
    -----
    Three levels are fitted (first box, second box, the rest); least squares over all places and widths
    up to a fifth of a cycle, after Kovacs, Zucker & Mazeh 2002, A&A 391, 369.
    """
    cell = np.minimum((phase * bins).astype(np.int64), bins - 1)
    mass: Floats = np.bincount(cell, weight, bins).astype(float)
    total = mass.sum()
    sums: Floats = np.bincount(cell, weight * (value - (weight @ value) / total), bins).astype(
        float
    )
    first = _best_box(sums, mass, np.zeros(bins, bool), 0.0, 0.0)
    if first is None:
        return ()
    taken = np.zeros(bins, bool)
    place, width = first
    # A band of its own width on either side stays free of the second dip: shoulders are no eclipse.
    taken[(place - width + np.arange(3 * width)) % bins] = True
    for dip in besides:
        start, span = (dip.middle - dip.width) * bins, int(2 * dip.width * bins) + 1
        taken[(int(start) + np.arange(span)) % bins] = True
    inside = (place + np.arange(width)) % bins
    second = _best_box(sums, mass, taken, float(sums[inside].sum()), float(mass[inside].sum()))
    return _as_dips(sums, mass, [first] if second is None else [first, second])


def _best_box(
    sums: Floats, mass: Floats, taken: np.ndarray, other_sum: float, other_mass: float
) -> tuple[int, int] | None:
    """Start and width of the box with the largest gain; None if nothing lies below the rest."""
    bins, total = sums.size, mass.sum()
    best, found = 0.0, None
    sum_to = np.concatenate([[0], np.cumsum(np.tile(sums, 2))])
    mass_to = np.concatenate([[0], np.cumsum(np.tile(mass, 2))])
    taken_to = np.concatenate([[0], np.cumsum(np.tile(taken, 2))])
    for width in (width for width in _WIDTHS if width <= bins / 5 * 1.2):
        box_sum = sum_to[width : width + bins] - sum_to[:bins]
        box_mass = mass_to[width : width + bins] - mass_to[:bins]
        free = (taken_to[width : width + bins] == taken_to[:bins]) & (box_mass > 0)
        # A box that holds (nearly) all the light has no rest to lie below.
        rest_mass = np.maximum(total - box_mass - other_mass, 1e-9 * total)
        rest = -(box_sum + other_sum)
        mean = box_sum / np.maximum(box_mass, 1e-9 * total)
        gain = mean * box_sum + rest**2 / rest_mass
        gain = np.where(free & (mean < rest / rest_mass), gain, 0.0)
        place = int(np.argmax(gain))
        if gain[place] > best:
            best, found = float(gain[place]), (place, width)
    return found


def _as_dips(sums: Floats, mass: Floats, boxes: list[tuple[int, int]]) -> tuple[Dip, ...]:
    bins = sums.size
    inside = [(place + np.arange(width)) % bins for place, width in boxes]
    rest_sum = sums.sum() - sum(sums[rows].sum() for rows in inside)
    rest = rest_sum / max(mass.sum() - sum(mass[rows].sum() for rows in inside), 1e-300)
    dips = []
    for (place, width), rows in zip(boxes, inside, strict=True):
        depth = rest - sums[rows].sum() / mass[rows].sum()
        dips.append(
            Dip(
                middle=((place + width / 2) / bins) % 1,
                width=width / bins,
                depth=float(depth),
                gain=float(depth**2 * mass[rows].sum()),
            )
        )
    return tuple(sorted(dips, key=lambda dip: -dip.gain))
