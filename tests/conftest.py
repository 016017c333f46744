"""Settings of all tests: Qt only where it can be loaded, one compile cache for all processes."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")


def _qt_trouble() -> str:
    """Why Qt's widgets cannot be loaded here; empty where they can."""
    try:
        import PySide6.QtGui
        import PySide6.QtTest
        import PySide6.QtWidgets  # noqa: F401
    except ImportError as error:
        return str(error)
    return ""


QT_TROUBLE = _qt_trouble()
# pytest-qt would stop the whole run where a system library of Qt is missing.
pytest_plugins = [] if QT_TROUBLE else ["pytestqt.plugin"]
collect_ignore = ["app"] if QT_TROUBLE else []


@pytest.fixture(scope="session")
def qt_trouble() -> str:
    """Why Qt cannot be loaded; empty where it can."""
    return QT_TROUBLE


@pytest.fixture(scope="session")
def root() -> Path:
    """The top folder of the project."""
    return Path(__file__).resolve().parents[1]
