"""Where the fit starts, with nothing asked of the user: ephemeris, eclipses, contacts, velocities."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.band_model import constants_of
from shadowscale.fit.plan import Plan
from shadowscale.geometry.contacts import (
    ContactSolution,
    EclipseTiming,
    contact_solution,
    starting_points,
)
from shadowscale.orbit._rows import velocity_rows
from shadowscale.progress import Progress
from shadowscale.quantities import key
from shadowscale.timing.detached import check_folded
from shadowscale.timing.eclipses import measure_eclipses
from shadowscale.timing.period import search_period
from shadowscale.timing.results import MeasuredEclipses, PeriodSearch

Floats = NDArray[np.float64]
Start = dict[str, float]
TRIED_THIRD_LIGHT = 0.3
LIKELY = 0.2  # score of a period candidate from which on velocities may lightly prefer it
MOST_LEFT = {True: 0.5, False: 0.05}  # of chi-squared of the velocities, for a likely one or not


@dataclass(frozen=True, eq=False)
class Ground:
    """What is known before the first fit."""

    search: PeriodSearch | None
    measured: MeasuredEclipses
    contact: ContactSolution
    starts: tuple[Start, ...]
    dim_starts: tuple[Start, ...] = ()  # the same with third light


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
    period, epoch = wished(plan, "period"), wished(plan, "epoch")
    if period is None:
        progress.report(0.02, "searching the period")
        search = search_period(photometry, progress=progress)
        period, found = period_of_velocities(search, velocities)
        epoch = found if epoch is None else epoch
    progress.report(0.2, "measuring the eclipses")
    measured = measure_eclipses(photometry, period=period, epoch=epoch, exposure=plan.exposure)
    if search is None:
        check_folded(photometry, period)
    contact, starts = _contacts(measured, photometry, velocities, plan)
    if measured.secondary is not None and _backwards(starts[0], velocities):
        measured = exchanged(measured)
        contact, starts = _contacts(measured, photometry, velocities, plan)
    dimmed = _diluted(measured, 1.0 - TRIED_THIRD_LIGHT)
    _, dim = _contacts(dimmed, photometry, velocities, plan)
    third = {key("third_light", band): TRIED_THIRD_LIGHT for band in photometry.bands}
    return Ground(search, measured, contact, starts, tuple(start | third for start in dim))


def period_of_velocities(
    search: PeriodSearch, velocities: Velocities | None
) -> tuple[float, float]:
    """Period and epoch of a search, chosen by the velocities where they tell the candidates apart.

    Eclipses alone may leave P, 2P and P/2; velocities swing once a period. A candidate takes the
    place of the first one when a sine curve of its period leaves less than half the chi-squared,
    or, where its eclipses fit much worse, next to nothing of it.
    """
    first = search.period, search.epoch
    if velocities is None:
        return first
    least = _sine_chi2(search.period, velocities)
    for each in search.candidates:
        chi2 = _sine_chi2(each.period, velocities)
        if chi2 < least * MOST_LEFT[each.score > LIKELY]:
            least, first = chi2, (each.period, each.epoch)
    return first


def _sine_chi2(period: float, velocities: Velocities) -> float:
    """Chi-squared of a sine curve through each star's velocities, a level a source."""
    total = 0.0
    for rv, error, used in (
        (velocities.rv1, velocities.rv1_error, velocities.used1),
        (velocities.rv2, velocities.rv2_error, velocities.used2),
    ):
        if not used.any():
            continue
        angle = 2 * np.pi * velocities.time[used] / period
        source = velocities.source[used]
        levels = [source == number for number in np.unique(source)]
        design = np.column_stack([np.cos(angle), np.sin(angle), *levels]) / error[used, None]
        solved = np.linalg.lstsq(design, rv[used] / error[used], rcond=None)[0]
        total += float(np.sum((rv[used] / error[used] - design @ solved) ** 2))
    return total


def wished(plan: Plan, name: str) -> float | None:
    """The `period` or `epoch` near which the user wants it: as given, as held, or as in a prior."""
    given: float | None = getattr(plan, name)
    if given is not None:
        return given
    if name in plan.fixed:
        return plan.fixed[name][0]
    return next((prior.values[0] for prior in plan.priors if prior.name == name), None)


def seen_once(measured: MeasuredEclipses, photometry: Photometry) -> bool:
    """Whether no eclipse was seen in two cycles, so that the light cannot tell the period."""
    cycles = (photometry.time[photometry.used] - measured.epoch) / measured.period
    for timing in (measured.primary, measured.secondary):
        if timing is not None:
            away = cycles - timing.middle
            inside = np.abs(away - np.round(away)) < timing.duration / 2
            if np.unique(np.round(away[inside])).size > 1:
                return False
    return True


def _contacts(
    measured: MeasuredEclipses, photometry: Photometry, velocities: Velocities | None, plan: Plan
) -> tuple[ContactSolution, tuple[Start, ...]]:
    """The contact solution and the starts that go with it."""
    eclipses = measured.primary, measured.secondary
    contact = contact_solution(*eclipses, period=measured.period)
    points = starting_points(*eclipses, period=measured.period)
    starts = (_complete(dict(point), measured, photometry, velocities, plan) for point in points)
    return contact, tuple(starts)


def _backwards(start: Start, velocities: Velocities | None) -> bool:
    """Whether the velocities say that star 1 is the one behind at the other minimum."""
    if velocities is None:
        return False
    slopes = signed_amplitudes(start, velocities)
    return bool(slopes) and sum(slopes.values()) < 0.0


def exchanged(measured: MeasuredEclipses) -> MeasuredEclipses:
    """The same eclipses with the other one as the primary."""
    secondary = measured.secondary
    if secondary is None:
        return measured
    middle = secondary.middle
    word = (
        "star 1 of the velocities is eclipsed at the shallower minimum, which is therefore "
        "the primary here"
    )
    return replace(
        measured,
        epoch=measured.epoch + middle * measured.period,
        primary=replace(secondary, middle=0.0),
        secondary=replace(measured.primary, middle=1.0 - middle),
        depths={band: (two, one) for band, (one, two) in measured.depths.items()},
        depth_errors={band: (two, one) for band, (one, two) in measured.depth_errors.items()},
        primary_window=_moved(measured.secondary_window or measured.primary_window, -middle),
        secondary_window=_moved(measured.primary_window, 1.0 - middle),
        notes=(*(note for note in measured.notes if "epoch was moved" not in note), word),
    )


def _moved(span: tuple[float, float], by: float) -> tuple[float, float]:
    return span[0] + by, span[1] + by


def _diluted(measured: MeasuredEclipses, share: float) -> MeasuredEclipses:
    """The eclipses as deep as they would be without the rest of the light."""

    def deeper(timing: EclipseTiming) -> EclipseTiming:
        return replace(timing, depth=min(timing.depth / share, 0.99))

    secondary = measured.secondary
    return replace(
        measured,
        primary=deeper(measured.primary),
        secondary=None if secondary is None else deeper(secondary),
    )


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
        if secondary is not None and first and second and first > 0 and second > 0:
            value = overall * (second / first) / (secondary.depth / measured.primary.depth)
        found[key("surface_brightness_ratio", band)] = float(np.clip(value, 1e-3, 30.0))
    return found


def velocity_start(values: Mapping[str, float], velocities: Velocities | None) -> Start:
    """K, gamma and offsets of both stars by linear least squares on the orbit of `values`."""
    if velocities is None:
        return {}
    found: Start = {}
    for star, (solved, present) in _linear_orbits(values, velocities).items():
        found |= {f"K{star}": max(solved[0], 0.1), f"gamma{star}": solved[1]}
        for column, number in enumerate(present[1:], start=2):
            name = key(f"offset{star}", velocities.sources[number])
            found[name] = solved[column] - solved[1]
    return found


def signed_amplitudes(values: Mapping[str, float], velocities: Velocities) -> dict[int, float]:
    """K of each measured star, negative where it moves against the orbit of `values`."""
    return {star: solved[0] for star, (solved, _) in _linear_orbits(values, velocities).items()}


def _linear_orbits(
    values: Mapping[str, float], velocities: Velocities
) -> dict[int, tuple[list[float], list[int]]]:
    """For each measured star: amplitude and a level a source, and which sources there are."""
    constants = constants_of(values)
    rows = np.empty((velocities.time.size, 5))
    time = np.array(velocities.time)
    velocity_rows(time, values["period"], values["epoch"], constants, rows)
    found = {}
    for star, sign in ((1, 1.0), (2, -1.0)):
        used = velocities.used1 if star == 1 else velocities.used2
        if not used.any():
            continue
        observed = (velocities.rv1 if star == 1 else velocities.rv2)[used]
        source = velocities.source[used]
        present = np.unique(source)
        design = np.column_stack([sign * rows[used, 0], *(source == n for n in present)])
        solved = np.linalg.lstsq(design.astype(np.float64), observed, rcond=None)[0]
        found[star] = (solved.tolist(), present.tolist())
    return found
