"""The one door: a command goes to the engine with no Qt imported; otherwise the window opens."""

from __future__ import annotations

import os
import re
import sys
from collections.abc import Sequence
from pathlib import Path

# Libraries that Qt needs of the system, and the Debian packages that hold them.
PACKAGES = {
    "libEGL": "libegl1",
    "libGL": "libgl1",
    "libGLX": "libgl1",
    "libOpenGL": "libopengl0",
    "libxkbcommon": "libxkbcommon0",
    "libxkbcommon-x11": "libxkbcommon-x11-0",
    "libfontconfig": "libfontconfig1",
    "libfreetype": "libfreetype6",
    "libglib-2": "libglib2.0-0",
    "libgthread-2": "libglib2.0-0",
    "libdbus-1": "libdbus-1-3",
    "libX11": "libx11-6",
    "libX11-xcb": "libx11-xcb1",
    "libxcb-cursor": "libxcb-cursor0",
    "libxcb-icccm": "libxcb-icccm4",
    "libxcb-keysyms": "libxcb-keysyms1",
    "libxcb-image": "libxcb-image0",
    "libxcb-render-util": "libxcb-render-util0",
    "libxcb-shape": "libxcb-shape0",
}
_LIBRARY = re.compile(r"(lib[A-Za-z0-9_+-]+?(?:-\d+)?)(?:\.\d+)*\.so")


def main(argv: Sequence[str] | None = None) -> int:
    """Run a command or open the window; the exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    if words:  # an empty window waits for no command
        from shadowscale.cli import COMMANDS
        from shadowscale.cli import main as run_command

        if words[0] in COMMANDS or not _can_open(words):
            return run_command(words)
    return _open_window(words)


def missing_package(message: str) -> str | None:
    """The Debian package that holds the library which a loader's message misses; None if unknown."""
    match = _LIBRARY.search(message)
    return None if match is None else PACKAGES.get(match[1])


def _can_open(words: list[str]) -> bool:
    """Whether all words are files, so that a window is wanted."""
    return all(not word.startswith("-") and Path(word).is_file() for word in words)


def _open_window(paths: list[str]) -> int:
    if not _has_display():
        words = "the window needs a display, and neither DISPLAY nor WAYLAND_DISPLAY names one"
        print(
            f"shadowscale: {words}; the commands work without: shadowscale --help", file=sys.stderr
        )
        return 1
    try:
        from shadowscale_app.program import run
    except ImportError as error:
        print(f"shadowscale: {_trouble(str(error))}", file=sys.stderr)
        return 1
    return run(paths)


def _has_display() -> bool:
    """Whether Qt would find where to draw; without that it aborts."""
    named = any(os.environ.get(n) for n in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM"))
    return named or not sys.platform.startswith("linux")


def _trouble(message: str) -> str:
    """What to do where the window's libraries cannot be loaded."""
    package = missing_package(message)
    if package is not None:
        return (
            f"the window needs the system package {package} ({message}); install it with: "
            f"sudo apt-get install {package}\nthe commands work without it: shadowscale --help"
        )
    return f"the window cannot open ({message}); the commands work without it: shadowscale --help"


if __name__ == "__main__":
    raise SystemExit(main())
