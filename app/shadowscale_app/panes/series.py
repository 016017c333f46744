"""The whole series against time: nights, gaps, bands."""

from __future__ import annotations

import pyqtgraph as pg
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QVBoxLayout, QWidget

from shadowscale.view.light_points import (
    LightPoints,
    band_shifts,
    light_over_time,
    night_starts,
    sensible_range,
)
from shadowscale.view.looks import look_of
from shadowscale.view.selecting import outlined_light
from shadowscale.view.written import time_zero
from shadowscale_app import theme
from shadowscale_app.panes.pane import Pane
from shadowscale_app.plots.picture import Picture
from shadowscale_app.plots.points import Layer, Points

WATCHED = frozenset({"photometry", "solution", "view", "exclusions"})
MOST_NIGHT_LINES = 400


class SeriesPane(Pane):
    """Light against time."""

    patient = True
    title = "Whole series"
    about = (
        "All measurements in the order they were taken. Faint lines mark where a night or segment begins; each "
        "band has its colour and shape. Zoom with the wheel, move by dragging, zoom into a rectangle with Shift."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.picture = Picture("Whole series")
        self.points = Points()
        self.picture.addItem(self.points)
        self.picture.outlined.connect(self._outlined)
        self._nights = pg.PlotCurveItem(connect="pairs")
        self._nights.setZValue(-6)
        self.picture.addItem(self._nights, ignoreBounds=True)
        self._zero = 0.0
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.picture)

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed."""
        photometry = self.session.photometry
        if not names & WATCHED or photometry is None or not photometry.time.size:
            if photometry is None:
                self.points.show_layers(())
            return
        look = look_of(self.session.view)
        self._zero = time_zero(float(photometry.time[0]))
        light = light_over_time(self.session, zero=self._zero, magnitudes=look.magnitudes)
        shown = tuple(points for points in light if points.label not in look.hidden)
        shifts = band_shifts(shown, magnitudes=look.magnitudes)
        self.points.show_layers(_layers(shown, shifts, len(photometry.bands)))
        self._show_range(shown, shifts)
        self.picture.box.invertY(look.magnitudes)
        self.picture.name_axis("left", "magnitude" if look.magnitudes else "light")
        scale = photometry.time_scale if photometry.time_scale != "unknown" else "JD"
        self.picture.name_axis(
            "bottom", f"{scale} \N{MINUS SIGN} {self._zero}" if self._zero else scale
        )

    def _show_range(self, shown: tuple[LightPoints, ...], shifts: tuple[float, ...]) -> None:
        photometry = self.session.photometry
        found = sensible_range(shown, shifts)
        if photometry is None or found is None:
            return
        first, last = photometry.time[0] - self._zero, photometry.time[-1] - self._zero
        margin = 0.02 * (last - first) or 0.01
        home = (float(first - margin), float(last + margin))
        if self.picture.home_x != home or self.picture.home_y != found:
            self.picture.home_x, self.picture.home_y = home, found
            self.picture.reset_view()
        starts = night_starts(photometry, self._zero)
        if len(starts) > MOST_NIGHT_LINES:
            starts = starts[:0]
        x = [place for start in starts for place in (start, start)]
        self._nights.setData(x, list(found) * len(starts))
        self._nights.setPen(theme.pen(theme.colours().grid, width=1, style=Qt.PenStyle.DashLine))

    def _outlined(self, corners: tuple[tuple[float, float], ...]) -> None:
        rows = outlined_light(
            self.session, corners, look=look_of(self.session.view), zero=self._zero
        )
        if rows.size:
            self.asked.emit("brushed", rows)


def _layers(
    light: tuple[LightPoints, ...], shifts: tuple[float, ...], bands: int
) -> tuple[Layer, ...]:
    now = theme.colours()
    found = []
    for points, shift in zip(light, shifts, strict=True):
        tint = now.band(points.band, bands)
        shape = theme.BAND_SHAPES[points.band % len(theme.BAND_SHAPES)]
        good, aside = points.used, ~points.used & ~points.outlier
        out = points.outlier
        found.append(Layer(points.x[out], points.y[out] + shift, None, now.badly, "ring", 7.0, 0.9))
        found.append(
            Layer(
                points.x[good], points.y[good] + shift, points.error[good], tint, shape, 4.0, 0.75
            )
        )
        found.append(
            Layer(points.x[aside], points.y[aside] + shift, None, now.aside, "x", 6.0, 0.8)
        )
    return tuple(found)
