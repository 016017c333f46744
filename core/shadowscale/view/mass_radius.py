"""Stars in the mass-radius picture, in the logarithms that it draws."""

from __future__ import annotations

from dataclasses import dataclass
from math import log10

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.fit.solution import Estimate
from shadowscale.geometry.published import PUBLISHED, PublishedStar
from shadowscale.session.session import Session
from shadowscale.view.shown import shown_estimates
from shadowscale.view.written import one_line


@dataclass(frozen=True, eq=False)
class PlottedStar:
    """A star: log10 of solar masses and radii, its error bars as pairs of points, its words."""

    log_mass: float
    log_radius: float
    words: str
    bar_x: Floats
    bar_y: Floats


def published_stars() -> tuple[PlottedStar, ...]:
    """The well-studied stars."""
    return tuple(_published(star) for star in PUBLISHED)


def measured_stars(session: Session) -> tuple[PlottedStar, ...]:
    """Both stars where masses and radii are known."""
    estimates = shown_estimates(session)
    found = []
    for star in (1, 2):
        mass, radius = (estimates.get(f"{letter}{star}") for letter in "MR")
        if mass is not None and radius is not None and mass.value > 0 and radius.value > 0:
            words = f"star {star}: {one_line(f'M{star}', mass)}, {one_line(f'R{star}', radius)}"
            found.append(_plotted(mass, radius, words))
    return tuple(found)


def _published(star: PublishedStar) -> PlottedStar:
    mass = Estimate(star.mass, star.mass_error, star.mass_error, "published")
    radius = Estimate(star.radius, star.radius_error, star.radius_error, "published")
    words = f"{star.name}: {one_line('M1', mass)}, {one_line('R1', radius)}\n{star.paper}"
    return _plotted(mass, radius, words)


def _plotted(mass: Estimate, radius: Estimate, words: str) -> PlottedStar:
    x, y = log10(mass.value), log10(radius.value)
    ends_x, ends_y = _ends(mass), _ends(radius)
    return PlottedStar(x, y, words, np.array([*ends_x, x, x]), np.array([y, y, *ends_y]))


def _ends(estimate: Estimate) -> tuple[float, float]:
    low = max(estimate.value - (estimate.minus or 0.0), 0.1 * estimate.value)
    return log10(low), log10(estimate.value + (estimate.plus or 0.0))
