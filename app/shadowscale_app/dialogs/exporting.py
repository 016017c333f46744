"""Where the sheet and all that belongs to it are to be written."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QMessageBox,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from shadowscale.session.session import Session
from shadowscale_app.naming import named

NAMED = 6  # files named in the question
WIDTH = 560  # [pixels]
WORDS = (
    "The sheet (for programs, spreadsheets and papers), the curves, figures, a report and the session\n"
    "are written into this folder, which is made where it does not exist yet."
)


@dataclass(frozen=True)
class Target:
    """A folder, and whether files there may be replaced."""

    folder: Path
    replace: bool


class ExportDialog(QDialog):
    """A folder, proposed and changeable."""

    def __init__(self, folder: Path, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Export sheet")
        self.setMinimumWidth(WIDTH)
        words = QLabel(WORDS)
        self.folder = QLineEdit(str(folder))
        named(self.folder, "Folder", "Where everything is written; it is made where it is missing")
        other = QPushButton("Other folder\N{HORIZONTAL ELLIPSIS}")
        named(other, "Other folder", "Choose a folder that is there already")
        other.setAutoDefault(False)
        other.clicked.connect(self._choose)
        buttons = QDialogButtonBox()
        self.export = buttons.addButton("Export", QDialogButtonBox.ButtonRole.AcceptRole)
        buttons.addButton(QDialogButtonBox.StandardButton.Cancel)
        self.export.setDefault(True)
        self.folder.textChanged.connect(lambda text: self.export.setEnabled(bool(text.strip())))
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        row = QHBoxLayout()
        row.addWidget(self.folder, 1)
        row.addWidget(other)
        layout = QVBoxLayout(self)
        layout.addWidget(words)
        layout.addLayout(row)
        layout.addWidget(buttons)

    def chosen(self) -> Path:
        """The folder that stands there."""
        return Path(self.folder.text().strip()).expanduser().absolute()

    def _choose(self) -> None:
        folder = QFileDialog.getExistingDirectory(self, "Export to folder", self.folder.text())
        if folder:
            self.folder.setText(folder)


def ask_target(parent: QWidget, session: Session, beside: Path) -> Target | None:
    """Ask for a folder, one in the folder `beside` proposed; None if the person gave up."""
    dialog = ExportDialog(beside / proposed_name(session.name), parent)
    accepted = dialog.exec() == QDialog.DialogCode.Accepted
    dialog.deleteLater()
    return agreed_target(parent, session, dialog.chosen()) if accepted else None


def proposed_name(name: str) -> str:
    """A folder's name after the session's, without what some systems refuse."""
    plain = re.sub(r"[^\w.+-]+", "_", name).strip("_.")
    return f"{plain or 'shadowscale'}_sheet"


def agreed_target(parent: QWidget | None, session: Session, folder: Path) -> Target | None:
    """The folder, with the person's word where files there would be replaced; None if not given."""
    from shadowscale.jobs.results import result_files

    there = [name for name in result_files(session) if (folder / name).exists()]
    if not there:
        return Target(folder, replace=False)
    names = ", ".join(there[:NAMED]) + (
        f" and {len(there) - NAMED} more" if len(there) > NAMED else ""
    )
    question = f"{folder} already holds {names}. Replace them?"
    answer = QMessageBox.question(parent, "Replace files?", question)
    return Target(folder, replace=True) if answer == QMessageBox.StandardButton.Yes else None
