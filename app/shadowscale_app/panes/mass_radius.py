"""Masses against radii: this pair among well-studied ones."""

from __future__ import annotations

import pyqtgraph as pg
from PySide6.QtWidgets import QVBoxLayout, QWidget

from shadowscale.view.mass_radius import measured_stars, published_stars
from shadowscale_app import theme
from shadowscale_app.panes.pane import Pane
from shadowscale_app.plots.log_axis import LogAxis
from shadowscale_app.plots.picture import Picture

OTHERS = "stars of published pairs"


class MassRadiusPane(Pane):
    """The picture; rest the mouse on a point to see which star and which paper."""

    patient = True
    title = "Mass and radius"
    about = (
        "Both stars among stars of well-studied detached pairs with published masses and radii; rest the mouse on a "
        "point to read which star it is and which paper measured it. Both axes are logarithmic."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.picture = Picture(
            "Mass and radius",
            left="radius [R\N{SUN}]",
            bottom="mass [M\N{SUN}]",
            axes={side: LogAxis(side) for side in ("left", "bottom")},
        )
        self.picture.getPlotItem().setLogMode(True, True)
        self.others = pg.ScatterPlotItem(hoverable=True, tip=lambda x, y, data: data)
        self.picture.addItem(self.others)
        self.legend = pg.LegendItem(offset=(14, 6), verSpacing=-4)
        self.legend.setParentItem(self.picture.box)
        self._ours: list[pg.GraphicsObject] = []
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.picture)

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed."""
        if not names & {"solution", "system", "view"}:
            return
        now = theme.colours()
        stars = published_stars()
        self.others.setData(
            [star.log_mass for star in stars], [star.log_radius for star in stars],
            data=[star.words for star in stars], size=6, symbol="d",
            pen=pg.mkPen(now.quiet), brush=pg.mkBrush(theme.colour(now.quiet, 0.25)),
        )  # fmt: skip
        for item in self._ours:
            self.picture.removeItem(item)
        self._ours = []
        self.legend.clear()
        self.legend.setLabelTextColor(now.quiet)
        self.legend.addItem(self.others, OTHERS)
        for star, tint, shape in zip(
            measured_stars(self.session), (now.star1, now.star2), ("o", "s"), strict=False
        ):
            point = pg.ScatterPlotItem(
                [star.log_mass], [star.log_radius], symbol=shape, size=11, pen=pg.mkPen(now.paper, width=1.5),
                brush=pg.mkBrush(tint), hoverable=True, data=[star.words], tip=lambda x, y, data: data,
            )  # fmt: skip
            bars = pg.PlotCurveItem(
                star.bar_x, star.bar_y, connect="pairs", pen=theme.pen(tint, width=2)
            )
            for item in (bars, point):
                self.picture.addItem(item)
                self._ours.append(item)
            self.legend.addItem(point, f"star {len(self._ours) // 2}")
        self.picture.box.enableAutoRange()
