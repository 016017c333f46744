"""From a solution and its tables to what the figures show, and to the model over one cycle."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import USED, Floats, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.errors import NoSolutionError
from shadowscale.fit.band_model import light_time_of
from shadowscale.fit.curves import ModelCurves, model_curves
from shadowscale.fit.solution import Solution
from shadowscale.geometry.contacts import ContactPhases, EclipseContacts, contact_phases
from shadowscale.sheet.figure_data import WHOLE, BandPoints, Shown, StarPoints
from shadowscale.timing.results import Minimum

COARSE, FINE = 401, 301  # samples of a cycle, and of each eclipse
MANY_ROWS = 300_000  # beyond this eclipses are not timed one by one for the figure


def shown_of(
    solution: Solution, photometry: Photometry, velocities: Velocities | None = None
) -> Shown:
    """What the figures of a solution show."""
    contacts = _contacts(solution)
    eclipses = _eclipses(contacts)
    curves = cycle_curves(solution)
    middle = contacts.secondary.middle
    return Shown(
        magnitudes=photometry.magnitudes,
        values={name: item.value for name, item in solution.estimates.items()},
        law=solution.system.law,
        correlation_names=solution.correlation_names,
        correlations=np.asarray(solution.correlations),
        eclipses=eclipses,
        secondary_phase=middle if np.isfinite(middle) else 0.5,
        bands=_bands(solution, photometry, curves),
        stars=_stars(solution, velocities, curves),
        sources=() if velocities is None else velocities.sources,
        minima=_minima(solution, photometry),
    )


def cycle_curves(solution: Solution) -> ModelCurves:
    """The model over one cycle, closer inside the eclipses."""
    parts = [np.linspace(*WHOLE, COARSE)]
    for eclipse in _eclipses(_contacts(solution)).values():
        margin = 0.15 * eclipse.duration
        parts.append(np.linspace(eclipse.first - margin, eclipse.fourth + margin, FINE))
    phases = np.unique(np.concatenate(parts))
    within = phases[(phases >= WHOLE[0]) & (phases <= WHOLE[1])]
    return model_curves(solution.system, within)


def _contacts(solution: Solution) -> ContactPhases:
    values = solution.system.values
    late = light_time_of(values) if solution.system.light_time else 0.0
    return contact_phases(
        values["radius_sum"], values["radius_ratio"], values["inclination"],
        values["ecosw"], values["esinw"], light_time=late,
    )  # fmt: skip


def _eclipses(contacts: ContactPhases) -> dict[int, EclipseContacts]:
    both = {1: contacts.primary, 2: contacts.secondary}
    return {number: each for number, each in both.items() if np.isfinite(each.duration)}


def _bands(solution: Solution, table: Photometry, curves: ModelCurves) -> tuple[BandPoints, ...]:
    """All bands that hold rows."""
    found = []
    light = solution.light
    for number, band in enumerate(table.bands):
        rows = np.flatnonzero((table.band == number) & np.isfinite(table.flux))
        if not rows.size:
            continue
        level = light.level[rows]
        y, expected, curve = (
            _as_given(flux, magnitudes=table.magnitudes)
            for flux in (table.flux[rows] / level, light.model[rows] / level, curves.light[band])
        )
        used = light.why[rows] == USED
        points = (light.phase[rows], y, 1e3 * (y - expected), used, curves.phases, curve)
        found.append(BandPoints(band, *points))
    return tuple(found)


def _as_given(flux: Floats, *, magnitudes: bool) -> Floats:
    """Flux as it is shown: relative, or magnitudes against the light outside eclipse."""
    if not magnitudes:
        return flux
    with np.errstate(invalid="ignore", divide="ignore"):
        shown: Floats = -2.5 * np.log10(flux)
    return shown


def _stars(
    solution: Solution, table: Velocities | None, curves: ModelCurves
) -> tuple[StarPoints, ...]:
    """The stars that were measured."""
    result, system = solution.velocity, solution.system
    if table is None or result is None:
        return ()
    found = []
    for star, velocity, error, model, why, curve in (
        (1, table.rv1, table.rv1_error, result.model1, result.why1, curves.rv1),
        (2, table.rv2, table.rv2_error, result.model2, result.why2, curves.rv2),
    ):
        if curve is None:
            continue
        rows = np.flatnonzero(np.isfinite(velocity))
        source = table.source[rows]
        offsets = [system.values.get(f"offset{star}[{name}]", 0.0) for name in table.sources]
        points = StarPoints(
            star, result.phase[rows], velocity[rows] - np.array(offsets)[source], error[rows],
            velocity[rows] - model[rows], source, why[rows] == USED,
            curves.phases, curve, system.value(f"gamma{star}"),
        )  # fmt: skip
        found.append(points)
    return tuple(found)


def _minima(solution: Solution, photometry: Photometry) -> tuple[Minimum, ...]:
    """Single eclipses that could be timed."""
    from shadowscale.timing.minima import times_of_minimum

    system = solution.system
    if photometry.time.size > MANY_ROWS:
        return ()
    try:
        found = times_of_minimum(
            photometry,
            period=system.value("period"),
            epoch=system.value("epoch"),
            exposure=system.exposure,
        )
    except NoSolutionError:
        return ()
    return tuple(item for item in found if not item.why_not)
