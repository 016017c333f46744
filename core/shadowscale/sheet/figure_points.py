"""Many points as a picture that stays small: every point is drawn, overlapping ones add up."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from shadowscale.sheet.figure_data import Floats
from shadowscale.sheet.figure_frame import FAINT, INK, SOFT

if TYPE_CHECKING:
    from matplotlib.artist import Artist
    from matplotlib.axes import Axes

DOTS_AN_INCH = 200
AS_MARKERS = 400  # points up to which each is drawn as a marker of its own
FINE = 2  # cells of the drawing along a dot of the picture
MOST_SET_ASIDE = 300


def draw_points(axes: Axes, x: Floats, y: Floats, *, colour: str) -> None:
    """Points of a light curve; few as markers, many as a picture. The limits of the axes must stand."""
    if x.size <= AS_MARKERS:
        axes.plot(x, y, ".", color=colour, markersize=2.6, markeredgewidth=0, zorder=2)
        return
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    box = axes.get_window_extent()
    inches = box.width / axes.figure.dpi, box.height / axes.figure.dpi
    width, height = (max(8, round(size * DOTS_AN_INCH)) for size in inches)
    across = (np.asarray(x) - left) / (right - left)
    down = (np.asarray(y) - top) / (bottom - top)
    picture = points_picture(across, down, width=width, height=height, colour=colour)
    axes.add_artist(_picture_artist(picture, axes))


def _picture_artist(picture: NDArray[np.uint8], axes: Axes) -> Artist:
    """A picture that fills the axes, dot for dot where dots are drawn; `imshow` would blur and be slow."""
    from matplotlib.artist import Artist
    from matplotlib.transforms import Affine2D

    upward = picture[::-1]

    class Picture(Artist):
        """Drawn at `DOTS_AN_INCH`, or to scale where nothing but lines is drawn."""

        def draw(self, renderer: Any) -> None:
            graphics, box = renderer.new_gc(), axes.bbox
            if renderer.option_scale_image():
                size = Affine2D().scale(box.width, box.height)
                renderer.draw_image(graphics, box.x0, box.y0, upward, size)
            else:
                renderer.draw_image(graphics, round(box.x0), round(box.y0), upward)
            graphics.restore()

    artist = Picture()
    artist.set_zorder(2)
    return artist


def draw_set_aside(axes: Axes, x: Floats, y: Floats) -> None:
    """Points that take no part, as faint crosses."""
    if x.size:
        step = -(-x.size // MOST_SET_ASIDE)
        axes.plot(
            x[::step], y[::step], "x", color=SOFT, markersize=2.6, markeredgewidth=0.5, zorder=1.5
        )


def points_picture(
    across: Floats, down: Floats, *, width: int, height: int, colour: str
) -> NDArray[np.uint8]:
    """Points as a picture in one colour whose opacity tells how many lie on each other.

    Parameters
    ----------
    across, down : (n,) float64
        Place in the picture, 0...1 from the left and from the top; others are left out.
    width, height : int [pixel]
    colour : str
        `#rrggbb`.

    Returns
    -------
    (height, width, 4) uint8
    """
    inside = (across >= 0) & (across < 1) & (down >= 0) & (down < 1)
    column = (across[inside] * width * FINE).astype(np.int64)
    row = (down[inside] * height * FINE).astype(np.int64)
    radius, opacity = _dot(column.size)
    down_disc, across_disc = _disc(radius)
    rows = np.clip(row + down_disc, 0, height * FINE - 1)
    columns = np.clip(column + across_disc, 0, width * FINE - 1)
    places = (rows * (width * FINE) + columns).ravel()
    counts = np.bincount(places, minlength=height * width * FINE**2)
    seen = 1 - (1 - opacity) ** np.arange(61)
    covered = seen[np.minimum(counts, 60)]
    alpha = covered.reshape(height, FINE, width, FINE).mean(axis=(1, 3))
    picture = np.empty((height, width, 4), dtype=np.uint8)
    picture[..., :3] = [int(colour[at : at + 2], 16) for at in (1, 3, 5)]
    picture[..., 3] = np.round(255 * alpha)
    return picture


def _dot(count: int) -> tuple[float, float]:
    """Radius of a dot [cells] and its opacity: smaller and fainter the more there are."""
    share = np.clip(np.log10(max(count, 1) / 1000.0) / 2, 0.0, 1.0)
    return float(5.0 - 2.6 * share), float(0.55 - 0.4 * share)


def _disc(radius: float) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Cells of a dot against its middle, down and across: (m, 1) each."""
    reach = int(radius)
    down, across = np.mgrid[-reach : reach + 1, -reach : reach + 1]
    inside = down**2 + across**2 <= radius**2
    return down[inside][:, None], across[inside][:, None]


def draw_means(axes: Axes, x: Floats, y: Floats, *, bins: int) -> None:
    """Means of the points in equal parts of the axes, with their errors."""
    low, high = axes.get_xlim()
    part = np.floor((x - low) / (high - low) * bins).astype(np.int64)
    inside = (part >= 0) & (part < bins)
    part, y = part[inside], y[inside]
    count = np.bincount(part, minlength=bins)
    enough = count >= 4
    if not enough.any():
        return
    safe = np.maximum(count, 1)
    mean = np.bincount(part, weights=y, minlength=bins) / safe
    square = np.bincount(part, weights=(y - mean[part]) ** 2, minlength=bins)
    error = np.sqrt(square / np.maximum(count - 1, 1) / safe)
    middle = low + (np.arange(bins) + 0.5) / bins * (high - low)
    axes.errorbar(
        middle[enough],
        mean[enough],
        error[enough],
        fmt="o",
        color=INK,
        markersize=1.8,
        elinewidth=0.6,
        markeredgewidth=0,
        zorder=4,
    )


def zero_line(axes: Axes) -> None:
    """The line of no difference."""
    axes.axhline(0.0, color=FAINT, linewidth=0.7, zorder=1)
