"""How long work tells how far it is, and learns that it should stop."""

from __future__ import annotations

from typing import Protocol


class Progress(Protocol):
    """Anything that can be told how far the work is."""

    def report(self, fraction: float, words: str) -> None:
        """Say that `fraction` (0 to 1) is done, now doing `words`; raises `Stopped` on request.

        Work that keeps what it has so far goes on after the first `Stopped`, and still reports: a
        further one ends it.
        """


class Silent:
    """A progress that tells nobody and never stops."""

    def report(self, fraction: float, words: str) -> None:
        """Do nothing."""


SILENT = Silent()
