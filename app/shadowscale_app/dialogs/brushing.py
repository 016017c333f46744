"""What to do with the points that were drawn round."""

from __future__ import annotations

from PySide6.QtWidgets import (
    QComboBox,
    QDialog,
    QDialogButtonBox,
    QLabel,
    QVBoxLayout,
    QWidget,
)

from shadowscale_app.naming import named

REASONS = ("clouds", "flare", "bad focus", "wrong star", "close to twilight", "outlier by eye")
BACK = "take back"


class BrushDialog(QDialog):
    """Asks for a reason to set points aside, or to take them back."""

    def __init__(self, count: int, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Points drawn round")
        self.back = False
        self.reason = QComboBox()
        self.reason.setEditable(True)
        self.reason.addItems(REASONS)
        named(
            self.reason,
            "Reason",
            "Stands beside each of these points in the session and in the written tables",
        )
        buttons = QDialogButtonBox()
        aside = buttons.addButton("Set aside", QDialogButtonBox.ButtonRole.AcceptRole)
        back = buttons.addButton("Take back", QDialogButtonBox.ButtonRole.ActionRole)
        buttons.addButton(QDialogButtonBox.StandardButton.Cancel)
        aside.setDefault(True)
        back.clicked.connect(self._take_back)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        layout = QVBoxLayout(self)
        layout.addWidget(
            QLabel(f"{count} point{'s' if count != 1 else ''}. Reason for setting aside:")
        )
        layout.addWidget(self.reason)
        layout.addWidget(buttons)

    def _take_back(self) -> None:
        self.back = True
        self.accept()


def ask_brush(parent: QWidget | None, count: int) -> str | None:
    """The reason, `take back`, or None if the person gave up."""
    dialog = BrushDialog(count, parent)
    accepted = dialog.exec() == QDialog.DialogCode.Accepted
    dialog.deleteLater()
    if not accepted:
        return None
    return BACK if dialog.back else dialog.reason.currentText().strip() or "set aside by hand"
