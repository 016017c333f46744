"""What the figures show, ready to be drawn: points and curves in the observer's own quantity."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import USED, Floats, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.band_model import light_time_of
from shadowscale.fit.curves import ModelCurves, model_curves
from shadowscale.fit.solution import Solution
from shadowscale.geometry.contacts import ContactPhases, EclipseContacts, contact_phases
from shadowscale.timing.results import Minimum

WHOLE = (-0.25, 0.75)
COARSE, FINE = 401, 301  # samples of a cycle, and of each eclipse
MANY_ROWS = 300_000  # beyond this eclipses are not timed one by one for the figure
Bools = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class BandPoints:
    """One band: phase, y, residual of its rows; which take part; the model's curve."""

    band: str
    phase: Floats
    y: Floats
    residual: Floats
    used: Bools
    curve_phase: Floats
    curve: Floats


@dataclass(frozen=True, eq=False)
class StarPoints:
    """One star: phase, velocity without the source's offset, error, residual, source; which take part."""

    star: int
    phase: Floats
    velocity: Floats
    error: Floats
    residual: Floats
    source: NDArray[np.int64]
    used: Bools
    curve: Floats
    gamma: float


@dataclass(frozen=True, eq=False)
class Shown:
    """A solution with its tables, as figures need them; everything is made when first asked for."""

    solution: Solution
    photometry: Photometry
    velocities: Velocities | None = None

    @property
    def magnitudes(self) -> bool:
        """Whether light is shown in magnitudes, as it was given."""
        return self.photometry.magnitudes

    @cached_property
    def contacts(self) -> ContactPhases:
        """Contacts of both eclipses [cycles from the epoch]."""
        values = self.solution.system.values
        late = light_time_of(values) if self.solution.system.light_time else 0.0
        return contact_phases(
            values["radius_sum"], values["radius_ratio"], values["inclination"],
            values["ecosw"], values["esinw"], light_time=late,
        )  # fmt: skip

    @cached_property
    def eclipses(self) -> dict[int, EclipseContacts]:
        """The eclipses that happen, by number."""
        both = {1: self.contacts.primary, 2: self.contacts.secondary}
        return {number: each for number, each in both.items() if np.isfinite(each.duration)}

    @cached_property
    def curves(self) -> ModelCurves:
        """The model over one cycle, closer inside the eclipses."""
        parts = [np.linspace(*WHOLE, COARSE)]
        for eclipse in self.eclipses.values():
            margin = 0.15 * eclipse.duration
            parts.append(np.linspace(eclipse.first - margin, eclipse.fourth + margin, FINE))
        phases = np.unique(np.concatenate(parts))
        return model_curves(
            self.solution.system, phases[(phases >= WHOLE[0]) & (phases <= WHOLE[1])]
        )

    @cached_property
    def bands(self) -> tuple[BandPoints, ...]:
        """All bands that hold rows."""
        numbers = range(len(self.photometry.bands))
        found = (self._band(number) for number in numbers)
        return tuple(each for each in found if each.phase.size)

    @cached_property
    def stars(self) -> tuple[StarPoints, ...]:
        """The stars that were measured."""
        if self.velocities is None or self.solution.velocity is None:
            return ()
        return tuple(
            self._star(star) for star in (1, 2) if f"K{star}" in self.solution.system.values
        )

    @cached_property
    def minima(self) -> tuple[Minimum, ...]:
        """Single eclipses that could be timed."""
        from shadowscale.errors import NoSolutionError
        from shadowscale.timing.minima import times_of_minimum

        system = self.solution.system
        if self.photometry.time.size > MANY_ROWS:
            return ()
        try:
            found = times_of_minimum(
                self.photometry,
                period=system.value("period"),
                epoch=system.value("epoch"),
                exposure=system.exposure,
            )
        except NoSolutionError:
            return ()
        return tuple(item for item in found if not item.why_not)

    def _band(self, number: int) -> BandPoints:
        light, table = self.solution.light, self.photometry
        rows = np.flatnonzero((table.band == number) & np.isfinite(table.flux))
        level = light.level[rows]
        flux, model = table.flux[rows] / level, light.model[rows] / level
        band = table.bands[number]
        y, expected = self.shown_light(flux), self.shown_light(model)
        phase, used = light.phase[rows], light.why[rows] == USED
        curve = self.shown_light(self.curves.light[band])
        return BandPoints(band, phase, y, 1e3 * (y - expected), used, self.curves.phases, curve)

    def _star(self, star: int) -> StarPoints:
        table, result = self.velocities, self.solution.velocity
        assert table is not None
        assert result is not None
        velocity, error, model, why, curve = (
            (table.rv1, table.rv1_error, result.model1, result.why1, self.curves.rv1)
            if star == 1
            else (table.rv2, table.rv2_error, result.model2, result.why2, self.curves.rv2)
        )
        assert curve is not None
        rows = np.flatnonzero(np.isfinite(velocity))
        offsets = [
            self.solution.system.values.get(f"offset{star}[{name}]", 0.0) for name in table.sources
        ]
        source = table.source[rows]
        return StarPoints(
            star,
            result.phase[rows],
            velocity[rows] - np.array(offsets)[source],
            error[rows],
            velocity[rows] - model[rows],
            source,
            why[rows] == USED,
            curve,
            self.solution.system.value(f"gamma{star}"),
        )

    def shown_light(self, flux: Floats) -> Floats:
        """Flux as it is shown: relative, or magnitudes against the light outside eclipse."""
        if not self.magnitudes:
            return flux
        with np.errstate(invalid="ignore", divide="ignore"):
            shown: Floats = -2.5 * np.log10(flux)
        return shown


def eclipse_window(eclipse: EclipseContacts) -> tuple[float, float]:
    """Phases that show an eclipse with its shoulders."""
    margin = 0.22 * eclipse.duration
    return eclipse.first - margin, eclipse.fourth + margin


def around(phase: Floats, window: tuple[float, float]) -> Floats:
    """Phases moved by whole cycles next to the middle of a window."""
    middle = sum(window) / 2
    moved: Floats = phase - np.round(phase - middle)
    return moved
