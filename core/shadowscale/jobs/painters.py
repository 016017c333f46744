"""Figures drawn by a process of its own, which loads what it needs while the fit still runs.

matplotlib takes half a second to load and draws on one processor. Started beside the fit, this process
is ready when the solution is; then it divides itself, so that two processors draw.
"""

from __future__ import annotations

import gc
import os
import pickle
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from typing import IO

from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figures import FIGURES, all_figures, files_of, possible_figures, warm_up

COUNT = 2
ALONE = {"OPENBLAS_NUM_THREADS": "1"}  # a process with threads does not divide itself safely
Files = dict[str, dict[str, bytes]]


class Painters:
    """The running process; `figures` gives the same as `all_figures`."""

    def __init__(self) -> None:
        self._process = subprocess.Popen(
            [sys.executable, "-P", "-m", __name__],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            env={**os.environ, **ALONE},
        )

    def figures(self, shown: Shown) -> Files:
        """Every figure in every format; drawn here where the process is in trouble."""
        into, out = self._process.stdin, self._process.stdout
        assert into is not None
        assert out is not None
        try:
            _send(into, shown)
            found: Files = pickle.load(out)
        except (OSError, EOFError, pickle.UnpicklingError):
            return all_figures(shown)
        return found

    def close(self) -> None:
        """End the process."""
        self._process.kill()
        with suppress(OSError):  # what was not sent is not wanted
            self._process.communicate()


@contextmanager
def painters(*, wanted: bool = True) -> Iterator[Painters | None]:
    """A process while it lasts; none where not wanted or where there is one processor only."""
    if not wanted or (os.cpu_count() or 1) < COUNT or not sys.executable:
        yield None
        return
    found = Painters()
    try:
        yield found
    finally:
        found.close()


def _send(stream: IO[bytes], item: object) -> None:
    pickle.dump(item, stream, protocol=pickle.HIGHEST_PROTOCOL)
    stream.flush()


def main() -> None:
    """What the process does: get ready, read what is shown, draw."""
    into, out = sys.stdin.buffer, os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)  # whatever a library prints must not come among the figures
    with suppress(EOFError, BrokenPipeError, KeyboardInterrupt):
        warm_up()
        gc.disable()  # a short life: looking for cycles among so many small objects would be in vain
        shown = pickle.load(into)
        _send(out, _divided(shown) if sys.platform == "linux" else all_figures(shown))


_inherited: list[Shown] = []  # what the parts of the process have from before they parted


def _divided(shown: Shown) -> Files:
    """The figures drawn by copies of this process, the slow ones first."""
    from concurrent.futures import ProcessPoolExecutor
    from multiprocessing import get_context

    _inherited.append(shown)
    names = possible_figures(shown)
    order = sorted(names, key=lambda name: -FIGURES[name].effort)
    with ProcessPoolExecutor(COUNT, mp_context=get_context("fork")) as pool:
        found = dict(zip(order, pool.map(_part, order)))
    return {name: found[name] for name in names}


def _part(name: str) -> dict[str, bytes]:
    return files_of(name, _inherited[0])


if __name__ == "__main__":
    main()
