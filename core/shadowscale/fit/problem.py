"""One fit of one system to the measurements: the step that every strategy repeats."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Ints, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.least_squares import STALLED, Minimum, minimise
from shadowscale.fit.objective import Constraint, Objective
from shadowscale.fit.observed import BandData, StarVelocities, band_data, star_velocities
from shadowscale.fit.system import System
from shadowscale.fit.vector import Vector

Floats = NDArray[np.float64]
MOST_STEPS = 200  # along a narrow valley they are short
FINAL = 1e-6  # gain in chi-squared that is left when a fit has settled: a thousandth of a sigma
ROUGH, ROUGH_STALLED = 1e-2, 0.3  # the same while valleys are compared


@dataclass(frozen=True, eq=False)
class Weighting:
    """Which rows take part, and how much they weigh.

    why, why1, why2 : as in the tables, with what the fit set aside
    light_scale : factor on the errors of each band
    jitter : (star, source number) to km/s
    star_error : star to the error [km/s] of velocities that came without errors
    """

    why: Ints
    why1: Ints
    why2: Ints
    light_scale: Mapping[str, float] = field(default_factory=dict)
    jitter: Mapping[tuple[int, int], float] = field(default_factory=dict)
    star_error: Mapping[int, float] = field(default_factory=dict)


@dataclass(eq=False)
class Problem:
    """The measurements, and the arrays made of them (kept while rows and levels stay the same)."""

    photometry: Photometry
    velocities: Velocities | None
    _bands: dict[tuple[str, int], tuple[Ints, tuple[BandData, ...]]] = field(default_factory=dict)

    def weighting(self) -> Weighting:
        """Rows as the tables have them, errors as given."""
        none = np.zeros(0, dtype=np.int64)
        rv = self.velocities
        return Weighting(
            self.photometry.why, none if rv is None else rv.why1, none if rv is None else rv.why2
        )

    def bands(self, levels: str, why: Ints) -> tuple[BandData, ...]:
        """Each band's arrays."""
        segments = "one" if levels == "one" else "night"
        held = self._bands.get((segments, id(why)))
        if held is None:
            made = tuple(
                band_data(self.photometry, band, levels=segments, why=why)
                for band in range(len(self.photometry.bands))
            )
            held = (why, made)  # the array is kept, so that its id stays its own
            self._bands[(segments, id(why))] = held
        return held[1]

    def stars(self, weighting: Weighting) -> tuple[StarVelocities, ...]:
        """Each measured star's velocities."""
        if self.velocities is None:
            return ()
        found = []
        for star, why in ((1, weighting.why1), (2, weighting.why2)):
            data = star_velocities(self.velocities, star, why)
            if star in weighting.star_error:
                data = replace(data, error=np.full_like(data.error, weighting.star_error[star]))
            if data.time.size:
                found.append(data)
        return tuple(found)

    def objective(
        self, system: System, weighting: Weighting, constraints: Sequence[Constraint]
    ) -> Objective:
        """What a fit of `system` minimises."""
        return Objective(
            Vector(system),
            self.bands(system.levels, weighting.why),
            self.stars(weighting),
            constraints,
            weighting.light_scale,
            weighting.jitter,
        )


@dataclass(frozen=True, eq=False)
class Fitted:
    """A system at the minimum of its objective."""

    system: System
    objective: Objective
    minimum: Minimum
    constraints: tuple[Constraint, ...]

    @property
    def chi2(self) -> float:
        """Chi-squared, priors included."""
        return self.minimum.chi2


def thinned(photometry: Photometry, why: Ints, most: int) -> Ints:
    """`why` (n,) with at most about `most` rows left, evenly in time: enough to tell valleys apart."""
    rows = np.flatnonzero(why == 0)
    stride = -(-rows.size // most)
    if stride <= 1:
        return why
    thin = np.full_like(why, len(photometry.reasons) + 1)
    thin[rows[::stride]] = 0
    return np.where(why == 0, thin, why)


def fit_system(
    problem: Problem,
    system: System,
    *,
    weighting: Weighting,
    constraints: Sequence[Constraint] = (),
    most: int = MOST_STEPS,
    rough: bool = False,
) -> Fitted:
    """Fit the free quantities of `system` from where they are; `rough` is enough to compare valleys."""
    active = tuple(
        rule for rule in constraints if rule.function is not None or rule.name in system.free
    )
    objective = problem.objective(system, weighting, active)
    vector = objective.vector
    minimum = minimise(
        objective, vector.pack(system.values), bounds=vector.bounds, most=most,
        tolerance=ROUGH if rough else FINAL, stalled=ROUGH_STALLED if rough else STALLED,
    )  # fmt: skip
    solved = system.with_values(vector.unpack(minimum.x))
    return Fitted(solved, objective, minimum, active)
