"""A picture saved as PNG, SVG or PDF: drawn whole before any file is touched."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import (
    QBuffer,
    QByteArray,
    QIODevice,
    QMarginsF,
    QPoint,
    QRectF,
    QSize,
    QSizeF,
    Qt,
)
from PySide6.QtGui import QImage, QImageWriter, QPageSize, QPaintDevice, QPainter, QPdfWriter
from PySide6.QtWidgets import QFileDialog, QWidget

from shadowscale.session.atomic import write_bytes
from shadowscale_app import trouble

KINDS = ("png", "svg", "pdf")
SCALE = 3  # pixels of a PNG for one of the screen


def ask_and_save(widget: QWidget) -> None:
    """Ask for a file and save the widget's picture there; what goes wrong is told."""
    name = widget.accessibleName().lower().replace(" ", "_") or "figure"
    path, _ = QFileDialog.getSaveFileName(
        widget, "Save figure", f"{name}.pdf", "Figure (*.pdf *.svg *.png)"
    )
    if path:
        with trouble.guard(f"saving {Path(path).name}"):
            save_figure(widget, Path(path))


def save_figure(widget: QWidget, path: Path) -> None:
    """Save a widget's picture; the file's ending says how (PDF without one).

    What is at `path` is replaced at once or not at all.

    Raises
    ------
    ValueError
        If the ending is none of png, svg, pdf.
    OSError
        If the file cannot be written.
    """
    path = path if path.suffix else path.with_suffix(".pdf")
    kind = path.suffix.lower().lstrip(".")
    if kind not in KINDS:
        raise ValueError(f"expected a file ending in .png, .svg or .pdf, found {path.name!r}")
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    {"png": _draw_png, "svg": _draw_svg, "pdf": _draw_pdf}[kind](widget, buffer)
    content = bytes(buffer.data().data())
    if not content:
        raise ValueError(f"the picture is too large to be drawn as {kind}")
    write_bytes(path, content)


def _draw_png(widget: QWidget, buffer: QBuffer) -> None:
    image = QImage(widget.size() * SCALE, QImage.Format.Format_ARGB32)
    if image.isNull():
        return
    image.fill(Qt.GlobalColor.transparent)
    _draw(widget, image, scale=SCALE)
    QImageWriter(buffer, QByteArray(b"png")).write(image)


def _draw_svg(widget: QWidget, buffer: QBuffer) -> None:
    from PySide6.QtSvg import QSvgGenerator

    generator = QSvgGenerator()
    generator.setOutputDevice(buffer)
    generator.setSize(QSize(widget.width(), widget.height()))
    generator.setViewBox(QRectF(widget.rect()))
    generator.setTitle(widget.accessibleName())
    _draw(widget, generator, scale=1.0)


def _draw_pdf(widget: QWidget, buffer: QBuffer) -> None:
    writer = QPdfWriter(buffer)
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
