"""Simulated radial velocities: spread over the phases, as several spectrographs give them."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.system import System
from shadowscale.jobs.printed import printed, time_name, written_time
from shadowscale.jobs.spec import VelocitySource, VelocitySpec

Floats = NDArray[np.float64]


def velocity_file(spec: VelocitySpec, system: System, random: np.random.Generator) -> str:
    """All sources in one file, in time order; an empty cell where a star was not measured."""
    header = [time_name(spec.time_scale, spec.time_offset)]
    header += ["rv1", "rv1_err", "rv2", "rv2_err", "source"]
    rows: list[tuple[float, list[str]]] = []
    for source in spec.sources:
        rows += _source_rows(spec, source, system, random)
    rows.sort(key=lambda item: item[0])
    return printed(header, [row for _, row in rows])


def _source_rows(
    spec: VelocitySpec, source: VelocitySource, system: System, random: np.random.Generator
) -> list[tuple[float, list[str]]]:
    from shadowscale.fit.model import model_velocities

    time = _times(spec, source, system, random)
    cells = []
    for star in (1, 2):
        error, offset = (getattr(source, f"{name}{star}") for name in ("error", "offset"))
        if star > source.stars:
            cells.append([["", ""]] * time.size)
            continue
        noise = error * random.standard_normal(time.size)
        value = model_velocities(system, star, time) + offset + noise
        cells.append([[f"{item:.3f}", f"{error:.3f}"] for item in value])
    return [
        (when, [written_time(when, spec.time_offset), *one, *two, source.name])
        for when, one, two in zip(time.tolist(), *cells)
    ]


def _times(
    spec: VelocitySpec, source: VelocitySource, system: System, random: np.random.Generator
) -> Floats:
    """Phases spread evenly with a random shift each, in random cycles of the span."""
    period, epoch = system.value("period"), system.value("epoch")
    phases = (np.arange(source.number) + random.random(source.number)) / source.number
    first = (spec.start - epoch) / period
    cycles = max(1, int((spec.end - spec.start) / period))
    whole = np.floor(random.random(source.number) * cycles)
    times: Floats = epoch + period * (np.ceil(first) + whole + phases)
    return times
