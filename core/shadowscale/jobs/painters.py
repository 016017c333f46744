"""The report made by a process of its own, which loads what it needs while the fit still runs.

matplotlib takes half a second to load and draws on one processor. Started beside the fit, this process
is ready when the solution is; then it divides itself: two copies draw figures, while it sets the words
of the pages itself and whoever asked writes the other files.
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

from shadowscale.jobs.reporting import Made, made_here, make_ready
from shadowscale.sheet.document import Document
from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figures import FIGURES, files_of, heights, possible_figures
from shadowscale.sheet.report_html import as_html
from shadowscale.sheet.report_pages import with_figures
from shadowscale.sheet.report_pdf import text_pages

COUNT = 2
ALONE = {"OPENBLAS_NUM_THREADS": "1"}  # a process with threads does not divide itself safely


class Painters:
    """The running process; what it is asked to `begin` it gives at `finish`, the same as `made_here`."""

    def __init__(self) -> None:
        self._asked: tuple[Shown, Document]
        self._process = subprocess.Popen(
            [sys.executable, "-P", "-m", __name__],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            stderr=subprocess.DEVNULL,
            env={**os.environ, **ALONE},
        )

    def begin(self, shown: Shown, document: Document) -> None:
        """Ask for the report."""
        self._asked = shown, document
        assert self._process.stdin is not None
        with suppress(OSError):  # told at the end
            _send(self._process.stdin, self._asked)

    def finish(self) -> Made:
        """Figures and report; made here where the process is in trouble."""
        assert self._process.stdout is not None
        try:
            found: Made = pickle.load(self._process.stdout)
        except (OSError, EOFError, pickle.UnpicklingError):
            return made_here(*self._asked)
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
        make_ready()
        gc.disable()  # a short life: looking for cycles among so many small objects would be in vain
        shown, document = pickle.load(into)
        make = _made_divided if sys.platform == "linux" else made_here
        _send(out, make(shown, document))


_inherited: list[Shown] = []  # what the parts of the process have from before they parted


def _made_divided(shown: Shown, document: Document) -> Made:
    """Figures by copies of this process, the slow ones first, and the words of the pages beside them."""
    from concurrent.futures import ProcessPoolExecutor
    from multiprocessing import get_context

    _inherited.append(shown)
    names = possible_figures(shown)
    order = sorted(names, key=lambda name: -FIGURES[name].effort)
    with ProcessPoolExecutor(COUNT, mp_context=get_context("fork")) as pool:
        parts = pool.map(_part, order)
        text = text_pages(document, heights(shown))
        found = dict(zip(order, parts))
    figures = {name: found[name] for name in names}
    return figures, as_html(document, figures), with_figures(text, figures)


def _part(name: str) -> dict[str, bytes]:
    return files_of(name, _inherited[0])


if __name__ == "__main__":
    main()
