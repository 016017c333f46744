"""Period and epoch to the last digit: the measured eclipses as a template, moved in time."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.timing.fold import Dip, nearest
from shadowscale.timing.levels import flattened
from shadowscale.timing.light_points import LightPoints, isolated
from shadowscale.timing.profile import TRAPEZOID, Profile
from shadowscale.timing.window_fit import SeenEclipse, see_eclipse, slope_and_residual

ROUNDS = 7
SMALL = 0.1  # step of the period that ends the rounds, in its error


@dataclass(frozen=True, eq=False)
class Refined:
    """An ephemeris with the eclipses measured on it; phases of the eclipses count from `origin`.

    epoch : of the deeper eclipse, near the middle of the data [d];  cycles_seen : of each eclipse
    """

    period: float
    period_error: float
    epoch: float
    origin: float
    eclipses: tuple[SeenEclipse, ...]
    points: LightPoints
    cycles: Floats
    cycles_seen: tuple[int, ...]


def refined(
    raw: LightPoints,
    period: float,
    origin: float,
    dips: tuple[Dip, ...],
    *,
    profile: Profile | None = TRAPEZOID,
) -> Refined | None:
    """Least squares for period and epoch with the shapes held, shapes measured again in each round.

    Parameters
    ----------
    raw : LightPoints
    period, origin : float [d]
        Start; the dips' phases count from `origin`, which should be near the middle of the data.
    dips : tuple of Dip
    profile : Profile or None
        Shape of the eclipses; None for the discs that are best in the first round.

    Returns
    -------
    Refined or None
        The deepest eclipse first; None where no dip has points enough to be fitted.
    """
    error, settled = np.inf, False
    found: list[SeenEclipse | None] = [None] * len(dips)
    calm = raw.at(~isolated(raw.time, raw.flux, raw.sigma))
    for turn in range(ROUNDS):
        last = settled or turn == ROUNDS - 1
        # Outliers among the folded points are left out only when the eclipses are in line.
        used = raw if last else calm
        cycles = (used.time - origin) / period
        points, _ = flattened(used, cycles, dips)
        found = [
            see_eclipse(
                points, cycles, dips, number,
                profile=profile, like=before.fit if before else None, clip=last,
            )
            for number, before in enumerate(found)
        ]  # fmt: skip
        seen = [one for one in found if one is not None]
        if not seen:
            return None
        if last:
            break
        shift, stretch, error = _steps(points, cycles, seen)
        settled = abs(stretch) < SMALL * error and turn > 0
        origin, period = origin + shift * period, period * (1 + stretch)
    error *= period
    seen.sort(key=lambda one: -one.fit.depth)
    counts = tuple(_cycles_seen(cycles, one) for one in seen)
    middle = seen[0].fit.middle
    epoch = origin + period * (middle - np.round(middle))
    return Refined(period, error, float(epoch), origin, tuple(seen), points, cycles, counts)


def polished(raw: LightPoints, found: Refined) -> Refined:
    """The same with the best discs as template: trapezoids leave errors where few points trace an eclipse."""
    dips = tuple(
        Dip(
            one.fit.middle % 1,
            one.fit.duration / 1.3,
            one.fit.depth,
            one.signal**2,
        )
        for one in found.eclipses
    )
    better = refined(raw, found.period, found.origin, dips, profile=None)
    if better is None or len(better.eclipses) < len(found.eclipses):
        return found
    return better


def _steps(
    points: LightPoints, cycles: Floats, seen: list[SeenEclipse]
) -> tuple[float, float, float]:
    """Shift of the origin [cycles], relative change of the period, and the latter's error."""
    normal, right, chi2, count = np.zeros((2, 2)), np.zeros(2), 0.0, 0
    for one in seen:
        slope, residual, where = slope_and_residual(points, cycles, one)
        # A later origin or a longer period lowers the phase of a point.
        rows = -slope[:, None] * np.stack([np.ones(where.size), where], axis=1)
        normal += rows.T @ rows
        right += rows.T @ residual
        chi2 += float(residual @ residual)
        count += residual.size
    covariance = np.linalg.pinv(normal, hermitian=True)
    step = covariance @ right
    scale = max(1.0, chi2 / max(count - 12, 1))
    return float(step[0]), float(step[1]), float(np.sqrt(covariance[1, 1] * scale))


def _cycles_seen(cycles: Floats, one: SeenEclipse) -> int:
    """How many single eclipses have points inside."""
    away = cycles - one.fit.middle
    number = np.round(away)
    inside = np.abs(away - number) < 0.4 * one.fit.duration
    return int(np.unique(number[inside]).size) if inside.any() else 0


def dip_near(middle: float, width: float, like: Dip) -> Dip:
    """A dip elsewhere with the depth of another."""
    place = float(nearest(np.array(middle), 0.5))
    return Dip(place, width, like.depth, like.gain)
