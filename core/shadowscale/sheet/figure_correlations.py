"""Correlations as a picture."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from shadowscale.light.laws import LAWS
from shadowscale.quantities import parse_key
from shadowscale.sheet.figure_data import Floats, Shown
from shadowscale.sheet.figure_frame import BLUE, FAINT, VERMILLION, WIDTH, Place

if TYPE_CHECKING:
    from matplotlib.axes import Axes

CORRELATION_CELL = 0.155  # [inches]
NAMES_ROOM = 0.95
MOST_NAMES = 48
LEAST = 0.03  # weaker ones are not drawn


def correlations_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    count = min(len(shown.correlation_names), MOST_NAMES)
    return WIDTH, count * _cell(count) + NAMES_ROOM + 0.1


def _cell(count: int) -> float:
    return min(CORRELATION_CELL, (WIDTH - NAMES_ROOM - 0.1) / max(count, 1))


def draw_correlations(place: Place, shown: Shown) -> None:
    """Half the matrix: squares for positive, circles for negative, their size the strength."""
    names = shown.correlation_names[:MOST_NAMES]
    count = len(names)
    side = count * _cell(count)
    axes = place.axes(NAMES_ROOM, NAMES_ROOM, side, side)
    matrix = np.nan_to_num(shown.correlations[:count, :count])
    row, column = np.tril_indices(count, -1)
    _draw_marks(axes, column, row, matrix[row, column], cell=1.0)
    axes.set_xlim(-0.5, count - 0.5)
    axes.set_ylim(count - 0.5, -0.5)
    law = LAWS[shown.law]
    labels = [short_name(name, law.coefficients) for name in names]
    axes.set_xticks([])
    axes.set_yticks([])
    for number, label in enumerate(labels):  # ticks with labels would take three times as long
        below, left = (number, count - 0.3), (-0.7, number)
        axes.text(*below, label, rotation=90, fontsize=6.5, ha="center", va="top")
        axes.text(*left, label, fontsize=6.5, ha="right", va="center")
    _grid(axes, count)
    for spine in ("top", "right"):
        axes.spines[spine].set_visible(False)
    _key(place, side)


def _draw_marks(axes: Axes, x: Any, y: Any, value: Floats, *, cell: float) -> None:
    """Squares and circles whose area goes with the value; each kind in one piece, as 500 would be slow."""
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path

    half = 0.45 * cell * np.sqrt(np.abs(value))
    square: Any = Path([(-1, -1), (1, -1), (1, 1), (-1, 1), (-1, -1)], closed=True)
    circle: Any = Path.unit_circle()
    ways: tuple[tuple[Any, Any, dict[str, Any]], ...] = (
        (square, value > LEAST, {"facecolor": BLUE, "linewidth": 0.0}),
        (circle, value < -LEAST, {"facecolor": "none", "edgecolor": VERMILLION, "linewidth": 0.8}),
    )
    for shape, those, style in ways:
        if those.any():
            middles = np.column_stack([x[those], y[those]])[:, None, :]
            corners = middles + half[those][:, None, None] * shape.vertices
            codes = np.tile(shape.codes, int(those.sum()))
            axes.add_patch(PathPatch(Path(corners.reshape(-1, 2), codes), **style))


def _grid(axes: Axes, count: int) -> None:
    """Lines between the cells of the lower half, in one piece."""
    from matplotlib.collections import LineCollection

    lines = [[(-0.5, n - 0.5), (n - 0.5, n - 0.5)] for n in range(1, count)]
    lines += [[(n + 0.5, n + 0.5), (n + 0.5, count - 0.5)] for n in range(count - 1)]
    axes.add_collection(LineCollection(lines, colors=FAINT, linewidths=0.3, zorder=0))


def _key(place: Place, side: float) -> None:
    """What the marks mean, in the empty half."""
    left = NAMES_ROOM + max(0.62 * side, side - 1.7)
    axes = place.axes(left, place.height - 0.95, 1.6, 0.85)
    axes.set_axis_off()
    axes.set_xlim(0, 1.6)
    axes.set_ylim(0, 0.85)
    steps = np.array([0.3, 0.6, 1.0])
    for y, sign, words in ((0.72, 1, "positive"), (0.48, -1, "negative")):
        x = 0.1 + 0.17 * np.arange(3)
        _draw_marks(axes, x, np.full(3, y), sign * steps, cell=CORRELATION_CELL)
        axes.text(0.62, y, words, fontsize=7, va="center")
    axes.text(0.02, 0.24, "0.3, 0.6, 1.0", fontsize=7, va="center")


def short_name(text: str, coefficients: tuple[str, ...]) -> str:
    """A key as a label in mathtext: `limb_darkening1[V].2` becomes `u_1 alpha, V` in italics."""
    parsed = parse_key(text)
    label = f"${parsed.quantity.tex}$"
    if parsed.number is not None:
        coefficient = coefficients[parsed.number - 1]
        signs = {"alpha": r"$\alpha$", "c": "$c$"}
        label += f" {signs.get(coefficient, coefficient)}"
    return label if parsed.label is None else f"{label}, " + parsed.label.replace("$", r"\$")
