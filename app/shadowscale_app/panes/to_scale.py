"""The system drawn to scale at the phase under the cursor, with a play control."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSlider, QVBoxLayout, QWidget

from shadowscale.view.curves import contact_system
from shadowscale.view.scene import scene
from shadowscale.view.shown import shown_estimates
from shadowscale.view.written import phase_text
from shadowscale_app.naming import named
from shadowscale_app.panes.pane import Pane
from shadowscale_app.panes.play_button import PlayButton
from shadowscale_app.plots.sky import Sky
from shadowscale_app.warm import READY

STEPS = 2000  # of the slider in one cycle
PLAY_MS, PLAY_STEPS = 33, 6
WATCHED = frozenset({"system", "solution", "contact", "markers"})


class ToScalePane(Pane):
    """Both stars, as seen from here and from above."""

    title = "To scale"
    about = (
        "The two stars with their true relative sizes, darkened towards their limbs as the model has it, on their "
        "orbits about the centre of mass. The small picture looks down on the orbit; the arrow points to us. The "
        "dotted circle is the Sun at the same scale. The phase is the one under the cursor, or press play."
    )

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.sky = Sky()
        self.slider = QSlider(Qt.Orientation.Horizontal)
        self.slider.setRange(-STEPS // 4, 3 * STEPS // 4)
        named(
            self.slider,
            "Phase of the drawing",
            "Where in the orbit the stars are drawn; 0 is mid primary eclipse",
        )
        self.play = PlayButton()
        named(self.play, "Play", "Let the stars go round")
        self.words = QLabel("")
        self.words.setObjectName("quiet")
        self._timer = QTimer(self)
        self._timer.setInterval(PLAY_MS)
        self._timer.timeout.connect(self._step)
        self.slider.valueChanged.connect(self._slid)
        self.play.toggled.connect(self._played)
        self._place()

    @property
    def phase(self) -> float:
        """The phase that is drawn."""
        return self.slider.value() / STEPS

    def refresh(self, names: frozenset[str]) -> None:
        """Draw what changed."""
        if names & WATCHED:
            self._draw("markers" in names or "contact" in names)

    def point(self, phase: float) -> None:
        """Draw at another phase."""
        self.slider.blockSignals(True)
        self.slider.setValue(round(phase * STEPS))
        self.slider.blockSignals(False)
        self._draw(False)

    def _place(self) -> None:
        row = QHBoxLayout()
        row.setContentsMargins(8, 4, 12, 4)
        row.setSpacing(10)
        row.addWidget(self.play)
        row.addWidget(self.slider, 1)
        row.addWidget(self.words)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(0)
        layout.addWidget(self.sky, 1)
        layout.addLayout(row)
        self.words.setMinimumWidth(170)

    def _draw(self, by_contacts: bool) -> None:
        system = (contact_system(self.session) if by_contacts else None) or self.session.system
        if system is None or not READY:
            self.sky.show_scene(None)
            self.words.setText("")
            return
        found = scene(system, self.phase, estimates=shown_estimates(self.session))
        self.sky.show_scene(found)
        self.words.setText(f"{phase_text(self.phase)[:-2]}  {found.words}")

    def _slid(self, _value: int) -> None:
        self._draw(False)
        self.pointed.emit(self.phase)

    def _played(self, on: bool) -> None:
        if on:
            self._timer.start()
        else:
            self._timer.stop()

    def _step(self) -> None:
        value = self.slider.value() + PLAY_STEPS
        self.slider.setValue(value if value <= self.slider.maximum() else self.slider.minimum())
