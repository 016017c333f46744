"""`shadowscale period`: period and epoch, with their alternatives."""

from __future__ import annotations

from argparse import Namespace

from shadowscale.cli.bar import bar
from shadowscale.cli.parser import Parser
from shadowscale.cli.photometry_options import add_photometry, photometry_from
from shadowscale.cli.table import print_table

WORDS = "find the period and a time of primary minimum"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command."""
    add_photometry(parser)


def run(arguments: Namespace) -> None:
    """Search and print."""
    from shadowscale.jobs.period import period_table

    photometry = photometry_from(arguments)
    with bar(quiet=arguments.quiet or arguments.json_errors) as progress:
        table = period_table(photometry, progress=progress)
    print_table(table, as_json=arguments.json)
