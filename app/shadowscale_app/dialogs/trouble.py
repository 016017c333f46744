"""The window that shows a trouble: the sentence, details folded, copy."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QMessageBox, QWidget

from shadowscale_app.trouble import Trouble

MOST_TROUBLES = 3
AS_BEFORE = "The session is as it was."


class TroubleDialog(QMessageBox):
    """Readable and copyable; it says that the session is as it was."""

    def __init__(self, trouble: Trouble, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.trouble = trouble
        expected = QMessageBox.Icon.Warning if trouble.expected else QMessageBox.Icon.Critical
        self.setIcon(expected)
        self.setWindowTitle("Shadowscale")
        self.setText(f"This happened while {trouble.doing}:")
        self.setInformativeText(trouble.sentence + (f"\n\n{AS_BEFORE}" if trouble.expected else ""))
        if not trouble.expected:
            self.setDetailedText(trouble.details)
        copy = self.addButton("Copy", QMessageBox.ButtonRole.ActionRole)
        copy.clicked.disconnect()
        copy.clicked.connect(self.copy)
        self.addButton(QMessageBox.StandardButton.Ok)

    def copy(self) -> None:
        """Put all of it on the clipboard."""
        QGuiApplication.clipboard().setText(self.trouble.whole)


def open_trouble(trouble: Trouble, parent: QWidget) -> None:
    """Show a trouble, unless it is shown already or there are many: the log has them all."""
    shown = [each.trouble.sentence for each in parent.findChildren(TroubleDialog)]
    if trouble.sentence in shown or len(shown) >= MOST_TROUBLES:
        return
    dialog = TroubleDialog(trouble, parent)
    dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
    dialog.open()
