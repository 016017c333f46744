"""Where the sheet and all that belongs to it are to be written."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from shadowscale.session.session import Session

NAMED = 6  # files named in the question


@dataclass(frozen=True)
class Target:
    """A folder, and whether files there may be replaced."""

    folder: Path
    replace: bool


def ask_target(parent: QWidget, session: Session, start: str) -> Target | None:
    """Ask for a folder; None if the person gave up."""
    folder = QFileDialog.getExistingDirectory(parent, "Export to folder", start)
    return agreed_target(parent, session, Path(folder)) if folder else None


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
