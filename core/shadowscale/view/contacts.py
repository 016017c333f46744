"""From markers to the contact solution, and from a solution back to markers."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats
from shadowscale.geometry.contacts import ContactSolution, EclipseTiming
from shadowscale.session.session import Markers, Session, Span
from shadowscale.session.spans import within
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


def with_measured_contacts(session: Session) -> Session:
    """The session with its contacts measured anew from the points in the eclipse windows.

    Points of marked stretches outside eclipse help with the level; the windows stay where they are.

    Raises
    ------
    NoSolutionError
        If no eclipse stands out in the windows.
    """
    from shadowscale.timing.eclipses import measure_eclipses

    markers, found, photometry = session.markers, ephemeris(session), session.photometry
    if markers is None or found is None or photometry is None:
        return session
    windows = {"primary": markers.primary_window, "secondary": markers.secondary_window}
    phase = folded_time(photometry, *found)
    kept = within(phase, (*windows.values(), *markers.level)) & ~within(phase, markers.excluded)
    measured = measure_eclipses(
        photometry.excluded(~kept, "outside the eclipse windows"),
        period=found[0],
        epoch=found[1],
        exposure=session.plan.exposure,
    )
    shift = (measured.epoch - found[1]) / found[0]
    contacts: dict[str, tuple[float, float, float, float]] = {}
    for timing in (measured.primary, measured.secondary):
        for part, window in windows.items():
            if timing is None:
                continue
            turns = np.floor(timing.middle + shift - window[0])
            middle = float(timing.middle + shift - turns)
            if middle <= window[1]:
                contacts[part] = replace(timing, middle=middle).contacts
    return with_contact_solution(replace(session, markers=_with_contacts(markers, contacts)))


def _with_contacts(
    markers: Markers, found: Mapping[str, tuple[float, float, float, float]]
) -> Markers:
    """The markers with these contacts, and the windows widened to hold them."""
    for part, contacts in found.items():
        low, high = getattr(markers, f"{part}_window")
        window = (min(low, contacts[0]), max(high, contacts[3]))
        markers = replace(markers, **{part: contacts, f"{part}_window": window})
    return markers


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
    inside = photometry.used & within(phase, (span,))
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
    """The light outside eclipse, row by row: the median of each band outside eclipse, on the solution's levels."""
    photometry, solution = session.photometry, fitting_solution(session)
    assert photometry is not None
    level = np.ones_like(photometry.flux) if solution is None else solution.light.level
    outside = photometry.used & _outside(session, phase)
    found = level.copy()
    for band in range(len(photometry.bands)):
        of_band = photometry.band == band
        rows = outside & of_band
        if rows.any():
            found[of_band] *= np.median(photometry.flux[rows] / level[rows])
    return found


def _outside(session: Session, phase: Floats) -> NDArray[np.bool_]:
    """Which points tell the light outside eclipse: those of the marked stretches, else all outside the windows."""
    markers = session.markers
    assert markers is not None
    taking_part = ~within(phase, markers.excluded)
    if markers.level:
        return taking_part & within(phase, markers.level)
    found = taking_part & ~within(phase, (markers.primary_window, markers.secondary_window))
    if found.any():
        return found
    contacts = [each for each in (markers.primary, markers.secondary) if each is not None]
    return taking_part & ~within(phase, [(each[0], each[3]) for each in contacts])


def _window(timing: EclipseTiming) -> Span:
    margin = timing.duration * (0.5 + WINDOW_MARGIN)
    return timing.middle - margin, timing.middle + margin
