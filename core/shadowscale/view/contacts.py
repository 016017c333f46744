"""From markers to the contact solution, and from a solution back to markers."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from shadowscale.data.photometry import Floats, Ints, Photometry
from shadowscale.fit.solution import Solution
from shadowscale.geometry.contacts import ContactSolution, EclipseTiming
from shadowscale.session.session import Markers, Session, Span
from shadowscale.session.spans import within
from shadowscale.view.last import Last
from shadowscale.view.light_points import ephemeris, fitting_solution, folded_time
from shadowscale.view.stretches import Ordered, Places, ordered

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
    photometry, markers, found = session.photometry, session.markers, ephemeris(session)
    assert photometry is not None
    assert markers is not None
    assert found is not None
    order = ordered(photometry, *found)
    inside = order.both(order.places((span,)), order.beside(order.places(markers.excluded)))
    rows = order.rows_at(inside)
    solution = fitting_solution(session)
    level = _LEVEL.of(
        photometry,
        solution,
        *found,
        markers.primary_window,
        markers.secondary_window,
        markers.level,
        markers.excluded,
    )
    if level is None:
        level = _medians(photometry, solution, order.rows_at(_beside_contacts(order, markers)))
    for band in range(len(photometry.bands)):
        of_band = rows[photometry.band[rows] == band]
        if of_band.size:
            values = photometry.flux[of_band] / _level_at(solution, of_band) / level[band]
            scatter = (
                float(np.std(values))
                if values.size > 2
                else float(photometry.flux_error[of_band].mean())
            )
            return 1.0 - float(np.median(values)), max(1.25 * scatter / values.size**0.5, 1e-6)
    return float("nan"), float("nan")


def _band_levels(
    photometry: Photometry,
    solution: Solution | None,
    period: float,
    epoch: float,
    primary_window: Span,
    secondary_window: Span,
    level: Sequence[Span],
    excluded: Sequence[Span],
) -> Floats | None:
    """(bands,) the light outside eclipse: where stretches are marked for it, else beside the windows; None: nowhere."""
    order = ordered(photometry, period, epoch)
    part = order.beside(order.places(excluded))
    if level:
        outside = order.both(part, order.places(level))
    else:
        windows = order.places((primary_window, secondary_window))
        outside = order.both(part, order.beside(windows))
    return _medians(photometry, solution, order.rows_at(outside)) if outside else None


def _beside_contacts(order: Ordered, markers: Markers) -> Places:
    """Everything outside the outer contacts that is not excluded."""
    contacts = [each for each in (markers.primary, markers.secondary) if each is not None]
    eclipses = order.places([(each[0], each[3]) for each in contacts])
    return order.both(order.beside(eclipses), order.beside(order.places(markers.excluded)))


def _medians(photometry: Photometry, solution: Solution | None, rows: Ints) -> Floats:
    """(bands,) the median light of some rows, on the solution's levels; 1 where a band has none."""
    values, band = photometry.flux[rows] / _level_at(solution, rows), photometry.band[rows]
    found = np.ones(len(photometry.bands))
    for number in range(found.size):
        of_band = values[band == number]
        if of_band.size:
            found[number] = np.median(of_band)
    return found


def _level_at(solution: Solution | None, rows: Ints) -> Floats:
    """The solution's levels; 1 without one."""
    return np.ones(rows.size) if solution is None else solution.light.level[rows]


def _window(timing: EclipseTiming) -> Span:
    margin = timing.duration * (0.5 + WINDOW_MARGIN)
    return timing.middle - margin, timing.middle + margin


_LEVEL: Last[Floats | None] = Last(_band_levels)
