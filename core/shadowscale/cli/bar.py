"""Progress on a terminal; nothing where standard error is a file or a pipe."""

from __future__ import annotations

import sys
from functools import partial
from types import TracebackType
from typing import TextIO

from shadowscale._compiled import when_compiling
from shadowscale.progress import SILENT, Progress

WIDTH = 30
COMPILING = "making machine code for this computer: about a minute, the first time only"


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

    def note(self, words: str) -> None:
        """Put a line above the bar."""
        self.clear()
        self._stream.write(words + "\n")
        self._stream.flush()

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
        if self._bar is None:
            return SILENT
        when_compiling(partial(self._bar.note, COMPILING))
        return self._bar

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Clear the line, also before an error is told."""
        if self._bar is not None:
            when_compiling(None)
            self._bar.clear()
