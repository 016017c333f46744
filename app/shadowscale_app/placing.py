"""Where things stand in the window."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QFrame,
    QSplitter,
    QStackedWidget,
    QTabWidget,
    QToolBar,
    QVBoxLayout,
    QWidget,
)

from shadowscale_app.naming import wrapped
from shadowscale_app.panes.pane import Pane

if TYPE_CHECKING:
    from shadowscale_app.bench import Bench

UPPER = ("Folded curve", "Whole series")
LOWER = ("Eclipses", "Velocities", "Correlation", "Mass and radius", "Period")
SIDE = ("Quantities", "Settings", "Doubts", "Kept", "Help")


def place(bench: Bench) -> tuple[QStackedWidget, tuple[QTabWidget, ...]]:
    """Pictures on the left, the stars and their numbers on the right; the start page before a session."""
    tabs = tuple(_tabbed(bench, titles) for titles in (UPPER, LOWER, SIDE))
    left = _split(Qt.Orientation.Vertical, [tabs[0], tabs[1]], [320, 330])
    pictures: list[QWidget] = [
        _framed(bench.panes[title]) for title in ("To scale", "The two stars")
    ]
    right = _split(Qt.Orientation.Vertical, [*pictures, tabs[2]], [190, 110, 330])
    right.setStretchFactor(2, 1)
    whole = _split(Qt.Orientation.Horizontal, [left, right], [724, 556])
    whole.setStretchFactor(0, 1)
    holder = QWidget()
    layout = QVBoxLayout(holder)
    layout.setContentsMargins(6, 6, 6, 4)
    layout.addWidget(whole)
    stack = QStackedWidget()
    stack.addWidget(bench.start)
    stack.addWidget(holder)
    bench.setCentralWidget(stack)
    bench.setStatusBar(bench.status)
    return stack, tabs


def tool_bar(bench: Bench) -> QToolBar:
    """The tool bar, still empty."""
    bar = QToolBar("Tools")
    bar.setMovable(False)
    bar.setContextMenuPolicy(Qt.ContextMenuPolicy.PreventContextMenu)
    bench.addToolBar(bar)
    return bar


def _split(direction: Qt.Orientation, widgets: Sequence[QWidget], sizes: list[int]) -> QSplitter:
    split = QSplitter(direction)
    for widget in widgets:
        split.addWidget(widget)
    split.setSizes(sizes)
    split.setHandleWidth(6)
    split.setChildrenCollapsible(False)
    return split


def _tabbed(bench: Bench, titles: Sequence[str]) -> QTabWidget:
    tabs = QTabWidget()
    tabs.setAccessibleName(", ".join(titles))
    for title in titles:
        number = tabs.addTab(bench.panes[title], title)
        tabs.setTabToolTip(number, wrapped(bench.panes[title].about))
    return tabs


def _framed(pane: Pane) -> QFrame:
    frame = QFrame()
    frame.setObjectName("card")
    layout = QVBoxLayout(frame)
    layout.setContentsMargins(1, 1, 1, 1)
    layout.addWidget(pane)
    return frame
