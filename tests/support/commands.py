"""Running the program as a person or a script does: a process of its own."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

TIMEOUT = 600  # [s] a first run compiles


@dataclass(frozen=True)
class Ran:
    """What a command left behind."""

    status: int
    out: str
    err: str


def shadowscale(*words: object, folder: Path | None = None, **environment: str) -> Ran:
    """Run `shadowscale WORDS`; never in the tests' own process."""
    return python("-m", "shadowscale_app", *words, folder=folder, **environment)


def python(*words: object, folder: Path | None = None, **environment: str) -> Ran:
    """Run Python in a process of its own."""
    done = subprocess.run(
        [sys.executable, *map(str, words)],
        capture_output=True,
        text=True,
        cwd=folder,
        timeout=TIMEOUT,
        env={**os.environ, **environment},
        check=False,
    )
    return Ran(done.returncode, done.stdout, done.stderr)
