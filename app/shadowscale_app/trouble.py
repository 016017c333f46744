"""Every error that reaches the top: what was being done, the sentence, details folded, copy, a local log."""

from __future__ import annotations

import sys
import threading
import traceback
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType

from PySide6.QtCore import QObject, QStandardPaths, Signal

from shadowscale.errors import NoSolutionError, ShadowscaleError

LOG_LIMIT = 400_000  # characters after which the log starts anew


@dataclass(frozen=True)
class Trouble:
    """An error as a person reads it."""

    doing: str
    sentence: str
    details: str
    expected: bool

    @property
    def whole(self) -> str:
        """All of it, for the clipboard."""
        return f"While {self.doing}:\n{self.sentence}\n\n{self.details}".strip()


class Bell(QObject):
    """Rings when something goes wrong; whoever shows them listens to `arose(Trouble)`."""

    arose = Signal(object)


_BELL: list[Bell] = []


def bell() -> Bell:
    """The one bell that rings when something goes wrong."""
    if not _BELL:
        _BELL.append(Bell())
    return _BELL[0]


def tell(doing: str, error: BaseException) -> Trouble:
    """Log an error and pass it on to whoever shows it; the session is not touched."""
    trouble = trouble_of(doing, error)
    _log(trouble)
    bell().arose.emit(trouble)
    return trouble


def trouble_of(doing: str, error: BaseException) -> Trouble:
    """Put an error into words."""
    details = "".join(traceback.format_exception(error))
    if isinstance(error, ShadowscaleError):
        sentence = str(error)
        if isinstance(error, NoSolutionError) and error.help and error.help not in sentence:
            sentence += f"\n{error.help}"
        return Trouble(doing, sentence, details, True)
    if isinstance(error, OSError) and error.strerror:
        return Trouble(doing, f"{error.filename or 'file'}: {error.strerror}", details, True)
    if isinstance(error, ValueError):
        return Trouble(doing, str(error), details, True)
    sentence = (
        f"The program made a mistake ({type(error).__name__}: {error}). "
        "The session is as it was before; save it under another name to be safe."
    )
    return Trouble(doing, sentence, details, False)


@contextmanager
def guard(doing: str) -> Iterator[None]:
    """Whatever goes wrong inside is told, not raised."""
    try:
        yield
    except Exception as error:
        tell(doing, error)


def guarded(doing: str, call: Callable[[], object]) -> Callable[[], None]:
    """The call with its errors told."""

    def run() -> None:
        with guard(doing):
            call()

    return run


def catch_everything() -> None:
    """Errors that nobody caught arrive here too, from any thread."""
    sys.excepthook = _hook
    threading.excepthook = lambda arguments: _hook(
        arguments.exc_type, arguments.exc_value or arguments.exc_type(), arguments.exc_traceback
    )


def _hook(kind: type[BaseException], error: BaseException, where: TracebackType | None) -> None:
    if issubclass(kind, KeyboardInterrupt):
        sys.__excepthook__(kind, error, where)
        return
    tell("working", error)


def log_file() -> Path:
    """Where troubles are written on this machine."""
    place = QStandardPaths.StandardLocation.AppLocalDataLocation
    return Path(QStandardPaths.writableLocation(place)) / "trouble.log"


def _log(trouble: Trouble) -> None:
    path = log_file()
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        mode = "w" if path.exists() and path.stat().st_size > LOG_LIMIT else "a"
        with path.open(mode, encoding="utf-8") as stream:
            stream.write(
                f"--- {datetime.now(UTC).isoformat(timespec='seconds')}\n{trouble.whole}\n"
            )
    except OSError:
        return  # a log that cannot be written must not hide the trouble itself
