"""Light and residuals over phase, one above the other: the picture of the folded curve and of each eclipse."""

from __future__ import annotations

import pyqtgraph as pg
from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QPen
from PySide6.QtWidgets import QSplitter, QVBoxLayout, QWidget

from shadowscale.data.photometry import Photometry
from shadowscale.session.session import Session
from shadowscale.view.bins import binned
from shadowscale.view.curves import Curve, contact_curves, fitted_curves
from shadowscale.view.light_points import (
    LightPoints,
    band_shifts,
    ephemeris,
    light_over_phase,
    sensible_range,
)
from shadowscale.view.looks import Look, look_of
from shadowscale_app import theme
from shadowscale_app.plots.few_axis import FewAxis
from shadowscale_app.plots.marked import MarkedPicture
from shadowscale_app.plots.picture import Picture
from shadowscale_app.plots.points import Layer, Points
from shadowscale_app.warm import READY

LIGHT = frozenset({"photometry", "system", "solution", "view", "plan", "exclusions"})
STILL = 0.02  # of a picture's height: less does not move its axis
ROOMY = 0.5  # of a picture's height: what fills so much of it does not ask for another
EMPTY = 0.01  # to either side of zero, while there are no residuals
REST_HEIGHT = 78  # pixels of the residuals with their axis, at least
MOST_CROSSES = 200  # more of them are drawn small and faint
MOST_BARS, PLAIN_SIZE, CROWDED_SIZE = 1200, 5.0, 3.2  # of one band; pixels
POINTS = frozenset({"photometry", "solution", "view", "plan", "exclusions"})


class LightPair(QWidget):
    """A marked picture of the light and a lower one of the residuals."""

    pointed = Signal(float)

    def __init__(
        self, name: str, *, groups: tuple[str, ...], only: str = "", bin_width: float = 0.004
    ) -> None:
        super().__init__()
        self.only, self.bin_width = only, bin_width
        self.curve = MarkedPicture(name, groups=groups, only=only)
        self.rest = Picture(
            f"Residuals, {name.lower()}", bottom="phase", axes={"left": FewAxis("left")}
        )
        self.points, self.rest_points = Points(), Points()
        self._models: list[pg.PlotCurveItem] = []
        self._fits = (False, False)
        self._cursor = [_cursor_line(), _cursor_line()]
        self._zero = pg.InfiniteLine(0.0, angle=0)
        self._shifts: tuple[float, ...] = ()
        self._seen: Photometry | None = None
        self._light: tuple[LightPoints, ...] = ()
        self._rest: tuple[LightPoints, ...] = ()
        self._folding: tuple[float, float] | None = None
        self._axes: tuple[bool, float | None] | None = None  # in magnitudes; period of the hours
        self._place()

    def show_light(self, session: Session, names: frozenset[str]) -> None:
        """Draw what changed."""
        if "name" in names and session.photometry is not self._seen:  # another piece of work
            self.forget_heights()
        self._seen = session.photometry
        look = look_of(session.view)
        folding = ephemeris(session)
        if names & POINTS or folding != self._folding:
            self._folding = folding
            self._show_points(session, look)
            self._show_residuals(session, look)
        elif "system" in names:
            self._show_residuals(session, look)
        if names & LIGHT or "contact" in names:
            self._show_models(session, look)
        if "view" in names:
            self.curve.set_inverted(look.magnitudes)
            self.rest.box.invertY(look.magnitudes)
        if names & {"markers", "view"}:
            groups = (
                look.groups if not self.only else tuple(g for g in look.groups if g == "contact")
            )
            self.curve.show_groups(groups, session.markers)
        if names & {"view", "system", "plan"}:
            self._show_axes(session, look)

    def zoom(self, x: tuple[float, float]) -> None:
        """Show a stretch of phases, as high as its own points reach."""
        if self.curve.home_x == x:
            return
        self.curve.home_x = x
        self.curve.setXRange(*x, padding=0)
        self.forget_heights()
        self._fit(self.curve, self._light, self._shifts)
        self._fit(self.rest, self._rest, tuple(0.0 for _ in self._rest))

    def forget_heights(self) -> None:
        """The next points decide anew how high the pictures are."""
        self.curve.home_y = self.rest.home_y = None

    def point(self, phase: float) -> None:
        """Show the phase under the cursor."""
        for line in self._cursor:
            line.setPos(phase)
            line.setVisible(True)

    def dress(self) -> None:
        """Take the theme's colours."""
        now = theme.colours()
        self._zero.setPen(theme.pen(now.model, width=1.2))
        for line in self._cursor:
            line.setPen(theme.pen(now.quiet, width=1, style=Qt.PenStyle.DotLine))

    def _place(self) -> None:
        split = QSplitter(Qt.Orientation.Vertical)
        split.addWidget(self.curve)
        split.addWidget(self.rest)
        split.setStretchFactor(0, 3)
        split.setStretchFactor(1, 1)
        split.setSizes([220, 96])
        split.setHandleWidth(2)
        split.setChildrenCollapsible(False)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(split)
        self.curve.getAxis("bottom").setStyle(showValues=False)
        self.curve.getAxis("bottom").setHeight(6)
        self.rest.link_x(self.curve)
        self.rest.setMinimumHeight(REST_HEIGHT)
        self.rest.setYRange(-EMPTY, EMPTY)
        self.curve.addItem(self.points)
        self.rest.addItem(self.rest_points)
        self.rest.addItem(self._zero, ignoreBounds=True)
        for picture, line in zip((self.curve, self.rest), self._cursor, strict=True):
            line.setVisible(False)
            picture.addItem(line, ignoreBounds=True)
            picture.pointed.connect(self.pointed)
        self.dress()

    def _show_points(self, session: Session, look: Look) -> None:
        light = _visible(light_over_phase(session, magnitudes=look.magnitudes), look)
        self._shifts = band_shifts(light, magnitudes=look.magnitudes)
        self.points.show_layers(self._layers(light, look, shifts=self._shifts, session=session))
        self._light = light
        self._fit(self.curve, light, self._shifts)

    def _fit(
        self, picture: Picture, light: tuple[LightPoints, ...], shifts: tuple[float, ...]
    ) -> None:
        found = sensible_range(light, shifts, within=self.curve.home_x) or sensible_range(
            light, shifts
        )
        if found is not None:
            _fit_height(picture, found)

    def _show_residuals(self, session: Session, look: Look) -> None:
        computed = READY or (
            session.solution is not None and session.system is session.solution.system
        )
        rest: tuple[LightPoints, ...] = ()
        if computed:
            found = light_over_phase(session, magnitudes=look.magnitudes, residuals=True)
            rest = _visible(found, look)
        level = tuple(0.0 for _ in rest)
        self.rest_points.show_layers(self._layers(rest, look, shifts=level, session=session))
        self._rest = rest
        self._fit(self.rest, rest, level)

    def _layers(
        self,
        light: tuple[LightPoints, ...],
        look: Look,
        *,
        shifts: tuple[float, ...],
        session: Session,
    ) -> tuple[Layer, ...]:
        now = theme.colours()
        bands = 0 if session.photometry is None else len(session.photometry.bands)
        found: list[Layer] = []
        for points, shift in zip(light, shifts, strict=True):
            tint = now.band(points.band, bands)
            shape = theme.BAND_SHAPES[points.band % len(theme.BAND_SHAPES)]
            good, aside = points.used, ~points.used & ~points.outlier
            out = points.outlier
            crowd = int(good.sum())
            bars = None if look.binned or crowd > MOST_BARS else points.error[good]
            size = CROWDED_SIZE if crowd > MOST_BARS else PLAIN_SIZE
            faint = 0.25 if look.binned else 0.75
            found.append(
                Layer(points.x[good], points.y[good] + shift, bars, tint, shape, size, faint)
            )
            few = int(aside.sum()) <= MOST_CROSSES
            cross = (6.0, 0.8) if few else (3.0, 0.16)
            found.append(
                Layer(points.x[aside], points.y[aside] + shift, None, now.aside, "x", *cross)
            )
            found.append(
                Layer(points.x[out], points.y[out] + shift, None, now.badly, "ring", 7.0, 0.9)
            )
            if look.binned:
                bins = binned(
                    points.x[good], points.y[good], points.error[good], width=self.bin_width
                )
                found.append(Layer(bins.x, bins.y + shift, bins.error, tint, shape, 6.5, 1.0))
        return tuple(found)

    def _show_models(self, session: Session, look: Look) -> None:
        now = theme.colours()
        pens = (
            theme.pen(now.model, width=2.0),
            theme.pen(now.contact, width=1.3, style=Qt.PenStyle.DashLine),
        )
        wanted: list[tuple[Curve, float, QPen]] = []
        if READY:
            fitted = fitted_curves(session, magnitudes=look.magnitudes)
            contacts = contact_curves(session, magnitudes=look.magnitudes)
            for curves, pen in zip((fitted, contacts), pens, strict=True):
                wanted += [(curve, shift, pen) for curve, shift in self._shifted(curves, look)]
        while len(self._models) < len(wanted):
            item = pg.PlotCurveItem(antialias=True)
            item.setZValue(10)
            self.curve.addItem(item, ignoreBounds=True)
            self._models.append(item)
        for number, item in enumerate(self._models):
            item.setVisible(number < len(wanted))
            if number < len(wanted):
                curve, shift, pen = wanted[number]
                item.setData(curve.x, curve.y + shift, pen=pen)

    def _shifted(self, curves: tuple[Curve, ...], look: Look) -> list[tuple[Curve, float]]:
        shown = [curve for curve in curves if curve.label not in look.hidden]
        shifts = self._shifts if len(self._shifts) == len(shown) else (0.0,) * len(shown)
        return list(zip(shown, shifts, strict=True))

    def _show_axes(self, session: Session, look: Look) -> None:
        period = (
            session.system.value("period") if session.system is not None else session.plan.period
        )
        axes = (look.magnitudes, period if look.hours else None)
        if axes == self._axes:
            return
        self._axes = axes
        self.curve.name_axis("left", "magnitude" if look.magnitudes else "light")
        self.rest.name_axis("left", "O\N{MINUS SIGN}C")
        axis = self.rest.getAxis("bottom")
        if look.hours and period is not None:
            axis.setScale(period * 24.0)
            self.rest.name_axis("bottom", "hours from mid primary eclipse")
        else:
            axis.setScale(1.0)
            self.rest.name_axis("bottom", "phase")


def _fit_height(picture: Picture, found: tuple[float, float]) -> None:
    old, height = picture.home_y, found[1] - found[0]
    if old is not None:
        still = max(abs(found[0] - old[0]), abs(found[1] - old[1])) <= STILL * height
        roomy = old[0] <= found[0] and found[1] <= old[1] and height > ROOMY * (old[1] - old[0])
        if still or roomy:  # points that were set aside stay in view, to be taken back
            return
    picture.home_y = found
    picture.setYRange(*found, padding=0)


def _visible(light: tuple[LightPoints, ...], look: Look) -> tuple[LightPoints, ...]:
    return tuple(points for points in light if points.label not in look.hidden)


def _cursor_line() -> pg.InfiniteLine:
    line = pg.InfiniteLine(0.0, angle=90)
    line.setZValue(-3)
    return line
