"""The line at the foot: what goes on, how far it is, stop; and the pictures' words."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent
from PySide6.QtWidgets import QLabel, QProgressBar, QSizePolicy, QStatusBar, QToolButton, QWidget

from shadowscale.session.session import Session
from shadowscale.view.doubts import counts
from shadowscale.view.summary import summary
from shadowscale.view.written import duration_text
from shadowscale_app.naming import named


class Shortened(QLabel):
    """Plain words that end in dots where there is no room for all of them; rest the mouse for the rest."""

    def __init__(self) -> None:
        super().__init__("")
        self.setTextFormat(Qt.TextFormat.PlainText)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint what there is room for."""
        painter, area = QPainter(self), self.contentsRect()
        text = self.fontMetrics().elidedText(self.text(), Qt.TextElideMode.ElideRight, area.width())
        painter.drawText(area, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft, text)


class Status(QStatusBar):
    """Signals `stop_wanted()` for long work, `give_up_wanted()` for a file that is being read."""

    stop_wanted = Signal()
    give_up_wanted = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Status")
        self.setSizeGripEnabled(False)
        self.setContentsMargins(8, 0, 12, 0)
        self.words = Shortened()
        self.errand = QLabel("")
        self.errand_bar = QProgressBar()
        self.errand_bar.setRange(0, 0)  # nobody knows how long a file takes
        self.errand_bar.setFixedWidth(70)
        self.errand_bar.setTextVisible(False)
        named(self.errand_bar, "Reading or writing", "A file is being read or written")
        self.give_up = QToolButton()
        self.give_up.setText("Cancel")
        named(self.give_up, "Cancel reading", "Do not read this file; the session stays as it is")
        self.give_up.clicked.connect(self.give_up_wanted)
        self.live = QLabel("")
        self.live.setObjectName("quiet")
        self.fit = QLabel("")
        self.fit.setObjectName("quiet")
        self.bar = QProgressBar()
        self.bar.setRange(0, 1000)
        self.bar.setFixedWidth(130)
        self.bar.setTextVisible(False)
        named(self.bar, "Progress", "How much of the work is done")
        self.doing = QLabel("")
        self.stop = QToolButton()
        self.stop.setText("Stop")
        named(
            self.stop,
            "Stop",
            "Stop the work; what it found so far is kept where there is something",
        )
        self.stop.clicked.connect(self.stop_wanted)
        self.addWidget(self.words, 1)
        errand = (self.errand, self.errand_bar, self.give_up)
        for widget in (*errand, self.live, self.doing, self.bar, self.stop, self.fit):
            self.addPermanentWidget(widget)
        self.show_busy(False)
        self.show_errand("", False)

    def tell(self, words: str) -> None:
        """Show a sentence."""
        self.words.setText(words)
        self.words.setToolTip(words)

    def show_busy(self, busy: bool) -> None:
        """A long job begins or ends."""
        for widget in (self.bar, self.stop, self.doing):
            widget.setVisible(busy)
        if not busy:
            self.bar.setValue(0)
            self.doing.setText("")

    def show_live(self, busy: bool) -> None:
        """The live fit begins or ends."""
        self.live.setText("fitting\N{HORIZONTAL ELLIPSIS}" if busy else "")

    def show_errand(self, words: str, reads: bool) -> None:
        """A file is being read (which can be given up) or written; empty: it is done."""
        self.errand.setText(f"{words}\N{HORIZONTAL ELLIPSIS}" if words else "")
        self.errand_bar.setVisible(bool(words))
        self.give_up.setVisible(reads)

    def show_progress(self, fraction: float, words: str, left: float) -> None:
        """How far a long job is."""
        self.bar.setValue(round(1000 * fraction))
        self.doing.setText(f"{words}, {duration_text(left)} left" if left >= 0 else words)

    def show_session(self, session: Session) -> None:
        """The fit in a few numbers."""
        failed, warned = counts(session)
        marks = [f"{failed} failed"] if failed else []
        marks += [f"{warned} to think about"] if warned else []
        self.fit.setText("   ".join(part for part in (summary(session), ", ".join(marks)) if part))
