"""From markers to the contact solution, and from a solution back to markers."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats
from shadowscale.geometry.contacts import ContactSolution, EclipseTiming
from shadowscale.session.session import Markers, Session, Span
from shadowscale.view.light_points import ephemeris, fitting_solution, folded_time

CORE = (
    0.12  # part of the duration about the middle that gives the depth where there is no flat bottom
)
READ_TO = 2e-4  # cycles; how well a person places a contact, where nothing better is known
WINDOW_MARGIN = 0.35  # of the duration, to either side


def with_contact_solution(session: Session) -> Session:
    """The session with what its markers say; without a contact solution where they say nothing."""
    return replace(session, contact=contact_solution_of_markers(session))


def contact_solution_of_markers(session: Session) -> ContactSolution | None:
    """Geometry from the markers' contacts and the depths that the points show there."""
    from shadowscale.geometry.contacts import contact_solution

    markers, found = session.markers, ephemeris(session)
    if markers is None or found is None or session.photometry is None:
        return None
    primary, secondary = (_timing(session, part) for part in ("primary", "secondary"))
    if primary is None:
        return None
    return contact_solution(primary, secondary, period=found[0])


def with_start_markers(session: Session) -> Session:
    """The session with markers at the measured contacts, where it has none yet."""
    if session.markers is not None or session.contact is None:
        return session
    return replace(session, markers=markers_at(session.contact))


def markers_at(contact: ContactSolution) -> Markers:
    """Markers at the contacts of a contact solution, windows around them."""
    second = contact.secondary
    return Markers(
        primary=contact.primary.contacts,
        secondary=None if second is None else second.contacts,
        primary_window=_window(contact.primary),
        secondary_window=(0.4, 0.6) if second is None else _window(second),
    )


def with_ephemeris(session: Session, period: float, epoch: float) -> Session:
    """The session with a period and epoch to start from, and markers measured on the curve folded with them."""
    from shadowscale.timing.eclipses import measure_eclipses

    plan = replace(session.plan, period=period, epoch=epoch)
    changed = replace(
        session, plan=plan, system=None, solution=None, audit=(), contact=None, markers=None
    )
    assert session.photometry is not None
    measured = measure_eclipses(
        session.photometry, period=period, epoch=epoch, exposure=plan.exposure
    )
    changed = replace(changed, plan=replace(plan, epoch=measured.epoch))
    second = measured.secondary
    markers = Markers(
        primary=measured.primary.contacts,
        secondary=None if second is None else second.contacts,
        primary_window=measured.primary_window,
        secondary_window=measured.secondary_window or (0.4, 0.6),
    )
    return with_contact_solution(replace(changed, markers=markers))


def _timing(session: Session, part: str) -> EclipseTiming | None:
    """One eclipse as its markers lie; the depth from the points between the inner contacts."""
    markers = session.markers
    contacts = None if markers is None else getattr(markers, part)
    if contacts is None:
        return None
    first, second, third, fourth = contacts
    flat = third - second > 1e-4
    middle = (first + fourth) / 2
    half = (third - second) / 2 if flat else CORE * (fourth - first) / 2
    depth, error = _depth(session, (middle - half, middle + half))
    if not np.isfinite(depth):
        return None
    sigmas = np.array([READ_TO / 2, READ_TO, READ_TO, READ_TO, error])
    return EclipseTiming(
        middle, fourth - first, second - first, fourth - third, depth, flat, np.diag(sigmas**2)
    )


def _depth(session: Session, span: Span) -> tuple[float, float]:
    """Light lost in a span of phases, of the first band that has points there, and its error."""
    photometry, found = session.photometry, ephemeris(session)
    assert photometry is not None
    assert found is not None
    phase = folded_time(photometry, *found)
    inside = photometry.used & (phase >= span[0]) & (phase <= span[1])
    level = _level(session, phase)
    for band in range(len(photometry.bands)):
        rows = inside & (photometry.band == band)
        if rows.any():
            values = photometry.flux[rows] / level[rows]
            scatter = (
                float(np.std(values))
                if values.size > 2
                else float(photometry.flux_error[rows].mean())
            )
            return 1.0 - float(np.median(values)), max(1.25 * scatter / values.size**0.5, 1e-6)
    return float("nan"), float("nan")


def _level(session: Session, phase: Floats) -> Floats:
    """The light outside eclipse, row by row: of the solution, else of each band's stretches outside eclipse."""
    photometry, solution = session.photometry, fitting_solution(session)
    assert photometry is not None
    if solution is not None:
        return solution.light.level
    outside = photometry.used & _outside(session, phase)
    level = np.ones_like(photometry.flux)
    for band in range(len(photometry.bands)):
        rows = outside & (photometry.band == band)
        if rows.any():
            level[photometry.band == band] = np.median(photometry.flux[rows])
    return level


def _outside(session: Session, phase: Floats) -> NDArray[np.bool_]:
    markers = session.markers
    assert markers is not None
    if markers.level:
        spans = [(phase >= low) & (phase <= high) for low, high in markers.level]
        inside: NDArray[np.bool_] = np.logical_or.reduce(spans)
        return inside
    found: NDArray[np.bool_] = np.ones(phase.size, dtype=bool)
    for contacts in (markers.primary, markers.secondary):
        if contacts is not None:
            found &= (phase < contacts[0]) | (phase > contacts[3])
    return found


def _window(timing: EclipseTiming) -> Span:
    margin = timing.duration * (0.5 + WINDOW_MARGIN)
    return timing.middle - margin, timing.middle + margin
