"""Figures of the light: whole curves, and each eclipse enlarged, with residuals."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from shadowscale.geometry.contacts import EclipseContacts
from shadowscale.sheet.figure_data import (
    WHOLE,
    BandPoints,
    Floats,
    Shown,
    around,
    eclipse_window,
)
from shadowscale.sheet.figure_frame import (
    INK,
    LEFT,
    RIGHT,
    SOFT,
    WIDTH,
    Place,
    few_ticks,
    label_band,
    no_x_labels,
)
from shadowscale.sheet.figure_points import draw_means, draw_points, draw_set_aside, zero_line

if TYPE_CHECKING:
    from matplotlib.axes import Axes

POINTS = "#4c7fa8"  # between ink and paper, on both
TOP, FOOT, GAP = 0.06, 0.42, 0.05  # [inches]
TALLEST = 9.2
NAMES = {1: "primary", 2: "secondary"}


def light_curve_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    return WIDTH, _height(shown, 2.5, 1.85)


def _height(shown: Shown, alone: float, each: float) -> float:
    """Of a figure with a part for every band; two bands leave room for another figure on a page."""
    count = len(shown.bands)
    return min(TALLEST, TOP + FOOT + (alone if count == 1 else each * count))


def draw_light_curve(place: Place, shown: Shown) -> None:
    """Every band: the whole curve with the model, residuals below it."""
    share = (place.height - TOP - FOOT) / len(shown.bands)
    width = place.width - LEFT - RIGHT
    for number, points in enumerate(shown.bands):
        bottom = place.height - TOP - (number + 1) * share
        last = number == len(shown.bands) - 1
        upper = place.axes(LEFT, bottom + 0.34 * share, width, 0.66 * share - 0.09)
        lower = place.axes(LEFT, bottom + GAP, width, 0.34 * share - 2 * GAP)
        _light_panel(upper, points, points.phase, WHOLE, shown=shown)
        _residual_panel(lower, points, points.phase, WHOLE, shown=shown, bins=100)
        label_band(upper, points.band, low=True)
        no_x_labels(upper)
        if last:
            lower.set_xlabel("Phase")
        else:
            no_x_labels(lower)


def eclipses_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    return WIDTH, _height(shown, 2.75, 2.05)


def draw_eclipses(place: Place, shown: Shown) -> None:
    """Every band: each eclipse with the model and its contacts, residuals below."""
    share = (place.height - TOP - FOOT) / len(shown.bands)
    count = len(shown.eclipses)
    width = (place.width - LEFT * count - RIGHT) / max(count, 1)
    for row, points in enumerate(shown.bands):
        bottom = place.height - TOP - (row + 1) * share
        for column, (number, eclipse) in enumerate(shown.eclipses.items()):
            left = LEFT + column * (width + LEFT)
            upper = place.axes(left, bottom + 0.36 * share, width, 0.64 * share - 0.09)
            lower = place.axes(left, bottom + GAP, width, 0.36 * share - 2 * GAP)
            _eclipse(upper, lower, points, eclipse, shown=shown)
            label_band(upper, f"{points.band}, {NAMES[number]}", low=True)
            if column:
                upper.set_ylabel("")
                lower.set_ylabel("")
            if row == len(shown.bands) - 1:
                lower.set_xlabel("Phase")
            else:
                no_x_labels(lower)


def _eclipse(
    upper: Axes, lower: Axes, points: BandPoints, eclipse: EclipseContacts, *, shown: Shown
) -> None:
    window = eclipse_window(eclipse)
    phase = around(points.phase, window)
    _light_panel(upper, points, phase, window, shown=shown)
    _residual_panel(lower, points, phase, window, shown=shown, bins=30)
    no_x_labels(upper)
    few_ticks(lower, x=5)
    few_ticks(upper, x=5)
    inner = (eclipse.second, eclipse.third)
    for contact in (eclipse.first, eclipse.fourth, *inner):
        if np.isfinite(contact):
            for axes in (upper, lower):
                axes.axvline(
                    contact,
                    color=SOFT,
                    linewidth=0.6,
                    linestyle=(0, (1, 2) if contact in inner else (4, 2)),
                    zorder=1,
                )


def _light_panel(
    axes: Axes,
    points: BandPoints,
    phase: Floats,
    window: tuple[float, float],
    *,
    shown: Shown,
) -> None:
    seen = (phase >= window[0]) & (phase <= window[1])
    near = (points.curve_phase >= window[0]) & (points.curve_phase <= window[1])
    used = seen & points.used
    axes.set_xlim(*window)
    axes.set_ylim(*_limits(points.y[used], points.curve[near], downward=shown.magnitudes))
    draw_points(axes, phase[used], points.y[used], colour=POINTS)
    aside = seen & ~points.used
    draw_set_aside(axes, phase[aside], points.y[aside])
    axes.plot(points.curve_phase[near], points.curve[near], color=INK, linewidth=0.9, zorder=3)
    axes.set_ylabel("\N{GREEK CAPITAL LETTER DELTA} mag" if shown.magnitudes else "Relative flux")
    few_ticks(axes, y=5)


def _residual_panel(
    axes: Axes,
    points: BandPoints,
    phase: Floats,
    window: tuple[float, float],
    *,
    shown: Shown,
    bins: int,
) -> None:
    seen = (phase >= window[0]) & (phase <= window[1])
    used = seen & points.used
    reach = _reach(points.residual[points.used])
    axes.set_xlim(*window)
    axes.set_ylim(*((reach, -reach) if shown.magnitudes else (-reach, reach)))
    zero_line(axes)
    draw_points(axes, phase[used], points.residual[used], colour=POINTS)
    aside = seen & ~points.used
    draw_set_aside(axes, phase[aside], points.residual[aside])
    draw_means(axes, phase[used], points.residual[used], bins=bins)
    axes.set_ylabel("O \N{MINUS SIGN} C")
    label_band(axes, "mmag" if shown.magnitudes else "parts per thousand", bold=False)
    few_ticks(axes, y=4)


def _limits(y: Floats, curve: Floats, *, downward: bool) -> tuple[float, float]:
    """Limits that hold the curve, nearly all points, and words below; magnitudes grow downward."""
    ends = [curve.min(), curve.max()]
    if y.size:
        low, high = np.percentile(y[np.isfinite(y)], [0.2, 99.8])
        ends += [low, high]
    low, high = min(ends), max(ends)
    room, foot = ((high - low) * share or 1e-3 for share in (0.08, 0.2))
    return (high + foot, low - room) if downward else (low - foot, high + room)


def _reach(residual: Floats) -> float:
    """Half the height of a residual panel: nearly all points, and never nothing."""
    if not residual.size:
        return 1.0
    return 1.25 * float(np.percentile(np.abs(residual), 99.5)) or 1.0
