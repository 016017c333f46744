"""Very many points as a picture: how many fall on each pixel of the present view."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from shadowscale._compiled import compiled
from shadowscale.data.photometry import Floats

Rectangle = tuple[float, float, float, float]  # left, right, bottom, top


@compiled
def _count(x: Any, y: Any, rectangle: Any, cells: Any) -> None:
    """Add 1 to cells[row, column] for every point in the rectangle; row 0 is the top."""
    height, width = cells.shape
    left, right, bottom, top = rectangle
    across = width / (right - left)
    down = height / (top - bottom)
    for n in range(x.size):
        if left <= x[n] < right and bottom < y[n] <= top:
            column = min(int((x[n] - left) * across), width - 1)
            row = min(int((top - y[n]) * down), height - 1)
            cells[row, column] += 1


def points_in_view(x: Floats, rectangle: Rectangle) -> int:
    """How many points lie between the left and the right edge."""
    return int(np.count_nonzero((x >= rectangle[0]) & (x < rectangle[1])))


def density_picture(
    x: Floats, y: Floats, *, rectangle: Rectangle, width: int, height: int
) -> NDArray[np.uint8]:
    """Shades 0 (empty) to 255 of a picture of the points, logarithmic in their number.

    Parameters
    ----------
    x, y : (n,) float64
    rectangle : (left, right, bottom, top)
        What the picture shows, in the points' units; `bottom` < `top`.
    width, height : int [pixel]

    Returns
    -------
    (height, width) uint8
        A single point is shade 70, so that it can be seen; the fullest pixel is 255.
    """
    cells = np.zeros((height, width), dtype=np.int64)
    _count(x, y, np.asarray(rectangle, dtype=np.float64), cells)
    fullest = max(int(cells.max()), 2) if cells.size else 2
    shade = 70.0 + 185.0 * np.log(np.maximum(cells, 1)) / np.log(fullest)
    return np.where(cells > 0, np.minimum(shade, 255.0), 0.0).astype(np.uint8)
