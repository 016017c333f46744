"""What a control is called and what it does, for the eye that rests on it and for those who cannot see."""

from __future__ import annotations

from html import escape
from typing import TypeVar

from PySide6.QtWidgets import QWidget

W = TypeVar("W", bound=QWidget)


def named(widget: W, name: str, tip: str) -> W:
    """The widget with its name, and its sentence on hover and for a screen reader."""
    widget.setAccessibleName(name)
    widget.setAccessibleDescription(tip)
    widget.setToolTip(wrapped(tip))
    return widget


def wrapped(tip: str) -> str:
    """A sentence on hover that breaks into lines: Qt does so only with rich text."""
    return f"<qt>{escape(tip)}</qt>".replace("\n", "<br>")
