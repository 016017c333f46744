"""The program in a real window under a virtual display, driven from outside by mouse and keys."""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest

from shadowscale_app.samples import samples

NEEDED = ("Xvfb", "xdotool")
PATIENCE = 120.0  # s until something that must happen is given up
WATCHED = Path(__file__).parents[1] / "support" / "watched_window.py"

pytestmark = [
    pytest.mark.long,
    pytest.mark.skipif(
        any(shutil.which(name) is None for name in NEEDED),
        reason=f"needs {' and '.join(NEEDED)}",
    ),
]


class Hand:
    """Mouse and keyboard on the virtual display, and an eye on what the window tells."""

    def __init__(self, display: str, folder: Path) -> None:
        home = {name: str(folder / "home") for name in ("HOME", "XDG_DATA_HOME", "XDG_CONFIG_HOME")}
        self.environment = {**os.environ, **home, "DISPLAY": display, "QT_QPA_PLATFORM": "xcb"}
        self.told = folder / "seen.json"
        self.process: subprocess.Popen[bytes] | None = None

    def start(self) -> None:
        """Open the window."""
        self.told.unlink(missing_ok=True)
        command = [sys.executable, str(WATCHED), str(self.told)]
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

    def click(self, place: list[int]) -> None:
        """A click of the left button."""
        self.do("mousemove", *place)
        time.sleep(0.1)
        self.do("click", 1)

    def drag(self, place: list[int], right: int) -> None:
        """Press, move sideways in steps, let go."""
        x, y = place
        self.do("mousemove", x, y)
        time.sleep(0.1)
        self.do("mousedown", 1)
        for step in range(1, 9):
            self.do("mousemove", x + right * step // 8, y)
            time.sleep(0.03)
        self.do("mouseup", 1)


@pytest.fixture
def hand(tmp_path: Path) -> Iterator[Hand]:
    """A hand before a new virtual display."""
    read, write = os.pipe()
    display = subprocess.Popen(
        ["Xvfb", "-displayfd", str(write), "-screen", "0", "1280x720x24"], pass_fds=[write]
    )
    os.close(write)
    with os.fdopen(read) as stream:
        found = Hand(f":{stream.readline().strip()}", tmp_path)
    (tmp_path / "home").mkdir()
    yield found
    found.kill()
    display.terminate()
    display.wait()


def solved(seen: dict[str, Any]) -> bool:
    return bool(seen["solved"]) and not seen["busy"] and bool(seen["markers"])


def test_a_drag_in_a_real_window_is_followed_and_survives_a_kill(hand: Hand) -> None:
    title = samples()[0][0]
    hand.start()
    hand.click(hand.seen()["samples"][title])
    first = hand.until(solved)

    hand.drag(first["markers"]["primary.0"], -14)

    moved = hand.until(lambda seen: solved(seen) and seen["followed"])
    assert moved["first_contact"] < first["first_contact"]
    assert moved["radius_sum"] > first["radius_sum"] + 0.002
    assert moved["words"] != first["words"]
    assert moved["unsaved"]
    journals = hand.told.parent / "home" / "Shadowscale" / "Shadowscale" / "journal"
    end = time.monotonic() + PATIENCE
    while str(moved["first_contact"]) not in _texts(journals):
        assert time.monotonic() < end, list(journals.glob("*"))
        time.sleep(0.1)

    hand.kill()
    hand.start()
    asked = hand.until(lambda seen: seen["asked"])
    assert "ended unexpectedly" in asked["asked"]
    hand.click(asked["answers"]["Open"])

    again = hand.until(solved)
    assert again["first_contact"] == moved["first_contact"]
    assert again["radius_sum"] == moved["radius_sum"]


def test_keys_move_a_marker_in_a_real_window(hand: Hand) -> None:
    hand.start()
    hand.click(hand.seen()["samples"][samples()[0][0]])
    first = hand.until(solved)

    hand.click(first["markers"]["primary.0"])
    time.sleep(0.3)
    hand.do("key", "Left")
    hand.do("key", "shift+Left")

    def there(seen: dict[str, Any]) -> bool:
        step = first["first_contact"] - seen["first_contact"]
        return abs(step - 11 * 5e-4) < 1e-9  # one step and a coarse one of ten

    hand.until(there)


def _texts(folder: Path) -> str:
    return "".join(path.read_text(encoding="utf-8") for path in folder.glob("*.json"))
