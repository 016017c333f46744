"""A picture saved as PNG, SVG or PDF."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QMarginsF, QPoint, QRectF, QSize, QSizeF, Qt
from PySide6.QtGui import QImage, QPageSize, QPaintDevice, QPainter, QPdfWriter
from PySide6.QtWidgets import QFileDialog, QWidget

KINDS = ("png", "svg", "pdf")
SCALE = 3  # pixels of a PNG for one of the screen


def ask_and_save(widget: QWidget) -> None:
    """Ask for a file and save the widget's picture there."""
    name = widget.accessibleName().lower().replace(" ", "_") or "figure"
    path, _ = QFileDialog.getSaveFileName(
        widget, "Save figure", f"{name}.pdf", "Figure (*.pdf *.svg *.png)"
    )
    if path:
        save_figure(widget, Path(path))


def save_figure(widget: QWidget, path: Path) -> None:
    """Save a widget's picture; the file's ending says how.

    Raises
    ------
    ValueError
        If the ending is none of png, svg, pdf.
    OSError
        If the file cannot be written.
    """
    kind = path.suffix.lower().lstrip(".")
    if kind not in KINDS:
        raise ValueError(f"expected a file ending in .png, .svg or .pdf, found {path.name!r}")
    with path.open("wb"):
        pass  # says at once, and in Python's words, if the place cannot be written
    {"png": _save_png, "svg": _save_svg, "pdf": _save_pdf}[kind](widget, path)


def _save_png(widget: QWidget, path: Path) -> None:
    image = QImage(widget.size() * SCALE, QImage.Format.Format_ARGB32)
    image.fill(Qt.GlobalColor.transparent)
    _draw(widget, image, scale=SCALE)
    image.save(str(path))


def _save_svg(widget: QWidget, path: Path) -> None:
    from PySide6.QtSvg import QSvgGenerator

    generator = QSvgGenerator()
    generator.setFileName(str(path))
    generator.setSize(QSize(widget.width(), widget.height()))
    generator.setViewBox(QRectF(widget.rect()))
    generator.setTitle(widget.accessibleName())
    _draw(widget, generator, scale=1.0)


def _save_pdf(widget: QWidget, path: Path) -> None:
    writer = QPdfWriter(str(path))
    writer.setResolution(300)
    millimetres = QSizeF(widget.width(), widget.height()) * (25.4 / 96)
    writer.setPageSize(QPageSize(millimetres, QPageSize.Unit.Millimeter))
    writer.setPageMargins(QMarginsF(0, 0, 0, 0))
    writer.setTitle(widget.accessibleName())
    _draw(widget, writer, scale=writer.width() / widget.width())


def _draw(widget: QWidget, device: QPaintDevice, *, scale: float) -> None:
    painter = QPainter(device)
    try:  # a painter that is not ended before its device goes takes the program with it
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.scale(scale, scale)
        # through the plain widget: a graphics view's own `render` leaves out its frame and background
        QWidget.render(widget, painter, QPoint())
    finally:
        painter.end()
