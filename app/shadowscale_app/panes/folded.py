"""The folded curve: all points over phase, the model, the markers."""

from __future__ import annotations

from PySide6.QtWidgets import QVBoxLayout, QWidget

from shadowscale.view.light_points import ephemeris
from shadowscale_app.panes.chips import BandChips
from shadowscale_app.panes.empty import Inviting
from shadowscale_app.panes.light_pair import LightPair
from shadowscale_app.panes.marking import Marking
from shadowscale_app.panes.pane import Pane

NOTHING = (
    "All points over the phase of the orbit appear here once the period is known. Solving finds it."
)


class FoldedPane(Pane):
    """Light over phase \N{MINUS SIGN}0.25 to 0.75."""

    title = "Folded curve"
    about = (
        "Every measurement at its phase in the orbit. Phase 0 is the middle of primary eclipse. The solid line "
        "is the fitted model, the dashed line the model that your contact markers alone give. Bars along the top "
        "are the eclipse windows, whose points count as that eclipse, and stretches outside eclipse: where there are "
        "any, they alone tell the light outside. Points of an excluded stretch take part in nothing. Crosses are points set aside, rings those that the fit took for outliers."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.pair = LightPair("Folded curve", groups=("contact", "window"))
        self.pair.curve.home_x = (-0.26, 0.76)
        self.pair.curve.setXRange(-0.26, 0.76, padding=0)
        self.pair.pointed.connect(self.pointed)
        self.marking = Marking(self, (self.pair,))
        self.chips = BandChips()
        self.chips.looked.connect(self.looked)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.chips)
        self.inviting = Inviting(self.pair, NOTHING, "Solve")
        self.inviting.accepted.connect(lambda: self.asked.emit("solve", None))
        layout.addWidget(self.inviting, 1)

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed."""
        self.inviting.show_picture(ephemeris(self.session) is not None)
        self.pair.show_light(self.session, names)
        if names & {"photometry", "view"}:
            self.chips.show_bands(self.session)

    def point(self, phase: float) -> None:
        """Show the phase under the cursor."""
        self.pair.point(phase)
