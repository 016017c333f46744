"""Progress on a terminal; nothing where standard error is a file or a pipe."""

from __future__ import annotations

import sys
from types import TracebackType
from typing import TextIO

from shadowscale.progress import SILENT, Progress

WIDTH = 30


class Bar:
    """A bar that rewrites its own line, and is gone when the work is done."""

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._shown = ""

    def report(self, fraction: float, words: str) -> None:
        """Draw the bar if it would look different."""
        share = min(max(fraction, 0.0), 1.0)
        done = round(WIDTH * share)
        line = f"[{'=' * done}{' ' * (WIDTH - done)}] {100 * share:3.0f} %  {words}"[:79]
        if line != self._shown:
            self._stream.write(f"\r{line:<{len(self._shown)}}")
            self._stream.flush()
            self._shown = line

    def clear(self) -> None:
        """Take the bar away."""
        if self._shown:
            self._stream.write("\r" + " " * len(self._shown) + "\r")
            self._stream.flush()
            self._shown = ""


class bar:
    """`with bar(quiet=...) as progress:` a bar on a terminal, silence elsewhere."""

    def __init__(self, *, quiet: bool, stream: TextIO | None = None) -> None:
        target = sys.stderr if stream is None else stream
        self._bar = Bar(target) if target.isatty() and not quiet else None

    def __enter__(self) -> Progress:
        """The progress to report to."""
        return SILENT if self._bar is None else self._bar

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Clear the line, also before an error is told."""
        if self._bar is not None:
            self._bar.clear()
