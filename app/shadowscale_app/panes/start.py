"""The empty bench: open a file, take up recent work, or try a sample."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QGridLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from shadowscale_app.naming import named
from shadowscale_app.plots.emblem import Emblem

MOST_RECENT = 6


class StartPane(QWidget):
    """Signals: `open_wanted()`, `path_wanted(str)`, `sample_wanted(str)`."""

    open_wanted = Signal()
    path_wanted = Signal(str)
    sample_wanted = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Start")
        self._recent = QVBoxLayout()
        self._samples = QGridLayout()
        column = QVBoxLayout()
        column.setSpacing(8)
        title = QLabel("Shadowscale")
        font = title.font()
        font.setPointSizeF(font.pointSizeF() * 2.2)
        title.setFont(font)
        words = QLabel(
            "The shadow of one star on another, measured in time, gives the scale of both.\n"
            "Open photometry, add velocities, and read masses and radii."
        )
        words.setObjectName("quiet")
        opening = QPushButton("Open a light curve or session\N{HORIZONTAL ELLIPSIS}")
        opening.setObjectName("lead")
        named(opening, "Open", "Photometry or a saved session; a preview shows how it is read")
        opening.clicked.connect(self.open_wanted)
        hint = QLabel("or drop files anywhere on this window")
        hint.setObjectName("quiet")
        column.addWidget(Emblem())
        for widget in (title, words, opening, hint):
            column.addWidget(widget, 0, Qt.AlignmentFlag.AlignLeft)
        column.addSpacing(10)
        column.addLayout(self._samples)
        column.addSpacing(6)
        column.addLayout(self._recent)
        holder = QWidget()
        holder.setMaximumWidth(760)
        holder.setLayout(column)
        outer = QVBoxLayout(self)
        outer.addStretch(2)
        outer.addWidget(holder, 0, Qt.AlignmentFlag.AlignHCenter)
        outer.addStretch(3)

    def offer(self, samples: list[tuple[str, str, Path]], recent: list[Path]) -> None:
        """Buttons for the sample sessions (title, words, path) and for recent files."""
        _empty(self._samples)
        _empty(self._recent)
        if samples:
            self._samples.addWidget(
                _heading("Samples: invented stars, opened and solved at a click"), 0, 0
            )
        for number, (title, words, path) in enumerate(samples):
            button = QPushButton(f"{title}\n{words}")
            button.setObjectName("card")
            named(button, title, words)
            button.setMinimumWidth(720)
            button.clicked.connect(lambda _=False, path=path: self.sample_wanted.emit(str(path)))
            self._samples.addWidget(button, 1 + number, 0)
        if recent:
            self._recent.addWidget(_heading("Recent"))
        for path in recent[:MOST_RECENT]:
            button = QPushButton(f"{path.name}  \N{EM DASH}  {path.parent}")
            button.setFlat(True)
            button.setStyleSheet("text-align: left; padding: 3px 6px;")
            named(button, f"Open {path.name}", str(path))
            button.clicked.connect(lambda _=False, path=path: self.path_wanted.emit(str(path)))
            self._recent.addWidget(button, 0, Qt.AlignmentFlag.AlignLeft)


def _heading(words: str) -> QLabel:
    label = QLabel(words)
    label.setObjectName("title")
    return label


def _empty(layout: QGridLayout | QVBoxLayout) -> None:
    while (item := layout.takeAt(0)) is not None:
        widget = item.widget()
        if widget is not None:
            widget.hide()
            widget.deleteLater()
