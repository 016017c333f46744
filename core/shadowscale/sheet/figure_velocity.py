"""Figures of velocities and of times of minimum."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from shadowscale.sheet.figure_data import WHOLE, Floats, Shown, StarPoints
from shadowscale.sheet.figure_frame import (
    FAINT,
    INK,
    LEFT,
    RIGHT,
    SHAPES,
    SOFT,
    STAR,
    WIDTH,
    Place,
    few_ticks,
    label_band,
    no_x_labels,
)
from shadowscale.sheet.figure_points import zero_line
from shadowscale.timing.results import Minimum

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MAIN, RESIDUAL, FOOT, TOP = 2.5, 0.85, 0.42, 0.06  # [inches]
TIMES = 1.9
MANY = 150  # error bars beyond this hide the points
MINUTES = 1440.0


def velocities_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    return WIDTH, TOP + MAIN + RESIDUAL * len(shown.stars) + FOOT


def draw_velocities(place: Place, shown: Shown) -> None:
    """Both stars over phase with the model, and the residuals of each."""
    width = place.width - LEFT - RIGHT
    count = len(shown.stars)
    upper = place.axes(LEFT, FOOT + RESIDUAL * count + 0.03, width, MAIN - 0.03)
    for points in shown.stars:
        _curve(upper, points)
    _legend(upper, shown)
    upper.set_xlim(*WHOLE)
    upper.set_ylabel("Radial velocity [km/s]")
    no_x_labels(upper)
    for row, points in enumerate(shown.stars):
        lower = place.axes(LEFT, FOOT + RESIDUAL * (count - 1 - row), width, RESIDUAL - 0.05)
        _residuals(lower, points)
        if row < count - 1:
            no_x_labels(lower)
        else:
            lower.set_xlabel("Phase")


def _curve(axes: Axes, points: StarPoints) -> None:
    axes.axhline(points.gamma, color=FAINT, linewidth=0.7, zorder=1)
    axes.plot(
        points.curve_phase,
        points.curve,
        color=STAR[points.star],
        linewidth=1.0,
        linestyle="-" if points.star == 1 else (0, (5, 1.5)),
        zorder=2,
    )
    _measured(axes, points, points.velocity)


def _measured(axes: Axes, points: StarPoints, y: Floats) -> None:
    colour = STAR[points.star]
    for source in np.unique(points.source):
        rows = (points.source == source) & points.used
        shape = SHAPES[source % 4]
        axes.errorbar(
            points.phase[rows],
            y[rows],
            points.error[rows] if rows.sum() <= MANY else None,
            fmt=shape,
            color=colour,
            markerfacecolor=colour if points.star == 1 else "white",
            markersize=3.6,
            markeredgewidth=0.8,
            elinewidth=0.7,
            zorder=3,
        )
    aside = ~points.used
    axes.plot(points.phase[aside], y[aside], "x", color=SOFT, markersize=4, markeredgewidth=0.7)


def _legend(axes: Axes, shown: Shown) -> None:
    from matplotlib.lines import Line2D

    sources = shown.sources if len(shown.sources) > 1 else ("",)
    handles = [
        Line2D(
            [],
            [],
            linestyle="none",
            marker=SHAPES[number % 4],
            color=STAR[points.star],
            markerfacecolor=STAR[points.star] if points.star == 1 else "white",
            markersize=3.6,
            markeredgewidth=0.8,
            label=f"star {points.star}" + (f", {source}" if source else ""),
        )
        for points in shown.stars
        for number, source in enumerate(sources)
    ]
    low, high = axes.get_ylim()
    axes.set_ylim(low, high + 0.16 * (high - low))
    axes.legend(
        handles=handles,
        loc="upper center",
        ncols=min(len(handles), 4),
        fontsize=7,
        handletextpad=0.1,
        columnspacing=1.2,
        borderaxespad=0.2,
    )


def _residuals(axes: Axes, points: StarPoints) -> None:
    zero_line(axes)
    _measured(axes, points, points.residual)
    within = points.used if points.used.any() else np.ones_like(points.used)
    reach = np.abs(points.residual[within]) + np.nan_to_num(points.error[within])
    limit = 1.15 * float(reach.max()) if reach.size else 1.0
    axes.set_ylim(-limit, limit)
    axes.set_xlim(*WHOLE)
    axes.set_ylabel("O \N{MINUS SIGN} C")
    label_band(axes, f"star {points.star}, km/s", bold=False)
    few_ticks(axes, y=4)


def minima_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    return WIDTH, TOP + TIMES + FOOT


def draw_minima(place: Place, shown: Shown) -> None:
    """Observed minus computed times of minimum against the cycle, in minutes."""
    axes = place.axes(LEFT, FOOT, place.width - LEFT - RIGHT, TIMES)
    zero_line(axes)
    epoch, period, second = shown.values["epoch"], shown.values["period"], shown.secondary_phase
    for eclipse, name in ((1, "primary"), (2, "secondary")):
        items = [item for item in shown.minima if item.eclipse == eclipse]
        if items:
            _times(axes, items, epoch + (second * period if eclipse == 2 else 0.0), period, name)
    axes.set_xlabel("Cycle")
    axes.set_ylabel("O \N{MINUS SIGN} C [min]")
    low, high = axes.get_ylim()
    axes.set_ylim(low, high + 0.12 * (high - low))
    axes.legend(loc="upper center", ncols=2, fontsize=7, handletextpad=0.2, borderaxespad=0.2)
    few_ticks(axes, y=5)


def _times(axes: Axes, items: list[Minimum], zero: float, period: float, name: str) -> None:
    first = name == "primary"
    cycles = np.array([item.cycle for item in items])
    late = np.array([item.time for item in items]) - zero - period * cycles
    axes.errorbar(
        cycles + (0.0 if first else 0.5),
        MINUTES * late,
        [MINUTES * item.error for item in items] if len(items) <= MANY else None,
        fmt="o" if first else "s",
        color=INK if first else STAR[2],
        markerfacecolor=INK if first else "white",
        markersize=3.4,
        markeredgewidth=0.8,
        elinewidth=0.7,
        label=name,
        zorder=3,
    )
