"""The two stars in numbers, always in view: masses, radii, gravities with their errors."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QLabel, QWidget

from shadowscale.view.stars_card import card_lines
from shadowscale_app import theme
from shadowscale_app.panes.pane import Pane


class StarsPane(Pane):
    """A small table without frames."""

    title = "The two stars"
    about = (
        "Masses, radii and gravities with their 68.3 % errors. Star 1 is the one hidden at primary eclipse. Without "
        "velocities only radii as fractions of the orbit are known, and no masses are invented."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._labels: dict[tuple[int, int], QLabel] = {}
        self._shape: tuple[tuple[str, ...], bool] | None = None  # lines and scheme of the labels
        self.grid = QGridLayout(self)
        self.grid.setContentsMargins(10, 6, 10, 6)
        self.grid.setVerticalSpacing(1)
        self.grid.setHorizontalSpacing(8)
        for column, stretch in ((1, 3), (2, 3)):
            self.grid.setColumnStretch(column, stretch)

    def refresh(self, names: frozenset[str]) -> None:
        """Write the lines anew."""
        if not names & {"solution", "system", "view"}:
            return
        lines = card_lines(self.session)
        shape = (tuple(line.what for line in lines), theme.colours().dark)
        if shape != self._shape:
            self._clear()
            self._shape = shape
        if not lines:
            self._put(
                "Masses and radii appear here once there is a solution.", 0, 0, quiet=True, span=4
            )
            return
        now = theme.colours()
        self._put("star 1 \N{BLACK CIRCLE}", 0, 1, tint=now.star1)
        self._put("star 2 \N{BLACK SQUARE}", 0, 2, tint=now.star2)
        for row, line in enumerate(lines, start=1):
            self._put(line.what, row, 0, quiet=True)
            for column, (value, error) in ((1, line.star1), (2, line.star2)):
                rich = f"<b>{value}</b> <span style='color:{now.quiet}'>{error}</span>"
                self._put(rich if value else "\N{EM DASH}", row, column)
            self._put(line.unit, row, 3, quiet=True)

    def _clear(self) -> None:
        for label in self._labels.values():
            self.grid.removeWidget(label)
            label.hide()
            label.deleteLater()
        self._labels.clear()

    def _put(
        self,
        text: str,
        row: int,
        column: int,
        *,
        quiet: bool = False,
        span: int = 1,
        tint: str = "",
    ) -> None:
        """Write into a cell; its label is made once, for a drag writes often."""
        if (row, column) in self._labels:
            self._labels[row, column].setText(text)
            return
        label = self._labels[row, column] = QLabel(text)
        label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        if quiet:
            label.setObjectName("quiet")
        if tint:
            label.setStyleSheet(f"color: {tint}; font-weight: 600;")
        self.grid.addWidget(label, row, column, 1, span)
