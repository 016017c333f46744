"""`shadowscale replay`: do a saved session again; the same numbers, or what differs."""

from __future__ import annotations

from argparse import Namespace
from pathlib import Path

from shadowscale.cli.bar import bar
from shadowscale.cli.parser import Parser, add_output, add_report, output_folder, wants_report
from shadowscale.cli.saved import session_path
from shadowscale.errors import UsageError

WORDS = "do a saved session again: the same numbers, or what differs"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command."""
    parser.add_argument(
        "session", metavar="SESSION", nargs="?", help="a solved session (.json, or packed .zip)"
    )
    add_output(parser)
    add_report(parser)


def run(arguments: Namespace) -> None:
    """Replay, write the results, tell what differs."""
    from shadowscale.jobs.painters import painters
    from shadowscale.jobs.replay import replay_session
    from shadowscale.jobs.results import check_targets, result_files, write_results
    from shadowscale.session.store import open_session

    if not arguments.session:
        raise UsageError("SESSION", "nothing", expected="a solved session file")
    folder = Path(output_folder(arguments))
    path = session_path(arguments.session, folder, overwrite=arguments.overwrite)
    session = open_session(path, same_files=True)
    report = wants_report(arguments)
    names = result_files(session, report=report)
    check_targets(session, folder, names, overwrite=arguments.overwrite)
    quiet = arguments.quiet or arguments.json_errors
    with painters(wanted=report) as drawing, bar(quiet=quiet) as progress:
        replayed = replay_session(session, progress=progress, path=path)
        write_results(
            replayed.session, folder, overwrite=arguments.overwrite, report=report, painters=drawing
        )
    if not (arguments.quiet and replayed.same):
        print(replayed.words())
