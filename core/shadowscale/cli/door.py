"""The door of the command line: finds the command, runs it, turns every error into a status.

Exit status: 0 done; 1 trouble of the program itself; 2 wrong usage; 3 bad input; 4 no solution that
may be reported; 130 stopped from the keyboard.
"""

from __future__ import annotations

import json
import os
import sys
import traceback
from argparse import Namespace
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType

from shadowscale._version import __version__
from shadowscale.cli import compare, minima, pack, period, replay, simulate, solve
from shadowscale.cli.parser import Parser, add_common
from shadowscale.errors import ShadowscaleError, UsageError

STOPPED = 130
DEBUG = "SHADOWSCALE_DEBUG"  # set: errors of the program itself show where they arose


@dataclass(frozen=True)
class Command:
    """A command: one line on what it does, its arguments, and what runs it."""

    words: str
    add_arguments: Callable[[Parser], None]
    run: Callable[[Namespace], None]


COMMANDS: Mapping[str, Command] = MappingProxyType(
    {
        module.__name__.rsplit(".", 1)[-1]: Command(module.WORDS, module.add_arguments, module.run)
        for module in (solve, simulate, replay, compare, pack, period, minima)
    }
)

USAGE = """\
usage: shadowscale                      open the desktop
       shadowscale FILE                 open the desktop on a session or a photometry file
       shadowscale COMMAND ...          do a job without a window

commands:
{commands}

shadowscale COMMAND --help tells the options of a command; shadowscale --version the version.
"""


def main(argv: Sequence[str] | None = None) -> int:
    """Run a command; the exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    try:
        return _run(words)
    except ShadowscaleError as error:
        _tell(error, as_json="--json-errors" in words)
        return error.exit_status
    except KeyboardInterrupt:
        print("shadowscale: stopped", file=sys.stderr)
        return STOPPED
    except BrokenPipeError:
        _close_output()
        return 0
    except Exception as error:
        if os.environ.get(DEBUG):
            traceback.print_exc()
        own = ShadowscaleError(
            f"trouble inside the program ({type(error).__name__}: {error}); "
            f"please report it, with what {DEBUG}=1 shows"
        )
        _tell(own, as_json="--json-errors" in words)
        return own.exit_status


def _run(words: list[str]) -> int:
    if not words or words[0] in ("-h", "--help", "help"):
        print(usage(), end="")
        return 0
    if words[0] == "--version":
        print(f"shadowscale {__version__}")
        return 0
    if words[0] not in COMMANDS:
        raise UsageError("shadowscale", words[0], tuple(COMMANDS), "a command or a file to open")
    command = COMMANDS[words[0]]
    parser = Parser(prog=f"shadowscale {words[0]}", description=command.words)
    command.add_arguments(parser)
    add_common(parser)
    if {"-h", "--help"} & set(words[1:]):
        print(parser.format_help(), end="")
        return 0
    arguments = parser.parse_strictly(words[1:])
    arguments.words = words
    command.run(arguments)
    return 0


def usage() -> str:
    """What the program can do, as text."""
    lines = [f"  {name:<10}{command.words}" for name, command in COMMANDS.items()]
    return USAGE.format(commands="\n".join(lines))


def _tell(error: ShadowscaleError, *, as_json: bool) -> None:
    """The error on standard error, as a sentence or as one JSON object."""
    if as_json:
        print(json.dumps(error.details() | {"exit_status": error.exit_status}), file=sys.stderr)
    else:
        print(f"shadowscale: {error}", file=sys.stderr)


def _close_output() -> None:
    """Whoever read our output left; nothing may be written at exit any more."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
