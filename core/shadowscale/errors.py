"""The tree of errors, and the exit status each one gives.

    ShadowscaleError                 exit 1
    +- UsageError                    2   option, value, what is allowed
    +- InputError                    3   file, line, column, expected, found
    |  +- TableError  ColumnError  UnitError  TimeScaleError  SessionError
    +- NoSolutionError               4   reason, the numbers behind it, what would help
       +- NotDetachedError  NotConvergedError  NotConstrainedError
    Stopped                          not an error: the user pressed stop

Errors carry data; the sentence is made from it here and nowhere else, so that the
terminal, a script and the desktop say the same.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches

SHOWN_PROBLEMS = 20


class ShadowscaleError(Exception):
    """Base of everything that the program itself reports."""

    exit_status = 1

    def details(self) -> dict[str, object]:
        """The data of the error, ready for JSON."""
        return {"error": type(self).__name__, "message": str(self)}


class UsageError(ShadowscaleError):
    """An option or value that the program does not take."""

    exit_status = 2

    def __init__(
        self, option: str, found: str, allowed: tuple[str, ...] = (), expected: str = ""
    ) -> None:
        self.option, self.found, self.allowed, self.expected = (
            option,
            found,
            allowed,
            expected,
        )
        wanted = expected or ("one of " + ", ".join(allowed) if allowed else "something else")
        text = f"{option}: expected {wanted}, found {found!r}"
        near = get_close_matches(found, allowed, n=1)
        super().__init__(text + (f"; did you mean {near[0]!r}?" if near else ""))

    def details(self) -> dict[str, object]:
        """The data of the error, ready for JSON."""
        return super().details() | {
            "option": self.option,
            "found": self.found,
            "expected": self.expected,
            "allowed": list(self.allowed),
        }


@dataclass(frozen=True)
class Problem:
    """One thing wrong in a file: where, what was expected, what was found, what helps."""

    file: str
    expected: str
    found: str
    line: int | None = None
    column: str | None = None
    help: str = ""

    def __str__(self) -> str:
        where = self.file
        if self.line is not None:
            where += f", line {self.line}"
        if self.column is not None:
            where += f", column {self.column!r}"
        text = f"{where}: expected {self.expected}, found {self.found}"
        return text + (f"; {self.help}" if self.help else "")


class InputError(ShadowscaleError):
    """A file that cannot be used; all its problems, gathered."""

    exit_status = 3

    def __init__(self, *problems: Problem) -> None:
        self.problems = problems
        lines = [str(problem) for problem in problems[:SHOWN_PROBLEMS]]
        if len(problems) > SHOWN_PROBLEMS:
            lines.append(f"... and {len(problems) - SHOWN_PROBLEMS} more")
        super().__init__("\n".join(lines))

    def details(self) -> dict[str, object]:
        """The data of the error, ready for JSON."""
        return super().details() | {"problems": [vars(problem) for problem in self.problems]}


class TableError(InputError):
    """The file is not a table that can be read."""


class ColumnError(InputError):
    """A needed column is missing, or two could be meant."""


class UnitError(InputError):
    """A unit that does not fit the quantity."""


class TimeScaleError(InputError):
    """Times whose zero point or scale cannot be settled."""


class SessionError(InputError):
    """A session file that cannot be opened."""


class NoSolutionError(ShadowscaleError):
    """The data allow no solution that may be reported."""

    exit_status = 4

    def __init__(
        self, reason: str, numbers: Mapping[str, float] | None = None, help: str = ""
    ) -> None:
        self.reason, self.numbers, self.help = reason, dict(numbers or {}), help
        shown = ", ".join(f"{name} = {value:.6g}" for name, value in self.numbers.items())
        text = reason + (f" ({shown})" if shown else "")
        super().__init__(text + (f"; {help}" if help else ""))

    def details(self) -> dict[str, object]:
        """The data of the error, ready for JSON."""
        return super().details() | {
            "reason": self.reason,
            "numbers": self.numbers,
            "help": self.help,
        }


class NotDetachedError(NoSolutionError):
    """The stars are too close for two spheres."""


class NotConvergedError(NoSolutionError):
    """The fit did not settle."""


class NotConstrainedError(NoSolutionError):
    """The data do not hold what was asked for."""


class Stopped(Exception):
    """The user pressed stop; caught by whoever runs the work, never reported as an error."""
