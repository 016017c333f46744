"""Where the fit starts, with nothing asked of the user: ephemeris, eclipses, contacts, velocities."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.band_model import constants_of
from shadowscale.fit.plan import Plan
from shadowscale.geometry.contacts import ContactSolution, contact_solution, starting_points
from shadowscale.orbit._rows import velocity_rows
from shadowscale.progress import Progress
from shadowscale.quantities import key
from shadowscale.timing.eclipses import measure_eclipses
from shadowscale.timing.period import search_period
from shadowscale.timing.results import MeasuredEclipses, PeriodSearch

Floats = NDArray[np.float64]
Start = dict[str, float]


@dataclass(frozen=True, eq=False)
class Ground:
    """What is known before the first fit."""

    search: PeriodSearch | None
    measured: MeasuredEclipses
    contact: ContactSolution
    starts: tuple[Start, ...]


def find_ground(
    photometry: Photometry, velocities: Velocities | None, plan: Plan, progress: Progress
) -> Ground:
    """Ephemeris, eclipses, contact solution, and the places from which to start.

    Raises
    ------
    NoSolutionError
        Where there are no eclipses, or the stars are too close.
    """
    search = None
    period, epoch = plan.period, plan.epoch
    if period is None:
        progress.report(0.02, "searching the period")
        search = search_period(photometry, progress=progress)
        period = search.period
        epoch = search.epoch if epoch is None else epoch
    progress.report(0.2, "measuring the eclipses")
    measured = measure_eclipses(photometry, period=period, epoch=epoch, exposure=plan.exposure)
    contact = contact_solution(measured.primary, measured.secondary, period=measured.period)
    starts = tuple(
        _complete(dict(point), measured, photometry, velocities, plan)
        for point in starting_points(measured.primary, measured.secondary, period=measured.period)
    )
    return Ground(search, measured, contact, starts)


def _complete(
    point: Start,
    measured: MeasuredEclipses,
    photometry: Photometry,
    velocities: Velocities | None,
    plan: Plan,
) -> Start:
    """Add ephemeris, brightness of each band and velocities to a start of the geometry."""
    if plan.orbit == "circular":
        point["ecosw"] = point["esinw"] = 0.0
    point |= {"period": measured.period, "epoch": measured.epoch}
    point |= _brightness(point, measured, photometry)
    point |= {name: value for name, value in plan.start.items() if name not in ("period", "epoch")}
    return point | velocity_start(point, velocities)


def _brightness(point: Start, measured: MeasuredEclipses, photometry: Photometry) -> Start:
    """Surface-brightness ratio of each band: the mean one, moved by the ratio of that band's depths."""
    overall = point.get("surface_brightness_ratio", 0.5)
    secondary = measured.secondary
    found = {}
    for band in photometry.bands:
        first, second = measured.depths.get(band, (measured.primary.depth, None))
        value = overall
        if secondary is not None and second is not None and first > 0 and second > 0:
            value = overall * (second / first) / (secondary.depth / measured.primary.depth)
        found[key("surface_brightness_ratio", band)] = float(np.clip(value, 1e-3, 30.0))
    return found


def velocity_start(values: Mapping[str, float], velocities: Velocities | None) -> Start:
    """K, gamma and offsets of both stars by linear least squares on the orbit of `values`."""
    if velocities is None:
        return {}
    constants = constants_of(values)
    rows = np.empty((velocities.time.size, 5))
    velocity_rows(velocities.time, values["period"], values["epoch"], constants, rows)
    found: Start = {}
    for star, sign in ((1, 1.0), (2, -1.0)):
        used = velocities.used1 if star == 1 else velocities.used2
        observed = (velocities.rv1 if star == 1 else velocities.rv2)[used]
        if observed.size:
            found |= _linear(
                star, sign * rows[used, 0], observed, velocities, velocities.source[used]
            )
    return found


def _linear(
    star: int, shape: Floats, observed: Floats, velocities: Velocities, source: NDArray[np.int64]
) -> Start:
    present = np.unique(source)
    design = np.column_stack([shape] + [(source == number).astype(float) for number in present])
    solved = np.linalg.lstsq(design, observed, rcond=None)[0]
    found = {f"K{star}": float(max(solved[0], 0.1)), f"gamma{star}": float(solved[1])}
    for column, number in enumerate(present[1:], start=2):
        found[key(f"offset{star}", velocities.sources[number])] = float(solved[column] - solved[1])
    return found
