"""Photometry as the smaller commands take it."""

from __future__ import annotations

from argparse import Namespace
from pathlib import Path

from shadowscale.cli.parser import Parser, pairs
from shadowscale.data.photometry import Photometry
from shadowscale.errors import UsageError


def add_photometry(parser: Parser) -> None:
    """The files, how to read them, and how to print the result."""
    parser.add_argument("inputs", metavar="PHOTOMETRY", nargs="*", help="photometry files")
    parser.add_argument("--band", metavar="NAME", help="band, in place of what the files say")
    parser.add_argument(
        "--columns", metavar="ROLE=NAME", action="append", default=[], help="how to read a column"
    )
    parser.add_argument("--json", action="store_true", help="print JSON instead of a table")


def photometry_from(arguments: Namespace) -> Photometry:
    """The table that the arguments name.

    Raises
    ------
    UsageError
        Without a file.
    InputError
        If one cannot be read.
    """
    from shadowscale.data import read_photometry

    if not arguments.inputs:
        raise UsageError("PHOTOMETRY", "nothing", expected="a file of photometry")
    columns = pairs("--columns", arguments.columns, form="ROLE=NAME")
    paths = [Path(name) for name in arguments.inputs]
    return read_photometry(paths, columns=columns, band=arguments.band)
