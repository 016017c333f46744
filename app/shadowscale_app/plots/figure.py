"""A picture saved as PNG, SVG or PDF: drawn whole before any file is touched."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from pyqtgraph import GraphicsView, InfiniteLine, PlotCurveItem
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
from PySide6.QtGui import QImage, QImageWriter, QPageSize, QPaintDevice, QPainter, QPdfWriter, QPen
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


@contextmanager
def _thicker_lines(widget: QWidget, factor: float) -> Iterator[None]:
    """Lines are as wide in device pixels whatever the scale: in a finer drawing they are made wider."""
    views = [
        each for each in (widget, *widget.findChildren(QWidget)) if isinstance(each, GraphicsView)
    ]
    lines = [
        (item, item.opts["pen"] if isinstance(item, PlotCurveItem) else item.pen)
        for view in views
        for item in view.scene().items()
        if isinstance(item, PlotCurveItem | InfiniteLine)
    ]
    try:
        for item, pen in lines:
            wider = QPen(pen)
            wider.setWidthF(pen.widthF() * factor)
            item.setPen(wider)
        yield
    finally:
        for item, pen in lines:
            item.setPen(pen)


def _draw(widget: QWidget, device: QPaintDevice, *, scale: float) -> None:
    with _thicker_lines(widget, max(1.0, scale / widget.devicePixelRatioF())):
        _draw_whole(widget, device, scale)


def _draw_whole(widget: QWidget, device: QPaintDevice, scale: float) -> None:
    painter = QPainter(device)
    try:  # a painter that is not ended before its device goes takes the program with it
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.scale(scale, scale)
        # through the plain widget: a graphics view's own `render` leaves out its frame and background
        QWidget.render(widget, painter, QPoint())
    finally:
        painter.end()
