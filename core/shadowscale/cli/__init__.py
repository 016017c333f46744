"""The command line: arguments in, exit status out."""

from shadowscale.cli.door import COMMANDS, main

__all__ = ["COMMANDS", "main"]
