"""Model curves as a picture draws them: sampled closely where the light changes fast."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.fit.system import System
from shadowscale.session.session import Markers, Session
from shadowscale.view.light_points import to_magnitudes

COARSE, FINE = 360, 260  # samples of a cycle, and of each eclipse


@dataclass(frozen=True, eq=False)
class Curve:
    """A line: phases [cycles] and flux, magnitudes or km/s."""

    label: str
    x: Floats
    y: Floats


def light_curves(
    system: System, *, markers: Markers | None = None, magnitudes: bool = False
) -> tuple[Curve, ...]:
    """The model's light in each band over phases -0.25...0.75."""
    from shadowscale.fit.curves import model_curves

    phases = sampled_phases(markers)
    curves = model_curves(system, phases)
    return tuple(
        Curve(band, phases, to_magnitudes(flux) if magnitudes else flux)
        for band, flux in curves.light.items()
    )


def velocity_curves(system: System) -> tuple[Curve, ...]:
    """The model's velocities of both stars over phases -0.25...0.75 [km/s]; only of measured stars."""
    from shadowscale.fit.curves import model_curves

    phases = sampled_phases(None)
    curves = model_curves(system, phases)
    found = {"star 1": curves.rv1, "star 2": curves.rv2}
    return tuple(Curve(label, phases, y) for label, y in found.items() if y is not None)


def sampled_phases(markers: Markers | None) -> Floats:
    """Phases -0.25...0.75, closer inside the eclipses (everywhere near 0 and 0.5 without markers)."""
    parts = [np.linspace(-0.25, 0.75, COARSE)]
    spans = [(-0.12, 0.12), (0.38, 0.62)]
    if markers is not None:
        contacts = [c for c in (markers.primary, markers.secondary) if c is not None]
        spans = [_widened(c[0], c[3]) for c in contacts]
    parts += [np.linspace(*span, FINE) for span in spans]
    phases: Floats = np.unique(np.concatenate(parts))
    return phases[(phases >= -0.25) & (phases <= 0.75)]


def _widened(first: float, last: float) -> tuple[float, float]:
    margin = 0.15 * (last - first)
    return first - margin, last + margin


def contact_curves(session: Session, *, magnitudes: bool = False) -> tuple[Curve, ...]:
    """The light that the contact markers alone give; empty without them or without a model to fill the rest."""
    system = contact_system(session)
    return (
        ()
        if system is None
        else light_curves(system, markers=session.markers, magnitudes=magnitudes)
    )


def contact_system(session: Session) -> System | None:
    """The present system with the geometry of the contact solution put in."""
    if session.system is None or session.contact is None:
        return None
    names = ("radius_sum", "radius_ratio", "inclination", "ecosw", "esinw")
    values = {
        name: session.contact.values[name] for name in names if name in session.contact.values
    }
    return session.system.with_values(values) if "radius_sum" in values else None
