"""Figures drawn by processes of their own, which load what they need while the fit still runs.

matplotlib takes half a second to load and draws on one processor; started beside the fit, two such
processes have the figures ready a second after the solution.
"""

from __future__ import annotations

import os
import pickle
import subprocess
import sys
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager, suppress
from queue import Empty, SimpleQueue
from typing import IO, Any

from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figures import FIGURES, all_figures, files_of, possible_figures, warm_up

COUNT = 2
NICENESS = 5  # the fit goes first
Files = dict[str, dict[str, bytes]]


class Painters:
    """Running processes; `figures` gives the same as `all_figures`."""

    def __init__(self, count: int) -> None:
        command = [sys.executable, "-P", "-m", __name__]
        pipes: dict[str, Any] = {"stdin": subprocess.PIPE, "stdout": subprocess.PIPE}
        self._processes = [
            subprocess.Popen(command, stderr=subprocess.DEVNULL, **pipes) for _ in range(count)
        ]

    def figures(self, shown: Shown) -> Files:
        """Every figure in every format; drawn here where a process is in trouble."""
        order = sorted(possible_figures(shown), key=lambda name: -FIGURES[name].effort)
        names: SimpleQueue[str] = SimpleQueue()
        for name in order:
            names.put(name)
        with ThreadPoolExecutor(len(self._processes)) as pool:
            parts = pool.map(lambda process: _drawn_by(process, shown, names), self._processes)
            found = {name: files for part in parts for name, files in part.items()}
        found |= all_figures(shown, [name for name in order if name not in found])
        return {name: found[name] for name in possible_figures(shown)}

    def close(self) -> None:
        """End the processes."""
        for process in self._processes:
            process.kill()
            with suppress(OSError):  # what was not sent is not wanted
                process.communicate()


@contextmanager
def painters(*, wanted: bool = True) -> Iterator[Painters | None]:
    """Processes while it lasts; none where not wanted or where there is one processor only."""
    if not wanted or (os.cpu_count() or 1) < COUNT or not sys.executable:
        yield None
        return
    found = Painters(COUNT)
    try:
        yield found
    finally:
        found.close()


def _drawn_by(process: subprocess.Popen[bytes], shown: Shown, names: SimpleQueue[str]) -> Files:
    """The figures that one process draws, as long as there are names and it answers."""
    into, out = process.stdin, process.stdout
    assert into is not None
    assert out is not None
    found: Files = {}
    try:
        _send(into, shown)
        while True:
            name = names.get_nowait()
            _send(into, name)
            found[name] = pickle.load(out)
    except Empty:
        return found
    except (OSError, EOFError, pickle.UnpicklingError):
        return found  # the caller draws what is missing


def _send(stream: IO[bytes], item: object) -> None:
    pickle.dump(item, stream, protocol=pickle.HIGHEST_PROTOCOL)
    stream.flush()


def main() -> None:
    """What a process does: get ready, read what is shown, then draw figure after figure."""
    into, out = sys.stdin.buffer, os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)  # whatever a library prints must not come among the figures
    if hasattr(os, "nice"):
        os.nice(NICENESS)
    warm_up()
    with suppress(EOFError, BrokenPipeError, KeyboardInterrupt):
        shown = pickle.load(into)
        while True:
            _send(out, files_of(pickle.load(into), shown))


if __name__ == "__main__":
    main()
