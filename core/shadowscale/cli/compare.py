"""`shadowscale compare`: solutions side by side."""

from __future__ import annotations

import json
from argparse import Namespace
from pathlib import Path

from shadowscale.cli.parser import Parser
from shadowscale.cli.table import print_table
from shadowscale.errors import UsageError

WORDS = "solutions side by side: differences in sigmas, and which fits better"
EXPECTED = "two or more solved sessions, sheet.json files or tables of quantity,value,error"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command."""
    parser.add_argument(
        "inputs",
        metavar="FILE",
        nargs="*",
        help="solved session, sheet.json, or a table of quantity,value,error[,unit]",
    )
    parser.add_argument("--json", action="store_true", help="print JSON instead of a table")


def run(arguments: Namespace) -> None:
    """Compare and print."""
    from shadowscale.jobs.compare import compare_files, comparison_document, comparison_table

    if not arguments.inputs:
        raise UsageError("FILE", "nothing", expected=EXPECTED)
    try:
        comparison = compare_files([Path(name) for name in arguments.inputs])
    except ValueError as error:
        raise UsageError("FILE", " ".join(arguments.inputs), expected=EXPECTED) from error
    if arguments.json:
        print(json.dumps(comparison_document(comparison), indent=1, allow_nan=False))
    else:
        print_table(comparison_table(comparison), as_json=False)
