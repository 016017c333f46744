"""A bench on made-up stars; Qt warnings and anything left running fail the test."""

from __future__ import annotations

import gc
import sys
import threading
from collections.abc import Generator, Iterator
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
from PySide6.QtWidgets import QApplication, QDialog

from made_up import made_up_session
from shadowscale.session.session import Session
from shadowscale_app import theme, trouble
from shadowscale_app.bench import Bench
from shadowscale_app.dialogs.brushing import ask_brush

# said by the offscreen platform about itself, not by the program
ALLOWED = ("This plugin does not support", "propagateSizeHints")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_protocol() -> Generator[None, object, object]:
    """Garbage goes between the tests, as it goes between events in the program (`garbage.py`)."""
    gc.disable()
    try:
        return (yield)
    finally:
        gc.enable()


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
    settle_in(tmp_path)
    yield
    QStandardPaths.setTestModeEnabled(False)


def settle_in(folder: Path) -> None:
    """Settings are kept in this folder from now on."""
    QSettings.setDefaultFormat(QSettings.Format.IniFormat)
    for scope in (QSettings.Scope.UserScope, QSettings.Scope.SystemScope):
        QSettings.setPath(QSettings.Format.NativeFormat, scope, str(folder))
        QSettings.setPath(QSettings.Format.IniFormat, scope, str(folder))


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
    """A new window with that session; the fit does not follow, so that no solver is needed."""
    window = built(qapp)
    put(window, session)
    yield window
    window.end()
    destroyed(window)
    assert [each.whole for each in told] == []


@pytest.fixture(scope="session")
def window(qapp: QApplication, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Bench]:
    """One window for all tests that only look, type and drag: building it takes longer than they do."""
    settle_in(tmp_path_factory.mktemp("window"))
    found = built(qapp)
    yield found
    found.end()
    destroyed(found)


@pytest.fixture
def shared(window: Bench, session: Session, told: list[trouble.Trouble]) -> Iterator[Bench]:
    """The one window as if it were new, with that session."""
    put(window, session)
    yield window
    tidied(window)
    assert [each.whole for each in told] == []


def built(application: QApplication) -> Bench:
    """A window, dressed when it is built as at start-up: that is quicker."""
    application.setStyleSheet("")
    window = Bench(immediate=True)
    theme.dress(application)
    return window


def put(window: Bench, session: Session) -> None:
    """Show a session in the window."""
    window.live.following = False
    window.resize(1280, 720)
    window.desk.begin(session)
    window.show()
    QApplication.processEvents()


def tidied(window: Bench) -> None:
    """Nothing of a test stays in the window."""
    window.live.forget()
    if window.brushing:
        window.toggle_brush()
    if window.scheme:
        window.choose_scheme(theme.FOLLOW)
    for dialog in window.findChildren(QDialog):
        dialog.deleteLater()
    QApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
    for title in ("Folded curve", "Eclipses", "Quantities"):
        window.bring(title)
    window.panes["To scale"].play.setChecked(False)
    window.panes["To scale"].point(0.0)
    window.panes["Help"].choice.setCurrentIndex(0)
    window.points.ask = ask_brush
    window.reset_views()
    window.desk.begin(Session())
    window.setFocus()
    QApplication.processEvents()


def destroyed(window: Bench) -> None:
    """The window and all that belongs to it goes."""
    window.hide()
    window.deleteLater()
    QApplication.processEvents()
    QApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
