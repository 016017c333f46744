"""The state of a piece of work: frozen; a change makes a new one and shares what did not change."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Solution
from shadowscale.fit.system import System
from shadowscale.geometry.contacts import ContactSolution
from shadowscale.judge.finding import Finding

Span = tuple[float, float]


@dataclass(frozen=True)
class Source:
    """A file of the session: its path, how its columns are to be read (role to column), its checksum.

    `band` names the band of photometry that does not say it.
    """

    path: str
    columns: Mapping[str, str] = field(default_factory=dict)
    sha256: str = ""
    band: str = ""


@dataclass(frozen=True)
class Exclusion:
    """Rows that the user set aside: the table (`light`, `rv1`, `rv2`), file, line numbers, reason."""

    table: str
    file: str
    lines: tuple[int, ...]
    reason: str


@dataclass(frozen=True)
class Markers:
    """What can be dragged; phases in cycles, primary eclipse near 0, secondary in 0...1.

    Contacts are first to fourth; in a partial eclipse second and third fall together.
    """

    primary: tuple[float, float, float, float]
    secondary: tuple[float, float, float, float] | None = None
    primary_window: Span = (-0.1, 0.1)
    secondary_window: Span = (0.4, 0.6)
    level: tuple[Span, ...] = ()
    excluded: tuple[Span, ...] = ()


@dataclass(frozen=True, eq=False)
class Kept:
    """A solution kept under a name, to compare with or go back to."""

    name: str
    plan: Plan
    system: System
    solution: Solution
    audit: tuple[Finding, ...] = ()


@dataclass(frozen=True, eq=False)
class Session:
    """Everything of a piece of work. Tables are reached through files and checksums when saved."""

    name: str = "untitled"
    photometry_sources: tuple[Source, ...] = ()
    velocity_sources: tuple[Source, ...] = ()
    photometry: Photometry | None = None
    velocities: Velocities | None = None
    exclusions: tuple[Exclusion, ...] = ()
    plan: Plan = field(default_factory=Plan)
    markers: Markers | None = None
    contact: ContactSolution | None = None
    system: System | None = None
    solution: Solution | None = None
    audit: tuple[Finding, ...] = ()
    kept: tuple[Kept, ...] = ()
    view: Mapping[str, object] = field(default_factory=dict)
    command: str = ""
    versions: Mapping[str, str] = field(
        default_factory=dict
    )  # that solved it; empty: the present ones
    notes: tuple[str, ...] = ()  # what opening the session had to say; not saved
