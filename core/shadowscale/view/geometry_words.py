"""The geometry from the markers beside that of the fit, and the velocities' numbers, in one line each."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from shadowscale.fit.solution import DERIVED, Estimate
from shadowscale.quantities import parse_key
from shadowscale.session.session import Session
from shadowscale.view.shown import moved_by_hand, shown_estimates
from shadowscale.view.written import symbol, unit_sign, value_and_error

NAMES = ("r1", "r2", "inclination")
VELOCITY_NAMES = ("K1", "K2", "gamma1", "gamma2", "offset1", "offset2")
SHAPE = ("ecosw", "esinw")  # shown where the fit has them free


@dataclass(frozen=True)
class GeometryLine:
    """Where it comes from, and (symbol, value, error) of each quantity that is known."""

    source: str
    cells: tuple[tuple[str, str, str], ...]


def geometry_lines(session: Session) -> tuple[GeometryLine, ...]:
    """Contacts first, then the fit, or the model as it was moved by hand; only what there is."""
    lines = []
    free = () if session.system is None else session.system.free
    names = (*NAMES, *(name for name in SHAPE if name in free))
    contact, solution = session.contact, session.solution
    if contact is not None:
        known = {
            name: Estimate(value, contact.errors.get(name), contact.errors.get(name), DERIVED)
            for name, value in contact.values.items()
        }
        lines.append(GeometryLine("contacts", _cells(known, names)))
    if solution is not None:
        source = "by hand" if moved_by_hand(session) else "fit"
        lines.append(GeometryLine(source, _cells(shown_estimates(session), names)))
    return tuple(line for line in lines if line.cells)


def velocity_cells(session: Session) -> tuple[tuple[str, str, str], ...]:
    """(symbol, value with unit, error) of amplitudes, systemic velocities and offsets; empty without a solution."""
    found = []
    for name, estimate in shown_estimates(session).items():
        if parse_key(name).name in VELOCITY_NAMES:
            value, error = value_and_error(name, estimate)
            found.append((symbol(name), value, error))
    return tuple(found)


def _cells(
    known: Mapping[str, Estimate], names: tuple[str, ...]
) -> tuple[tuple[str, str, str], ...]:
    found = []
    for name in names:
        estimate = known.get(name)
        if estimate is None:
            continue
        value, error = value_and_error(name, _even(estimate))
        sign = unit_sign("deg") if name == "inclination" else ""
        found.append((symbol(name), value + sign, error))
    return tuple(found)


def _even(estimate: Estimate) -> Estimate:
    """The larger limit on both sides: a line at a glance has no room for two."""
    limits = [each for each in (estimate.minus, estimate.plus) if each is not None]
    return replace(estimate, minus=max(limits), plus=max(limits)) if limits else estimate
