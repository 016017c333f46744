"""What this program is."""

from __future__ import annotations

from PySide6.QtWidgets import QMessageBox, QWidget

from shadowscale._version import __version__


def tell_about(parent: QWidget) -> None:
    """Version and purpose."""
    QMessageBox.about(
        parent, "Shadowscale",
        f"<b>Shadowscale {__version__}</b><p>Masses and radii of the stars of detached eclipsing binaries, "
        "from light curves and radial velocities.</p>",
    )  # fmt: skip
