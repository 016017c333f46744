"""How a session is looked at: what the view remembers, with its defaults."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

MARKER_GROUPS = ("contact", "window", "level", "excluded")


@dataclass(frozen=True)
class Look:
    """The choices of the pictures.

    hidden : bands that are not drawn; groups : kinds of markers that are
    """

    magnitudes: bool = False
    hours: bool = False
    binned: bool = False
    hidden: tuple[str, ...] = ()
    groups: tuple[str, ...] = ("contact", "window")


def look_of(view: Mapping[str, object]) -> Look:
    """The look that a session's view remembers; what it does not know keeps its default."""
    plain = Look()
    hidden, groups = view.get("hidden"), view.get("groups")
    return Look(
        magnitudes=bool(view.get("magnitudes", plain.magnitudes)),
        hours=bool(view.get("hours", plain.hours)),
        binned=bool(view.get("binned", plain.binned)),
        hidden=tuple(str(band) for band in hidden) if isinstance(hidden, (list, tuple)) else (),
        groups=tuple(str(group) for group in groups)
        if isinstance(groups, (list, tuple))
        else plain.groups,
    )
