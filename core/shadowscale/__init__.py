"""Shadowscale's engine: masses and radii of eclipsing binaries, without any window."""

from shadowscale._version import __version__

__all__ = ["__version__"]
