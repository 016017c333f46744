"""Velocity curves of both stars with their residuals."""

from __future__ import annotations

import pyqtgraph as pg
from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QCheckBox,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QSplitter,
    QVBoxLayout,
    QWidget,
)

from shadowscale.view.curves import velocity_curves
from shadowscale.view.geometry_words import velocity_cells
from shadowscale.view.selecting import (
    can_be_two_lined,
    is_one_lined,
    outlined_velocities,
    with_one_line,
)
from shadowscale.view.velocity_points import VelocityPoints, velocities_over_phase
from shadowscale_app import theme
from shadowscale_app.desk import Change
from shadowscale_app.naming import named
from shadowscale_app.panes.empty import Invitation
from shadowscale_app.panes.pane import Pane
from shadowscale_app.plots.few_axis import FewAxis
from shadowscale_app.plots.picture import Picture
from shadowscale_app.plots.points import Layer, Points
from shadowscale_app.warm import READY

SHAPES = {1: "o", 2: "s"}
DASHES = {1: Qt.PenStyle.SolidLine, 2: Qt.PenStyle.DashLine}
WATCHED = frozenset({"velocities", "system", "solution", "plan"})
NO_TABLE = (
    "No velocities. Add a table of them to weigh the stars: masses need K1 and K2.",
    "Add velocities\N{HORIZONTAL ELLIPSIS}",
    "A table of radial velocities of one star or both; a preview shows how it is read",
)
UNFOLDED = (
    "Velocities appear here over the phase of the orbit once the period is known.",
    "Solve",
)

ONE_LINE_TIP = (
    "Treat the pair as one-lined: velocities of star 2 are left out. Then only the gravity of star 2 is "
    "known without an assumption; masses and radii need an assumed mass of star 1."
)
MASS_TIP = "A mass of star 1 with its sigma, from its spectrum or colour; all that rests on it is marked as assumed."


class VelocitiesPane(Pane):
    """Velocities over phase."""

    title = "Velocities"
    about = (
        "How fast each star moves towards us or away over the orbit. Circles and the solid line are star 1, "
        "squares and the dashed line star 2. Half the swing of a curve is K; the heavier star swings less. "
        "Offsets between sources are taken off."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.curve = Picture("Velocity curves", left="km/s")
        self.rest = Picture(
            "Residuals of the velocities",
            left="O\N{MINUS SIGN}C",
            bottom="phase",
            axes={"left": FewAxis("left")},
        )
        self.points, self.rest_points = Points(), Points()
        self._models = {star: pg.PlotCurveItem() for star in SHAPES}
        self._level = pg.InfiniteLine(0.0, angle=0)
        self._zero = pg.InfiniteLine(0.0, angle=0)
        self._cursor = pg.InfiniteLine(0.0, angle=90)
        self._cursor.setVisible(False)
        self.nothing = Invitation(*NO_TABLE)
        self.nothing.accepted.connect(self._accept)
        self.numbers = QLabel("")
        self.numbers.setFont(theme.small_font())
        self.numbers.setWordWrap(True)
        self.numbers.setContentsMargins(10, 0, 10, 2)
        self.numbers.setAccessibleName("Amplitudes and systemic velocities")
        self.numbers.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Minimum)
        self.one_line = QCheckBox("Only star 1")
        named(self.one_line, "Only star 1 is measured", ONE_LINE_TIP)
        self.one_line.clicked.connect(self._ask_one_line)
        self.mass = QPushButton("Assume its mass\N{HORIZONTAL ELLIPSIS}")
        named(self.mass, "Assume the mass of star 1", MASS_TIP)
        self.mass.clicked.connect(lambda: self.asked.emit("prior", "M1"))
        self.curve.outlined.connect(lambda corners: self._outlined(corners, residuals=False))
        self.rest.outlined.connect(lambda corners: self._outlined(corners, residuals=True))
        self._place()

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed."""
        if not names & WATCHED and "view" not in names:
            return
        found = velocities_over_phase(self.session)
        self.nothing.setVisible(not found)
        self.nothing.say(*(NO_TABLE if self.session.velocities is None else UNFOLDED))
        self.split.setVisible(bool(found))
        self.points.show_layers(_layers(found, residual=False))
        self.rest_points.show_layers(_layers(found, residual=True))
        self._show_models(bool(found))
        self._show_lines()
        quiet = theme.colours().quiet
        self.numbers.setText(
            "&nbsp;&nbsp;&nbsp;".join(
                f"{sign} <b>{value}</b> <span style='color:{quiet}'>{error}</span>"
                for sign, value, error in velocity_cells(self.session)
            )
        )

    def _accept(self) -> None:
        self.asked.emit("velocities" if self.session.velocities is None else "solve", None)

    def point(self, phase: float) -> None:
        """Show the phase under the cursor."""
        self._cursor.setPos(phase)
        self._cursor.setVisible(True)

    def _place(self) -> None:
        self.split = QSplitter(Qt.Orientation.Vertical)
        self.split.setHandleWidth(2)
        self.split.setChildrenCollapsible(False)
        for picture, points, stretch in (
            (self.curve, self.points, 3),
            (self.rest, self.rest_points, 1),
        ):
            picture.addItem(points)
            picture.pointed.connect(self.pointed)
            picture.home_x = (-0.26, 0.76)
            picture.setXRange(-0.26, 0.76, padding=0)
            self.split.addWidget(picture)
            self.split.setStretchFactor(self.split.count() - 1, stretch)
        self.rest.setMinimumHeight(84)
        self.split.setSizes([260, 100])
        for line in (*self._models.values(), self._level):
            self.curve.addItem(line)
        self.rest.addItem(self._zero)
        self.curve.addItem(self._cursor, ignoreBounds=True)
        self.curve.getAxis("bottom").setStyle(showValues=False)
        self.curve.getAxis("bottom").setHeight(6)
        self.rest.link_x(self.curve)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.split, 1)
        foot = QHBoxLayout()
        foot.setContentsMargins(0, 0, 10, 2)
        foot.addWidget(self.numbers, 1)
        foot.addWidget(self.one_line)
        foot.addWidget(self.mass)
        layout.addWidget(self.nothing, 1)
        layout.addLayout(foot)

    def _show_lines(self) -> None:
        there = self.session.velocities is not None
        one = is_one_lined(self.session)
        self.one_line.setVisible(there)
        self.one_line.setChecked(one)
        self.one_line.setEnabled(can_be_two_lined(self.session))
        self.mass.setVisible(there and one)
        self.mass.setEnabled(self.session.system is not None)

    def _ask_one_line(self, only_first: bool) -> None:
        label = "Leave out velocities of star 2" if only_first else "Use velocities of star 2"
        self.wanted.emit(Change(label, with_one_line(self.session, only_first)))
        self._show_lines()

    def _outlined(self, corners: tuple[tuple[float, float], ...], *, residuals: bool) -> None:
        rows = outlined_velocities(self.session, corners, residuals=residuals)
        if rows:
            self.asked.emit("brushed", rows)

    def _show_models(self, wanted: bool) -> None:
        now, system = theme.colours(), self.session.system
        self._cursor.setPen(theme.pen(now.quiet, style=Qt.PenStyle.DotLine))
        shown = READY and wanted and system is not None and system.has("K1")
        curves = velocity_curves(system) if shown and system is not None else ()
        found = {int(curve.label[-1]): curve for curve in curves}
        for star, line in self._models.items():
            line.setVisible(star in found)
            if star in found:
                pen = theme.pen(_tint(star), width=2.0, style=DASHES[star])
                line.setData(found[star].x, found[star].y, pen=pen)
        self._level.setVisible(bool(found))
        self._zero.setVisible(bool(found))
        if shown and system is not None:
            self._level.setPos(system.value("gamma1"))
            self._level.setPen(theme.pen(now.line, style=Qt.PenStyle.DashLine))
            self._zero.setPen(theme.pen(now.quiet))


def _layers(found: tuple[VelocityPoints, ...], *, residual: bool) -> tuple[Layer, ...]:
    layers = []
    for points in found:
        y = points.residual if residual else points.y
        good, aside = points.used & (y == y), ~points.used & (y == y)
        tint, shape = _tint(points.star), SHAPES[points.star]
        layers.append(Layer(points.x[good], y[good], points.error[good], tint, shape, 7.0, 0.9))
        layers.append(Layer(points.x[aside], y[aside], None, theme.colours().aside, "x", 8.0, 0.9))
    return tuple(layers)


def _tint(star: int) -> str:
    return theme.colours().star1 if star == 1 else theme.colours().star2
