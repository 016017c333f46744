"""What can be compared: solved sessions, sheets, and tables that somebody typed."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.errors import Problem, SessionError
from shadowscale.fit.solution import Solution
from shadowscale.jobs.packing import is_packed, unpack_session
from shadowscale.jobs.typed_table import Number, read_typed
from shadowscale.quantities import QUANTITIES
from shadowscale.session.session import Session


@dataclass(frozen=True, eq=False)
class Compared:
    """One column of a comparison.

    Attributes
    ----------
    numbers : mapping of key to Number
        In the register's units.
    fit : mapping
        Points, free quantities, chi-squared; empty for a typed table.
    data : tuple of str
        Checksums of the inputs, sorted; empty where not known.
    law : str
        Of limb darkening, whose coefficients mean nothing under another; empty where not known.
    solution, photometry, velocities
        Where a session gave them.
    """

    name: str
    numbers: Mapping[str, Number]
    fit: Mapping[str, float] = field(default_factory=dict)
    data: tuple[str, ...] = ()
    law: str = ""
    solution: Solution | None = None
    photometry: Photometry | None = None
    velocities: Velocities | None = None


def read_compared(path: Path) -> tuple[Compared, ...]:
    """What a file holds: one solution, or with kept ones several.

    Raises
    ------
    InputError
        If it is none of the three, or a session without a solution.
    """
    if is_packed(path):
        with TemporaryDirectory() as folder:
            return _session(unpack_session(path, Path(folder) / path.stem))
    if path.suffix.lower() != ".json":
        return (Compared(path_name(path), read_typed(path)),)
    document = _json(path)
    if "quantities" in document:
        return (_sheet(path, document),)
    return _session(path)


def _json(path: Path) -> dict[str, Any]:
    expected = "a session, a sheet.json or a table"
    try:
        document = json.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise SessionError(Problem(str(path), expected, error.strerror or "trouble")) from error
    except ValueError as error:
        raise SessionError(Problem(str(path), expected, f"no JSON ({error})")) from error
    if not isinstance(document, dict):
        raise SessionError(Problem(str(path), expected, "other JSON"))
    return document


def _session(path: Path) -> tuple[Compared, ...]:
    from shadowscale.session.store import open_session

    session = open_session(path)
    held = [] if session.solution is None else [(path_name(path), session.solution)]
    held += [(kept.name, kept.solution) for kept in session.kept]
    if not held:
        why = "; ".join(session.notes) or "one without a solution"
        raise SessionError(Problem(str(path), "a solved session", why))
    return tuple(solved(name, solution, session) for name, solution in held)


def solved(name: str, solution: Solution, session: Session) -> Compared:
    """A solution of a session as a column."""
    fit = solution.fit
    sources = session.photometry_sources + session.velocity_sources
    return Compared(
        name=name,
        numbers={
            key: Number(item.value, item.minus, item.plus)
            for key, item in solution.estimates.items()
        },
        fit={"points": fit.points, "free": fit.free, "chi2": fit.chi2},
        data=tuple(sorted(source.sha256 for source in sources)),
        law=solution.system.law,
        solution=solution,
        photometry=session.photometry,
        velocities=session.velocities,
    )


def _sheet(path: Path, document: Mapping[str, Any]) -> Compared:
    try:
        fit = document["fit"]
        return Compared(
            name=path_name(path),
            numbers={key: _number(item) for key, item in _entries(document)},
            fit={name: fit[name] for name in ("points", "free", "chi2") if fit[name] is not None},
            data=tuple(sorted(item["sha256"] for item in document["provenance"]["inputs"])),
            law=next((band["limb_darkening"]["law"] for band in document["bands"].values()), ""),
        )
    except (KeyError, TypeError, AttributeError) as error:
        raise SessionError(Problem(str(path), "a sheet.json", f"trouble at {error}")) from error


def _entries(document: Mapping[str, Any]) -> Iterator[tuple[str, Mapping[str, Any]]]:
    """Every number of a sheet by its key."""
    yield from _with_values(document["quantities"], "")
    for label, band in document["bands"].items():
        yield from _with_values(band, f"[{label}]")
        for star in (1, 2):
            found = band["limb_darkening"].get(f"star{star}", {})
            for number, item in enumerate(found.values(), 1):
                yield f"limb_darkening{star}[{label}].{number}", item
    for label, source in document["sources"].items():
        yield from _with_values(source, f"[{label}]")


def _with_values(items: Mapping[str, Any], label: str) -> Iterator[tuple[str, Mapping[str, Any]]]:
    for name, item in items.items():
        if name in QUANTITIES and isinstance(item, dict) and item.get("value") is not None:
            yield f"{name}{label}", item


def _number(item: Mapping[str, Any]) -> Number:
    return Number(item["value"], item["minus"], item["plus"])


def path_name(path: Path) -> str:
    """A short name for a file: its own, or its folder's where it is a usual result."""
    plain = path.stem in ("session", "sheet")
    return path.resolve().parent.name if plain and path.resolve().parent.name else path.stem
