"""Arguments, with the program's own errors: what was expected, what was found."""

from __future__ import annotations

import re
from argparse import ArgumentParser, Namespace, RawDescriptionHelpFormatter
from collections.abc import Sequence
from difflib import get_close_matches
from math import isfinite
from typing import Any, NoReturn

from shadowscale.errors import UsageError

_NO_VALUE = re.compile(r"argument (?P<option>\S+?)(?:/\S+)*: expected (?P<count>.+)")

_NEGATIVE = re.compile(r"-\.?\d")


class Parser(ArgumentParser):
    """A parser that raises `UsageError` and knows no abbreviations."""

    def __init__(self, **settings: Any) -> None:
        super().__init__(
            add_help=False,
            allow_abbrev=False,
            formatter_class=RawDescriptionHelpFormatter,
            **settings,
        )

    def error(self, message: str) -> NoReturn:
        """Turn a complaint of the parser into a `UsageError`."""
        match = _NO_VALUE.match(message)
        if match:
            raise UsageError(match["option"], "nothing", expected="a value")
        raise UsageError(self.prog, message, expected="arguments as --help shows them")

    def options(self) -> tuple[str, ...]:
        """The names of all options."""
        return tuple(name for action in self._actions for name in action.option_strings)

    def parse_strictly(self, words: Sequence[str]) -> Namespace:
        """The arguments; an unknown one is an error that names the nearest option."""
        arguments, unknown = self.parse_known_args(_joined(words))
        if unknown:
            name = unknown[0].split("=", 1)[0]
            near = get_close_matches(name, self.options(), n=1)
            hint = f" (did you mean {near[0]}?)" if near else ""
            raise UsageError(self.prog, name, expected=f"options as --help shows them{hint}")
        return arguments


def _joined(words: Sequence[str]) -> list[str]:
    """Negative values tied to their options, which would be taken for options themselves."""
    found: list[str] = []
    for word in words:
        last = found[-1] if found else ""
        if _NEGATIVE.match(word) and last.startswith("--") and "=" not in last:
            found[-1] = f"{last}={word}"
        else:
            found.append(word)
    return found


def add_common(parser: Parser) -> None:
    """What every command takes."""
    group = parser.add_argument_group("for scripts")
    group.add_argument("--quiet", action="store_true", help="say nothing but errors")
    group.add_argument(
        "--json-errors", action="store_true", help="errors as one JSON object on standard error"
    )
    group.add_argument("-h", "--help", action="store_true", help="this text")


def add_output(parser: Parser) -> None:
    """Where results go."""
    parser.add_argument("--out", metavar="DIR", help="folder for the results")
    parser.add_argument(
        "--overwrite", action="store_true", help="replace results that are there already"
    )


def add_report(parser: Parser) -> None:
    """Whether the report is written."""
    parser.add_argument(
        "--report",
        metavar="yes|no",
        default="yes",
        help="report and figures; default yes, no saves a second",
    )


def wants_report(arguments: Namespace) -> bool:
    """Whether the report is to be written."""
    return choice("--report", arguments.report, ("yes", "no")) == "yes"


def output_folder(arguments: Namespace) -> str:
    """The folder that results go to; UsageError where none was said."""
    if not arguments.out:
        raise UsageError("--out", "nothing", expected="a folder for the results")
    folder: str = arguments.out
    return folder


def number(option: str, text: str, *, above: float | None = None) -> float:
    """A finite number, on request above a limit."""
    try:
        value = float(text)
    except ValueError:
        value = float("nan")
    limit = "" if above is None else f" above {above:g}"
    if not isfinite(value) or (above is not None and value <= above):
        raise UsageError(option, text, expected=f"a number{limit}")
    return value


def numbers(option: str, text: str, *, count: int | None = None) -> tuple[float, ...]:
    """Numbers with commas between them."""
    found = tuple(number(option, part.strip()) for part in text.split(","))
    if count is not None and len(found) != count:
        raise UsageError(option, text, expected=f"{count} numbers with a comma between them")
    return found


def measured(option: str, text: str | None) -> tuple[float, float] | None:
    """VALUE,SIGMA with a sigma above zero; None for no text."""
    if text is None:
        return None
    parts = text.split(",")
    if len(parts) != 2:
        raise UsageError(option, text, expected="VALUE,SIGMA")
    value, sigma = number(option, parts[0]), number(option, parts[1], above=0.0)
    return value, sigma


def pairs(option: str, items: Sequence[str], *, form: str) -> dict[str, str]:
    """NAME=VALUE items as a mapping; a name may come once."""
    found: dict[str, str] = {}
    for item in items:
        name, equals, value = item.partition("=")
        if not (name.strip() and equals and value.strip()):
            raise UsageError(option, item, expected=form)
        if name.strip() in found:
            raise UsageError(option, item, expected=f"{name.strip()!r} only once")
        found[name.strip()] = value.strip()
    return found


def choice(option: str, text: str, allowed: Sequence[str]) -> str:
    """One of the words that are allowed."""
    if text not in allowed:
        raise UsageError(option, text, tuple(allowed))
    return text
