"""Points gathered into bins, for a picture that is calmer than the data."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats


@dataclass(frozen=True, eq=False)
class Bins:
    """Weighted mean, its error, and the number of points of each bin that holds any.

    x, y, error : (b,) float64; number : (b,) int64
    """

    x: Floats
    y: Floats
    error: Floats
    number: np.ndarray[tuple[int], np.dtype[np.int64]]


def binned(x: Floats, y: Floats, error: Floats, *, width: float) -> Bins:
    """Weighted means of `y` in bins of `width` (same unit as `x`).

    Parameters
    ----------
    x, y, error : (n,) float64
        Points; those with an error that is not positive weigh as the median one does.
    width : float
        Of a bin, positive.

    Raises
    ------
    ValueError
        If `width` is not positive.
    """
    if not width > 0:
        raise ValueError(f"width must be positive, found {width!r}")
    if not x.size:
        return Bins(x, y, error, np.zeros(0, dtype=np.int64))
    good = error > 0
    usual = float(np.median(error[good])) if good.any() else 1.0
    weight = 1.0 / np.where(good, error, usual) ** 2
    cell = np.floor(x / width).astype(np.int64)
    cell -= cell.min()
    if (
        int(cell.max()) > 50_000_000
    ):  # a width far below the spacing: number the cells that are there
        cell = np.unique(cell, return_inverse=True)[1]
    number = np.bincount(cell)
    full = number > 0
    total = np.bincount(cell, weight)[full]
    return Bins(
        np.bincount(cell, weight * x)[full] / total,
        np.bincount(cell, weight * y)[full] / total,
        1.0 / np.sqrt(total),
        number[full],
    )
