"""`shadowscale solve`: the whole job without a window."""

from __future__ import annotations

import shlex
import sys
from argparse import Namespace
from dataclasses import replace
from pathlib import Path

from shadowscale.cli.bar import bar
from shadowscale.cli.parser import (
    Parser,
    add_output,
    add_report,
    output_folder,
    pairs,
    wants_report,
)
from shadowscale.cli.plan_options import add_plan_options, given_options, plan_from
from shadowscale.cli.saved import is_session, session_path
from shadowscale.errors import UsageError
from shadowscale.session.session import Session, Source

WORDS = "solve photometry (and velocities) for masses and radii"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command."""
    parser.add_argument(
        "inputs",
        metavar="INPUT",
        nargs="*",
        help="photometry files, or one session (.json, or packed .zip)",
    )
    add_output(parser)
    add_report(parser)
    data = parser.add_argument_group("data")
    data.add_argument("--velocities", metavar="FILE", action="append", default=[])
    data.add_argument("--band", metavar="NAME", help="band, in place of what the files say")
    data.add_argument(
        "--columns",
        metavar="ROLE=NAME",
        action="append",
        default=[],
        help="how a column of the photometry is to be read",
    )
    data.add_argument(
        "--velocity-columns", metavar="ROLE=NAME", action="append", default=[], help="the same"
    )
    add_plan_options(parser)


def run(arguments: Namespace) -> None:
    """Solve and write the results."""
    from shadowscale.jobs.painters import painters
    from shadowscale.jobs.results import check_targets, result_files, write_results
    from shadowscale.jobs.solve import solve_session
    from shadowscale.jobs.words import summary

    if not arguments.inputs:
        raise UsageError("INPUT", "nothing", expected="photometry files or one session file")
    folder = Path(output_folder(arguments))
    session = _session(arguments, folder)
    report = wants_report(arguments)
    names = result_files(session, report=report)
    check_targets(session, folder, names, overwrite=arguments.overwrite)
    quiet = arguments.quiet or arguments.json_errors
    with painters(wanted=report) as drawing, bar(quiet=quiet) as progress:
        solved = solve_session(session, progress=progress)
        write_results(
            solved, folder, overwrite=arguments.overwrite, report=report, painters=drawing
        )
    if not arguments.quiet:
        for note in session.notes:
            print(f"shadowscale: note: {note}", file=sys.stderr)
        print(summary(solved, folder), end="")


def _session(arguments: Namespace, folder: Path) -> Session:
    """The session that the arguments describe or name, not solved yet."""
    sessions = [name for name in arguments.inputs if is_session(name)]
    if sessions:
        return _saved(arguments, sessions[0], folder)
    photometry = pairs("--columns", arguments.columns, form="ROLE=NAME")
    velocities = pairs("--velocity-columns", arguments.velocity_columns, form="ROLE=NAME")
    return Session(
        name=Path(arguments.inputs[0]).stem,
        photometry_sources=tuple(
            Source(name, photometry, band=arguments.band or "") for name in arguments.inputs
        ),
        velocity_sources=tuple(Source(name, velocities) for name in arguments.velocities),
        plan=plan_from(arguments),
        command=shlex.join(["shadowscale", *arguments.words]),
    )


def _saved(arguments: Namespace, name: str, folder: Path) -> Session:
    """The session in a file; it holds its own data and wishes, so nothing may be said beside it."""
    from shadowscale.session.store import open_session

    if len(arguments.inputs) > 1:
        others = " ".join(item for item in arguments.inputs if item != name)
        raise UsageError("INPUT", others or name, expected=f"nothing beside the session {name!r}")
    data = ("velocities", "band", "columns", "velocity_columns")
    given = [f"--{item.replace('_', '-')}" for item in data if getattr(arguments, item)]
    given += given_options(arguments)
    if given:
        raise UsageError(given[0], name, expected="photometry files, not a session, beside it")
    command = shlex.join(["shadowscale", *arguments.words])
    path = session_path(name, folder, overwrite=arguments.overwrite)
    return replace(open_session(path), command=command)
