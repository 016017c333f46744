"""Which versions of what made the numbers."""

from __future__ import annotations

import platform
from importlib.metadata import PackageNotFoundError, version

from shadowscale._version import __version__

LIBRARIES = ("numpy", "scipy", "numba", "astropy")


def library_versions() -> dict[str, str]:
    """Versions of the program, of Python, and of the libraries that numbers depend on."""
    found = {"shadowscale": __version__, "python": platform.python_version()}
    for name in LIBRARIES:
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            continue
    return found
