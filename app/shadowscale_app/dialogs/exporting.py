"""Export of the sheet and all that belongs to it."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from shadowscale.session.session import Session


def ask_export(parent: QWidget, session: Session, start: str) -> None:
    """Ask for a folder; ask again before anything is replaced; say what was written."""
    folder = QFileDialog.getExistingDirectory(parent, "Export to folder", start)
    if not folder:
        return
    written = export(parent, session, Path(folder))
    if written:
        names = ", ".join(path.name for path in written)
        QMessageBox.information(parent, "Exported", f"Written to {folder}:\n{names}")


def export(parent: QWidget | None, session: Session, folder: Path) -> tuple[Path, ...]:
    """Write the results; () if the person does not want files replaced."""
    from shadowscale.jobs.results import result_files, write_results

    there = [name for name in result_files(session) if (folder / name).exists()]
    if there:
        answer = QMessageBox.question(
            parent, "Replace files?", f"{folder} already holds {', '.join(there)}. Replace them?"
        )
        if answer != QMessageBox.StandardButton.Yes:
            return ()
    return write_results(session, folder, overwrite=bool(there))
