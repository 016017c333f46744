"""Each eclipse enlarged, with its residuals."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QSizePolicy, QSplitter, QVBoxLayout, QWidget

from shadowscale.session.session import Markers, Session
from shadowscale.view.geometry_words import geometry_lines
from shadowscale.view.light_points import ephemeris
from shadowscale_app import theme
from shadowscale_app.panes.empty import Inviting
from shadowscale_app.panes.light_pair import LightPair
from shadowscale_app.panes.marking import Marking
from shadowscale_app.panes.pane import Pane

PLAIN = {"primary": (-0.1, 0.1), "secondary": (0.4, 0.6)}
NOTHING = "Both eclipses appear here, enlarged, once the period is known."
MARGIN = 0.28  # of the duration, to either side


class EclipsesPane(Pane):
    """Primary eclipse on the left, secondary on the right."""

    title = "Eclipses"
    about = (
        "Both eclipses enlarged. Lines 1 and 4 mark where the eclipse begins and ends, 2 and 3 where its bottom "
        "begins and ends; in a partial eclipse 2 and 3 fall together. Below, what the model leaves over: a good "
        "model leaves a flat band of noise."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.pairs = {
            part: LightPair(
                f"{part.capitalize()} eclipse",
                groups=("contact",),
                only=f"{part}.",
                bin_width=0.001,
            )
            for part in PLAIN
        }
        self._placed = False
        self.marking = Marking(self, tuple(self.pairs.values()))
        split = QSplitter(Qt.Orientation.Horizontal)
        split.setHandleWidth(4)
        split.setChildrenCollapsible(False)
        for part, pair in self.pairs.items():
            pair.pointed.connect(self.pointed)
            split.addWidget(_titled(f"{part.capitalize()} eclipse", pair))
            self._zoom(part, None)
        self.inviting = Inviting(split, NOTHING, "Solve")
        self.inviting.accepted.connect(lambda: self.asked.emit("solve", None))
        self.geometry_words = QLabel("")
        self.geometry_words.setContentsMargins(5, 0, 0, 2)
        self.geometry_words.setFont(theme.small_font())
        self.geometry_words.setAccessibleName("Geometry")
        # its text changes while a marker is dragged: the layout must not follow
        self.geometry_words.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Minimum)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.inviting, 1)
        layout.addWidget(self.geometry_words)

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed; the view goes to the markers when they first appear, and stays while they move."""
        self.inviting.show_picture(ephemeris(self.session) is not None)
        for pair in self.pairs.values():
            pair.show_light(self.session, names)
        if names & {"contact", "solution", "system", "view"}:
            self.geometry_words.setText(_geometry_text(self.session))
        if {"photometry", "name"} <= names:
            self._placed = False
        if not self._placed:
            for part in PLAIN:
                self._zoom(part, self.session.markers)
            self._placed = self.session.markers is not None

    def point(self, phase: float) -> None:
        """Show the phase under the cursor."""
        for pair in self.pairs.values():
            pair.point(phase)

    def _zoom(self, part: str, markers: Markers | None) -> None:
        contacts = None if markers is None else getattr(markers, part)
        low, high = PLAIN[part] if contacts is None else (contacts[0], contacts[3])
        margin = MARGIN * (high - low) if contacts is not None else 0.0
        self.pairs[part].zoom((low - margin, high + margin))


def _geometry_text(session: Session) -> str:
    """Rich text: the contacts' geometry and the fit's, one behind the other."""
    now = theme.colours()
    tints = {"contacts": now.contact, "fit": now.model, "by hand": now.model}
    parts = []
    for line in geometry_lines(session):
        cells = "&nbsp;&nbsp;".join(
            f"{sign} <b>{value}</b><span style='color:{now.quiet}'>{error}</span>"
            for sign, value, error in line.cells
        )
        parts.append(
            f"<span style='color:{tints[line.source]}'>{line.source}</span>&nbsp;&nbsp;{cells}"
        )
    return "<br>".join(parts)


def _titled(words: str, inner: QWidget) -> QWidget:
    holder = QWidget()
    layout = QVBoxLayout(holder)
    layout.setContentsMargins(0, 2, 0, 0)
    layout.setSpacing(0)
    label = QLabel(words)
    label.setObjectName("title")
    label.setContentsMargins(66, 0, 0, 0)
    layout.addWidget(label)
    layout.addWidget(inner, 1)
    return holder
