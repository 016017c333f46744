"""`shadowscale simulate`: a synthetic system with known truth."""

from __future__ import annotations

from argparse import Namespace
from pathlib import Path

from shadowscale.cli.parser import Parser, add_output, output_folder
from shadowscale.errors import UsageError
from shadowscale.guide import page

WORDS = "make photometry and velocities of an invented system, with the truth beside them"


def add_arguments(parser: Parser) -> None:
    """The arguments of the command; the help shows the page of the guide with every key."""
    parser.epilog = page("simulate").text
    parser.add_argument("spec", metavar="SPEC", nargs="?", help="description, TOML or JSON")
    add_output(parser)


def run(arguments: Namespace) -> None:
    """Simulate and write the files."""
    from shadowscale.jobs.simulate import simulate, write_simulation
    from shadowscale.jobs.spec import read_spec

    if not arguments.spec:
        raise UsageError("SPEC", "nothing", expected="a TOML or JSON file that describes a system")
    path = Path(arguments.spec)
    folder = Path(output_folder(arguments))
    simulation = simulate(read_spec(path), path=path)
    written = write_simulation(simulation, folder, overwrite=arguments.overwrite, spec=path)
    if not arguments.quiet:
        for file in written:
            print(file)
