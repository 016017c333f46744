"""`shadowscale pack`: a session with its data in one file, to send to a colleague."""

from __future__ import annotations

from argparse import Namespace
from pathlib import Path

from shadowscale.cli.parser import Parser
from shadowscale.errors import UsageError

WORDS = "put a session and its data into one zip file"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command."""
    parser.add_argument("session", metavar="SESSION", nargs="?", help="a session file")
    parser.add_argument("target", metavar="FILE.zip", nargs="?", help="where it goes")
    parser.add_argument("--overwrite", action="store_true", help="replace the file if it is there")


def run(arguments: Namespace) -> None:
    """Pack and say where."""
    from shadowscale.jobs.packing import SUFFIX, is_packed, pack_session
    from shadowscale.session.store import open_session

    if not arguments.session:
        raise UsageError("SESSION", "nothing", expected="a session file")
    if not arguments.target or not is_packed(arguments.target):
        found = arguments.target or "nothing"
        raise UsageError("FILE.zip", found, expected=f"a name that ends in {SUFFIX}")
    session = open_session(Path(arguments.session), same_files=True)
    target = pack_session(session, Path(arguments.target), overwrite=arguments.overwrite)
    if not arguments.quiet:
        print(target)
