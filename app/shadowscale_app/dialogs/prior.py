"""A Gaussian prior: its value and sigma."""

from __future__ import annotations

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QFormLayout, QLabel, QLineEdit, QWidget

from shadowscale.quantities import quantity_of
from shadowscale.session.session import Session
from shadowscale.view.written import read_number, symbol, unit_sign
from shadowscale_app.naming import named


class PriorDialog(QDialog):
    """Two numbers."""

    def __init__(self, session: Session, key: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        quantity = quantity_of(key)
        self.setWindowTitle(f"Prior on {symbol(key)}")
        value = session.system.values.get(key, 0.0) if session.system is not None else 0.0
        self.value, self.sigma = QLineEdit(f"{value:.8g}"), QLineEdit(f"{quantity.step:g}")
        named(self.value, "Value", "What is known of the quantity from elsewhere")
        named(
            self.sigma,
            "Sigma",
            "Its one-sigma error; the smaller it is, the harder the prior pulls",
        )
        self.words = QLabel(f"{quantity.meaning} {unit_sign(quantity.unit)}".strip())
        buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel
        )
        buttons.accepted.connect(self._check)
        buttons.rejected.connect(self.reject)
        form = QFormLayout(self)
        form.addRow(self.words)
        form.addRow("Value", self.value)
        form.addRow("Sigma", self.sigma)
        form.addRow(buttons)

    def numbers(self) -> tuple[float, float]:
        """Value and sigma; ValueError where they are no numbers or sigma is not positive."""
        value, sigma = read_number(self.value.text()), read_number(self.sigma.text())
        if sigma <= 0:
            raise ValueError(f"sigma must be positive, found {sigma:g}")
        return value, sigma

    def _check(self) -> None:
        try:
            self.numbers()
        except ValueError as problem:
            self.words.setText(str(problem))
            return
        self.accept()


def ask_prior(parent: QWidget | None, session: Session, key: str) -> tuple[float, float] | None:
    """Value and sigma, or None if the person gave up."""
    dialog = PriorDialog(session, key, parent)
    accepted = dialog.exec() == QDialog.DialogCode.Accepted
    dialog.deleteLater()
    return dialog.numbers() if accepted else None
