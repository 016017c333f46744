"""Model curves as a picture draws them: sampled closely where the light changes fast."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.fit.solution import Solution
from shadowscale.fit.system import System
from shadowscale.geometry.contacts import ContactSolution
from shadowscale.session.session import Session
from shadowscale.view.last import Last
from shadowscale.view.light_points import to_magnitudes

COARSE, FINE = 360, 260  # samples of a cycle, and of each eclipse
PLAIN_SPANS = ((-0.12, 0.12), (0.38, 0.62))  # where eclipses are, if nothing is known of them
MARGIN = 0.15  # of an eclipse's duration, to either side


@dataclass(frozen=True, eq=False)
class Curve:
    """A line: phases [cycles] and flux, magnitudes or km/s."""

    label: str
    x: Floats
    y: Floats


def fitted_curves(session: Session, *, magnitudes: bool = False) -> tuple[Curve, ...]:
    """The light of the session's system in each band over phases -0.25...0.75; empty without one."""
    if session.system is None:
        return ()
    contact = None if session.solution is None else session.solution.contact
    return _FITTED.of(session.system, contact or session.contact, magnitudes)


def contact_curves(session: Session, *, magnitudes: bool = False) -> tuple[Curve, ...]:
    """The light that the contact markers alone give; empty where that says nothing new."""
    system = contact_system(session)
    return () if system is None else _CONTACT.of(system, session.contact, magnitudes)


def contact_system(session: Session) -> System | None:
    """The present system with the geometry of the contact solution put in.

    None where the markers lie where the solution measured its own contacts: nothing to compare.
    """
    return _SYSTEM.of(session.system, session.contact, session.solution)


def velocity_curves(system: System) -> tuple[Curve, ...]:
    """The model's velocities of both stars over phases -0.25...0.75 [km/s]; only of measured stars."""
    from shadowscale.fit.curves import model_curves

    phases = sampled_phases(None)
    curves = model_curves(system, phases)
    found = {"star 1": curves.rv1, "star 2": curves.rv2}
    return tuple(Curve(label, phases, y) for label, y in found.items() if y is not None)


def sampled_phases(contact: ContactSolution | None) -> Floats:
    """Phases -0.25...0.75, closer inside the eclipses (near 0 and 0.5 where nothing is known of them)."""
    spans = list(PLAIN_SPANS)
    if contact is not None:
        eclipses = [
            each.contacts for each in (contact.primary, contact.secondary) if each is not None
        ]
        spans = [_widened(contacts[0], contacts[3]) for contacts in eclipses]
    parts = [np.linspace(-0.25, 0.75, COARSE), *(np.linspace(*span, FINE) for span in spans)]
    phases: Floats = np.unique(np.concatenate(parts))
    return phases[(phases >= -0.25) & (phases <= 0.75)]


def _light_curves(
    system: System, contact: ContactSolution | None, magnitudes: bool
) -> tuple[Curve, ...]:
    from shadowscale.fit.curves import model_curves

    phases = sampled_phases(contact)
    curves = model_curves(system, phases)
    return tuple(
        Curve(band, phases, to_magnitudes(flux) if magnitudes else flux)
        for band, flux in curves.light.items()
    )


def _contact_system(
    system: System | None, contact: ContactSolution | None, solution: Solution | None
) -> System | None:
    if system is None or contact is None or _are_measured(contact, solution):
        return None
    names = ("radius_sum", "radius_ratio", "inclination", "ecosw", "esinw")
    values = {name: contact.values[name] for name in names if name in contact.values}
    return system.with_values(values) if "radius_sum" in values else None


def _are_measured(contact: ContactSolution, solution: Solution | None) -> bool:
    """Whether these are the contacts that the solution measured, read from a file again perhaps."""
    measured = None if solution is None else solution.contact
    return measured is not None and (contact is measured or contact.values == measured.values)


def _widened(first: float, last: float) -> tuple[float, float]:
    margin = MARGIN * (last - first)
    return first - margin, last + margin


_FITTED, _CONTACT, _SYSTEM = Last(_light_curves), Last(_light_curves), Last(_contact_system)
