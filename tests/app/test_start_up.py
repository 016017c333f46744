"""What is loaded when the window first paints, and what an empty window offers."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPoint, Qt, QUrl
from PySide6.QtGui import QDropEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QPushButton

from made_up import made_up_session
from shadowscale.session.session import Session
from shadowscale_app.bench import Bench
from shadowscale_app.samples import samples

HEAVY = ("numba", "scipy", "astropy", "emcee", "matplotlib")
FIRST_PAINT = """
import json, sys
from PySide6.QtWidgets import QApplication
from shadowscale_app import theme
from shadowscale_app.bench import Bench
application = QApplication([])
theme.dress(application)
bench = Bench()
painted = []
paint = bench.paintEvent
bench.paintEvent = lambda event: (painted.append(sorted(sys.modules)), paint(event))
bench.show()
application.processEvents()
bench.end()
print(json.dumps(painted[0]))
"""


CLOSE_EARLY = """
import time
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QMainWindow
from shadowscale.view import warming
from shadowscale_app.__main__ import main
warming.warm = lambda progress: time.sleep(3600)  # a compiler
application = QApplication([])

def close():
    for widget in application.topLevelWidgets():
        if isinstance(widget, QMainWindow):
            widget.close()

QTimer.singleShot(1000, close)
raise SystemExit(main([]))
"""


def test_closing_does_not_wait_for_a_compiler(tmp_path: Path) -> None:
    environment = os.environ | {"XDG_CONFIG_HOME": str(tmp_path), "XDG_DATA_HOME": str(tmp_path)}

    done = subprocess.run(
        [sys.executable, "-c", CLOSE_EARLY], env=environment, timeout=120, check=False
    )

    assert done.returncode == 0


def test_the_first_paint_has_loaded_nothing_heavy(tmp_path: Path) -> None:
    environment = os.environ | {"XDG_CONFIG_HOME": str(tmp_path), "XDG_DATA_HOME": str(tmp_path)}

    done = subprocess.run(
        [sys.executable, "-c", FIRST_PAINT],
        capture_output=True,
        text=True,
        env=environment,
        check=False,
    )

    assert done.returncode == 0, done.stderr
    loaded = {name.split(".")[0] for name in json.loads(done.stdout)}
    assert "pyqtgraph" in loaded
    assert set() == loaded & set(HEAVY)


class TestEmpty:
    """The window before anything is opened."""

    @pytest.fixture
    def session(self) -> Session:
        return Session()

    def test_it_offers_open_and_the_samples(self, bench: Bench) -> None:
        names = [button.accessibleName() for button in bench.start.findChildren(QPushButton)]

        assert bench.stack.currentWidget() is bench.start
        assert "Open" in names
        assert {title for title, _, _ in samples()} <= set(names)
        assert len(samples()) >= 1

    def test_what_needs_data_is_greyed(self, bench: Bench) -> None:
        actions = bench.actions_table.by_name

        assert actions["open"].isEnabled()
        for name in ("solve", "save", "export", "velocities", "undo", "redo", "brush", "stop"):
            assert not actions[name].isEnabled(), name

    def test_one_click_opens_a_sample(self, bench: Bench) -> None:
        title, _, path = samples()[0]
        button = next(
            b for b in bench.start.findChildren(QPushButton) if b.accessibleName() == title
        )

        QTest.mouseClick(button, Qt.MouseButton.LeftButton)

        assert bench.desk.session.photometry is not None
        assert Path(bench.desk.session.photometry_sources[0].path).parent == path.parent
        assert bench.desk.path is None  # a sample is not written over
        assert bench.stack.currentIndex() == 1
        assert bench.files.recent() == []
        assert not bench.desk.unsaved

    def test_a_dropped_session_opens(self, bench: Bench, qtbot: object) -> None:
        path = samples()[0][2]
        data = QMimeData()
        data.setUrls([QUrl.fromLocalFile(str(path))])
        event = QDropEvent(
            QPoint(9, 9),
            Qt.DropAction.CopyAction,
            data,
            Qt.MouseButton.LeftButton,
            Qt.KeyboardModifier.NoModifier,
        )

        bench.dropEvent(event)
        qtbot.waitUntil(lambda: bench.desk.session.photometry is not None)  # type: ignore[attr-defined]

        assert Path(bench.desk.session.photometry_sources[0].path).parent == path.parent
        assert bench.desk.path is None  # a sample is not written over

    def test_a_missing_file_is_told_in_words(
        self, bench: Bench, told: list, tmp_path: Path
    ) -> None:
        bench.open_paths([str(tmp_path / "nowhere.json")])

        assert len(told) == 1
        assert "nowhere.json" in told[0].sentence
        assert bench.desk.session.photometry is None
        told.clear()


def test_the_window_fits_a_small_screen(bench: Bench) -> None:
    least = bench.minimumSizeHint()

    assert least.width() <= 1280
    assert least.height() <= 720


def test_all_panes_show_a_solved_session(bench: Bench) -> None:
    bench.desk.begin(made_up_session(("V", "I")))

    for pane in bench.panes.values():
        bench.panes[pane.title].display(bench.desk.session, frozenset({"view"}))
        assert pane.about
