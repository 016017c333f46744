"""The bands as a legend that can be switched: colour and shape of each."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QToolButton, QWidget

from shadowscale.session.session import Session
from shadowscale.view.looks import look_of
from shadowscale_app import theme
from shadowscale_app.naming import named

SIGNS = {  # of a band that is shown, and of one that is hidden
    "o": "\N{BLACK CIRCLE}\N{WHITE CIRCLE}",
    "t1": "\N{BLACK UP-POINTING TRIANGLE}\N{WHITE UP-POINTING TRIANGLE}",
    "s": "\N{BLACK SQUARE}\N{WHITE SQUARE}",
    "d": "\N{BLACK DIAMOND}\N{WHITE DIAMOND}",
    "t": "\N{BLACK DOWN-POINTING TRIANGLE}\N{WHITE DOWN-POINTING TRIANGLE}",
    "p": "\N{BLACK PENTAGON}\N{WHITE PENTAGON}",
    "h": "\N{BLACK HEXAGON}\N{WHITE HEXAGON}",
}


class BandChips(QWidget):
    """One switch a band; hidden where there is only one band. Signal `looked(mapping)`."""

    looked = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Bands")
        self.buttons: list[QToolButton] = []
        self._row = QHBoxLayout(self)
        self._row.setContentsMargins(64, 1, 6, 1)
        self._row.setSpacing(4)
        self._row.addStretch(1)

    def show_bands(self, session: Session) -> None:
        """Make the switches anew."""
        for button in self.buttons:
            self._row.removeWidget(button)
            button.hide()
            button.deleteLater()
        bands = () if session.photometry is None else session.photometry.bands
        hidden = look_of(session.view).hidden
        self.buttons = [
            self._button(number, band, bands, hidden) for number, band in enumerate(bands)
        ]
        for number, button in enumerate(self.buttons):
            self._row.insertWidget(number, button)
        self.setVisible(len(bands) > 1)

    def _button(
        self, number: int, band: str, bands: tuple[str, ...], hidden: tuple[str, ...]
    ) -> QToolButton:
        button = QToolButton()
        shape = theme.BAND_SHAPES[number % len(theme.BAND_SHAPES)]
        button.setText(f"{SIGNS[shape][band in hidden]} {band}")
        button.setCheckable(True)
        button.setChecked(band not in hidden)
        now = theme.colours()
        tint = now.quiet if band in hidden else now.band(number, len(bands))
        button.setStyleSheet(f"QToolButton {{ color: {tint}; padding: 0 6px; }}")
        named(button, f"Band {band}", f"Show or hide band {band}")
        button.clicked.connect(lambda: self._toggle(band, hidden))
        return button

    def _toggle(self, band: str, hidden: tuple[str, ...]) -> None:
        others = [each for each in hidden if each != band]
        self.looked.emit({"hidden": others if band in hidden else [*hidden, band]})
