"""Mouse and keyboard of a virtual display, from outside the program, and what its window tells."""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

NEEDED = ("Xvfb", "xdotool")
MISSING = [name for name in NEEDED if shutil.which(name) is None]
PATIENCE = 120.0  # s until something that must happen is given up
WATCHED = Path(__file__).parent / "watched_window.py"
SOURCE = Path(__file__).parent / "drag_source.py"
CORNER = (1215, 655)  # of the window from which files are dragged, where nothing else is


class Hand:
    """Mouse and keyboard on the virtual display, and an eye on what the window tells."""

    def __init__(self, display: str, folder: Path) -> None:
        home = {name: str(folder / "home") for name in ("HOME", "XDG_DATA_HOME", "XDG_CONFIG_HOME")}
        self.environment = {**os.environ, **home, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb"}
        self.told = folder / "seen.json"
        self.process: subprocess.Popen[bytes] | None = None

    def start(self, *paths: Path) -> None:
        """Open the window."""
        self.told.unlink(missing_ok=True)
        command = [sys.executable, str(WATCHED), str(self.told), *map(str, paths)]
        self.process = subprocess.Popen(command, env=self.environment)
        self.until(lambda seen: seen["ready"])

    def kill(self) -> None:
        """As a machine that breaks down."""
        if self.process is not None:
            self.process.send_signal(signal.SIGKILL)
            self.process.wait()
            self.process = None

    def seen(self) -> dict[str, Any]:
        """What the window tells now."""
        if self.process is not None and self.process.poll() is not None:
            raise AssertionError(f"the program ended with {self.process.returncode}")
        try:
            found: dict[str, Any] = json.loads(self.told.read_text(encoding="utf-8"))
        except OSError:
            return dict.fromkeys(("ready", "solved"), False) | {"asked": "", "busy": True}
        return found

    def until(self, wanted: Callable[[dict[str, Any]], Any]) -> dict[str, Any]:
        """What the window tells once it is as wanted."""
        end = time.monotonic() + PATIENCE
        while not wanted(seen := self.seen()):
            assert time.monotonic() < end, seen
            time.sleep(0.05)
        return seen

    def do(self, *words: object) -> None:
        """One call of xdotool."""
        command = ["xdotool", *map(str, words)]
        subprocess.run(command, env=self.environment, check=True, timeout=20)

    def click(self, place: Sequence[int]) -> None:
        """A click of the left button."""
        self.do("mousemove", *place)
        time.sleep(0.1)
        self.do("click", 1)

    def drag(self, place: Sequence[int], right: int, down: int = 0) -> None:
        """Press, move in steps, let go."""
        x, y = place
        self.do("mousemove", x, y)
        time.sleep(0.1)
        self.do("mousedown", 1)
        for step in range(1, 9):
            self.do("mousemove", x + right * step // 8, y + down * step // 8)
            time.sleep(0.03)
        self.do("mouseup", 1)

    def drop(self, *paths: Path) -> None:
        """Drag files from another program into the middle of the window."""
        command = [sys.executable, str(SOURCE), *map(str, (*CORNER, *paths))]
        with subprocess.Popen(command, env=self.environment, stdout=subprocess.PIPE) as source:
            try:
                assert source.stdout is not None
                assert source.stdout.readline() == b"ready\n"
                time.sleep(0.3)  # until it stands on the display
                self.drag([each + 30 for each in CORNER], -600, -330)
                time.sleep(0.3)  # the drop is a talk between both programs
            finally:
                source.terminate()

    def picture(self, path: Path) -> None:
        """What the whole display shows, where ImageMagick is there."""
        command = ["import", "-window", "root", str(path)]
        subprocess.run(command, env=self.environment, check=True, timeout=20)


@contextmanager
def hand_before_a_display(folder: Path, size: str = "1280x720") -> Iterator[Hand]:
    """A hand before a new virtual display."""
    read, write = os.pipe()
    display = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", f"{size}x24"], pass_fds=[write]
    )
    os.close(write)
    with os.fdopen(read) as stream:
        found = Hand(f":{stream.readline().strip()}", folder)
    (folder / "home").mkdir(exist_ok=True)
    try:
        yield found
    finally:
        found.kill()
        display.terminate()
        display.wait()
