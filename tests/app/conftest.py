"""A bench on made-up stars; Qt warnings and anything left running fail the test."""

from __future__ import annotations

import sys
import threading
from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import (
    QEvent,
    QSettings,
    QStandardPaths,
    QTimer,
    QtMsgType,
    qInstallMessageHandler,
)
from PySide6.QtWidgets import QApplication

from made_up import made_up_session
from shadowscale.session.session import Session
from shadowscale_app import theme, trouble
from shadowscale_app.bench import Bench

# said by the offscreen platform about itself, not by the program
ALLOWED = ("This plugin does not support", "propagateSizeHints")


@pytest.fixture(autouse=True)
def no_qt_warnings() -> Iterator[None]:
    """A warning of Qt fails the test."""
    heard: list[str] = []

    def listen(kind: QtMsgType, _context: object, message: str) -> None:
        if kind != QtMsgType.QtDebugMsg and not message.startswith(ALLOWED):
            heard.append(message)

    before = qInstallMessageHandler(listen)
    yield
    qInstallMessageHandler(before)
    assert heard == []


@pytest.fixture(autouse=True)
def nothing_left_running() -> Iterator[None]:
    """A thread or a timer that outlives the test fails it."""
    before = set(threading.enumerate())
    yield
    application = QApplication.instance()
    left = [thread.name for thread in set(threading.enumerate()) - before if thread.is_alive()]
    assert left == []
    if application is not None:
        running = [timer for timer in application.findChildren(QTimer) if timer.isActive()]
        for widget in QApplication.topLevelWidgets():
            running += [timer for timer in widget.findChildren(QTimer) if timer.isActive()]
        assert running == []


@pytest.fixture(autouse=True)
def own_settings(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[None]:
    """Settings, journals and logs of a test go to its own folder."""
    if sys.platform == "linux":
        monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path / "share"))
    else:  # a folder for tests, though one for all of them
        QStandardPaths.setTestModeEnabled(True)
    QSettings.setDefaultFormat(QSettings.Format.IniFormat)
    for scope in (QSettings.Scope.UserScope, QSettings.Scope.SystemScope):
        QSettings.setPath(QSettings.Format.NativeFormat, scope, str(tmp_path))
        QSettings.setPath(QSettings.Format.IniFormat, scope, str(tmp_path))
    yield
    QStandardPaths.setTestModeEnabled(False)


@pytest.fixture
def told() -> Iterator[list[trouble.Trouble]]:
    """The troubles that arose."""
    found: list[trouble.Trouble] = []
    trouble.bell().arose.connect(found.append)
    yield found
    trouble.bell().arose.disconnect(found.append)


@pytest.fixture
def session() -> Session:
    """A solved session on an invented pair."""
    return made_up_session()


@pytest.fixture
def bench(qapp: QApplication, session: Session, told: list[trouble.Trouble]) -> Iterator[Bench]:
    """The window with that session; the fit does not follow, so that no solver is needed."""
    qapp.setStyleSheet(
        ""
    )  # as at start-up: the window is dressed when it is built, which is quicker
    window = Bench(immediate=True)
    theme.dress(qapp)
    window.live.following = False
    window.resize(1280, 720)
    window.desk.begin(session)
    window.show()
    qapp.processEvents()
    yield window
    window.end()
    window.hide()
    window.deleteLater()
    qapp.processEvents()
    qapp.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
    assert [each.whole for each in told] == []
