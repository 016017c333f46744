"""What stands where a picture will be: a sentence, and the button that makes it come."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QLabel, QPushButton, QStackedWidget, QVBoxLayout, QWidget

from shadowscale_app.naming import named

SOLVING = "Finds period, radii and, with velocities, masses from the data alone"


class Invitation(QWidget):
    """Signal `accepted()`."""

    accepted = Signal()

    def __init__(self, words: str, button: str, tip: str = SOLVING) -> None:
        super().__init__()
        self.words = QLabel()
        self.words.setObjectName("quiet")
        self.words.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.words.setWordWrap(True)
        self.button = QPushButton()
        self.button.setObjectName("lead")
        self.say(words, button, tip)
        self.button.clicked.connect(self.accepted)
        layout = QVBoxLayout(self)
        layout.setSpacing(10)
        layout.addStretch(1)
        layout.addWidget(self.words)
        layout.addWidget(self.button, 0, Qt.AlignmentFlag.AlignHCenter)
        layout.addStretch(1)

    def say(self, words: str, button: str, tip: str = SOLVING) -> None:
        """Invite to something else."""
        self.words.setText(words)
        self.button.setText(button)
        named(self.button, button, tip)


class Inviting(QStackedWidget):
    """A picture, or the invitation while there is nothing to draw. Signal `accepted()`."""

    accepted = Signal()

    def __init__(self, inner: QWidget, words: str, button: str) -> None:
        super().__init__()
        self.invitation = Invitation(words, button)
        self.invitation.accepted.connect(self.accepted)
        self.addWidget(inner)
        self.addWidget(self.invitation)

    def show_picture(self, there: bool) -> None:
        """The picture, or the invitation."""
        self.setCurrentIndex(0 if there else 1)
