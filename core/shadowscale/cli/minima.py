"""`shadowscale minima`: times of minimum with errors, and O-C against an ephemeris."""

from __future__ import annotations

from argparse import Namespace

from shadowscale.cli.bar import bar
from shadowscale.cli.parser import Parser, number
from shadowscale.cli.photometry_options import add_photometry, photometry_from
from shadowscale.cli.table import print_table

WORDS = "times of minimum, and observed minus computed against an ephemeris"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command."""
    add_photometry(parser)
    parser.add_argument("--period", metavar="DAYS", help="found from the photometry where missing")
    parser.add_argument("--epoch", metavar="TIME", help="time of a primary minimum")


def run(arguments: Namespace) -> None:
    """Measure and print."""
    from shadowscale.jobs.minima import minima_table

    period, epoch = (
        None if text is None else number(option, text, above=above)
        for option, text, above in (
            ("--period", arguments.period, 0.0),
            ("--epoch", arguments.epoch, None),
        )
    )
    photometry = photometry_from(arguments)
    with bar(quiet=arguments.quiet or arguments.json_errors) as progress:
        table = minima_table(photometry, period=period, epoch=epoch, progress=progress)
    print_table(table, as_json=arguments.json)
