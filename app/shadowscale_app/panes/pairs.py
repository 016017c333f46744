"""Two quantities against each other: the ellipse of their common uncertainty and its weak direction."""

from __future__ import annotations

import pyqtgraph as pg
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from shadowscale.view.pairs import Pair, choices, most_correlated, pair
from shadowscale.view.written import symbol
from shadowscale_app import theme
from shadowscale_app.naming import named
from shadowscale_app.panes.empty import Inviting
from shadowscale_app.panes.pane import Pane
from shadowscale_app.plots.picture import Picture

NOTHING = "How the errors of two quantities hang together is drawn here once there is a solution."


class PairsPane(Pane):
    """The picture of any two quantities."""

    patient = True
    title = "Correlation"
    about = (
        "The common uncertainty of two quantities. The inner ellipse throws the quoted errors as its shadows on the "
        "axes; the outer one holds 68.3 % of both together. A thin slanted ellipse means that the data know a "
        "combination well and the two alone badly: the dashed line is the weak direction."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.boxes = (QComboBox(), QComboBox())
        self.picture = Picture("Correlation of two quantities")
        self.words = QLabel("")
        self.words.setWordWrap(True)
        self.words.setObjectName("quiet")
        self.words.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        row = QHBoxLayout()
        row.setContentsMargins(8, 4, 8, 2)
        row.setSpacing(8)
        for box, name in zip(self.boxes, ("Across", "Upwards"), strict=True):
            row.addWidget(QLabel(name))
            named(
                box, f"Quantity {name.lower()}", "Any quantity that has an error, fitted or derived"
            )
            box.currentIndexChanged.connect(self._draw)
            row.addWidget(box)
        row.addWidget(self.words, 1)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addLayout(row)
        self.inviting = Inviting(self.picture, NOTHING, "Solve")
        self.inviting.accepted.connect(lambda: self.asked.emit("solve", None))
        layout.addWidget(self.inviting, 1)

    def refresh(self, names: frozenset[str]) -> None:
        """Show the pairs of the present solution."""
        if not names & {"solution", "view"}:
            return
        solution = self.session.solution
        self.inviting.show_picture(solution is not None)
        names_now = choices(solution) if solution is not None else ()
        if [self.boxes[0].itemData(n) for n in range(self.boxes[0].count())] != list(names_now):
            start = most_correlated(solution) if solution is not None else None
            self._fill(names_now, start or names_now[:2])
        self._draw()

    def choose(self, first: str, second: str) -> None:
        """Show these two."""
        for box, name in zip(self.boxes, (first, second), strict=True):
            box.setCurrentIndex(box.findData(name))

    def _fill(self, names: tuple[str, ...], start: tuple[str, ...]) -> None:
        for number, box in enumerate(self.boxes):
            box.blockSignals(True)
            box.clear()
            for name in names:
                box.addItem(symbol(name), name)
            if number < len(start):
                box.setCurrentIndex(box.findData(start[number]))
            box.blockSignals(False)

    def _draw(self, _index: int = 0) -> None:
        self.picture.clear()
        solution = self.session.solution
        first, second = (box.currentData() for box in self.boxes)
        if solution is None or not first or not second or first == second:
            self.words.setText("" if solution is None else "Choose two different quantities.")
            return
        found = pair(solution, first, second)
        self._paint(found)
        self.words.setText(found.words)

    def _paint(self, found: Pair) -> None:
        now, picture = theme.colours(), self.picture
        outer = pg.PlotCurveItem(
            found.outer[:, 0], found.outer[:, 1], pen=theme.pen(now.contact, width=1.5)
        )
        inner = pg.PlotCurveItem(
            found.inner[:, 0],
            found.inner[:, 1],
            pen=theme.pen(now.contact, width=2.2),
            fillLevel=None,
            brush=None,
        )
        weak = pg.PlotCurveItem(
            found.weak[:, 0],
            found.weak[:, 1],
            pen=theme.pen(now.model, width=1.6, style=Qt.PenStyle.DashLine),
        )
        centre = pg.ScatterPlotItem(
            [found.centre[0]],
            [found.centre[1]],
            symbol="+",
            size=12,
            pen=pg.mkPen(now.ink),
            brush=None,
        )
        for item in (outer, inner, weak, centre):
            picture.addItem(item)
        for value, error, angle in (
            (found.centre[0], found.errors[0], 90),
            (found.centre[1], found.errors[1], 0),
        ):
            for end in (value - error, value + error):
                picture.addItem(
                    pg.InfiniteLine(
                        end, angle=angle, pen=theme.pen(now.grid, style=Qt.PenStyle.DashLine)
                    ),
                    ignoreBounds=True,
                )
        picture.name_axis("bottom", symbol(found.names[0]))
        picture.name_axis("left", symbol(found.names[1]))
        picture.box.enableAutoRange()
