"""Correlations as a picture."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from shadowscale.light.laws import LAWS
from shadowscale.quantities import parse_key
from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figure_frame import BLUE, FAINT, VERMILLION, WIDTH, Place

if TYPE_CHECKING:
    from matplotlib.axes import Axes

CORRELATION_CELL = 0.155  # [inches]
NAMES_ROOM = 0.95
MOST_NAMES = 48


def correlations_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    count = min(len(shown.solution.correlation_names), MOST_NAMES)
    return WIDTH, count * _cell(count) + NAMES_ROOM + 0.1


def _cell(count: int) -> float:
    return min(CORRELATION_CELL, (WIDTH - NAMES_ROOM - 0.1) / max(count, 1))


def draw_correlations(place: Place, shown: Shown) -> None:
    """Half the matrix: squares for positive, circles for negative, their size the strength."""
    names = shown.solution.correlation_names[:MOST_NAMES]
    count = len(names)
    side = count * _cell(count)
    axes = place.axes(NAMES_ROOM, NAMES_ROOM, side, side)
    matrix = np.nan_to_num(np.asarray(shown.solution.correlations)[:count, :count])
    row, column = np.tril_indices(count, -1)
    value = matrix[row, column]
    largest = (72 * _cell(count) * 0.9) ** 2
    for sign, shape, colour in ((1, "s", BLUE), (-1, "o", VERMILLION)):
        those = sign * value > 0.03
        axes.scatter(
            column[those],
            row[those],
            s=largest * np.abs(value[those]),
            marker=shape,
            facecolor=colour if sign > 0 else "none",
            edgecolor=colour,
            linewidth=0.0 if sign > 0 else 0.8,
        )
    axes.set_xlim(-0.5, count - 0.5)
    axes.set_ylim(count - 0.5, -0.5)
    law = LAWS[shown.solution.system.law]
    labels = [short_name(name, law.coefficients) for name in names]
    axes.set_xticks(range(count), labels, rotation=90, fontsize=6.5)
    axes.set_yticks(range(count), labels, fontsize=6.5)
    axes.tick_params(length=0, top=False, right=False, pad=2)
    _grid(axes, count)
    for spine in ("top", "right"):
        axes.spines[spine].set_visible(False)
    _key(place, side)


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
    for row, (sign, shape, colour) in enumerate(((1, "s", BLUE), (-1, "o", VERMILLION))):
        y = 0.72 - 0.24 * row
        for step, value in enumerate((0.3, 0.6, 1.0)):
            axes.scatter(
                0.1 + 0.17 * step,
                y,
                s=(72 * CORRELATION_CELL * 0.9) ** 2 * value,
                marker=shape,
                facecolor=colour if sign > 0 else "none",
                edgecolor=colour,
                linewidth=0.0 if sign > 0 else 0.8,
            )
        axes.text(0.62, y, "positive" if sign > 0 else "negative", fontsize=7, va="center")
    axes.text(0.02, 0.24, "0.3, 0.6, 1.0", fontsize=7, va="center")


def short_name(text: str, coefficients: tuple[str, ...]) -> str:
    """A key as a label in mathtext: `limb_darkening1[V].2` becomes `u_1 alpha, V`."""
    parsed = parse_key(text)
    label = f"${parsed.quantity.tex}$"
    extra = [coefficients[parsed.number - 1]] if parsed.number is not None else []
    extra += [parsed.label.replace("$", r"\$")] if parsed.label is not None else []
    return label + (" " + ", ".join(extra) if extra else "")
