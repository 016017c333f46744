"""Simulated photometry: when it was measured, what noise it carries, how it is printed."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.system import System
from shadowscale.jobs.printed import printed, time_name, written_time
from shadowscale.jobs.spec import Noise, PhotometrySpec, Run, Spec

Floats = NDArray[np.float64]
DAY = 86400.0  # [s]
HOUR = 1 / 24  # [d]
FLAG = 4  # what the column of quality holds for a spoilt point


@dataclass(frozen=True, eq=False)
class SimulatedLight:
    """Simulated light of one run and band."""

    band: str
    time: Floats
    value: Floats
    error: Floats
    flag: NDArray[np.int64]


def simulated_light(
    spec: Spec, system: System, random: np.random.Generator
) -> Iterator[SimulatedLight]:
    """The light of every run and band."""
    for run in spec.photometry.runs:
        for night in range(run.repeat):
            for number, band in enumerate(run.bands or tuple(spec.bands)):
                # bands take turns within a cadence
                shift = run.cadence / DAY * number / len(run.bands or spec.bands)
                time = _times(run, night) + shift
                if time.size:
                    yield _light(spec, system, band, time=time, random=random)


def photometry_files(
    spec: PhotometrySpec, lights: Sequence[SimulatedLight], *, two_bands: bool
) -> dict[str, str]:
    """One file, or one a band, in time order."""
    if spec.files == "one":
        return {"photometry.csv": _photometry_text(spec, lights, with_band=two_bands)}
    bands = dict.fromkeys(light.band for light in lights)
    return {
        f"photometry_{band}.csv": _photometry_text(
            spec, [light for light in lights if light.band == band], with_band=True
        )
        for band in bands
    }


def _times(run: Run, night: int) -> Floats:
    """Times of one night of a run, without its gaps."""
    count = int(run.hours * 3600 / run.cadence) + 1
    hours = np.arange(count) * (run.cadence / 3600)
    kept = np.ones(count, dtype=bool)
    for low, high in run.gaps:
        kept &= (hours < low) | (hours > high)
    return np.asarray(run.start + night * run.every + hours[kept] * HOUR, dtype=np.float64)


def _light(
    spec: Spec, system: System, band: str, *, time: Floats, random: np.random.Generator
) -> SimulatedLight:
    """Model and noise, in the unit that is printed."""
    from shadowscale.fit.model import model_light

    noise, item = spec.photometry.noise, spec.bands[band]
    scatter = noise.scatter if item.scatter is None else item.scatter
    flux = model_light(system, band, time)
    added, flag = _noise(noise, time, scatter=scatter, random=random)
    if spec.photometry.kind == "magnitude":
        value = np.asarray(item.magnitude - 2.5 * np.log10(flux) + added, dtype=np.float64)
        error = np.full(time.size, scatter)
    else:
        level = 10 ** (-0.4 * (item.magnitude - 12.0))
        value = level * flux * (1 + added)
        error = np.full(time.size, level * scatter)
    return SimulatedLight(band, time, value, error * spec.photometry.error_factor, flag)


def _noise(
    noise: Noise, time: Floats, *, scatter: float, random: np.random.Generator
) -> tuple[Floats, NDArray[np.int64]]:
    """What is added to each point, and the flags of spoilt ones."""
    size = time.size
    added = scatter * random.standard_normal(size)
    if noise.red > 0:
        added += noise.red * _red(time, noise.red_time * HOUR, random)
    level, slope = random.standard_normal(2)
    added += noise.night_offset * level + noise.night_slope * slope * (time - time.mean())
    far = scatter * noise.outlier_size
    away = random.random(size) < noise.outliers
    added[away] += far * random.choice([-1.0, 1.0], away.sum())
    spoilt = random.random(size) < noise.flagged
    added[spoilt] += far * random.standard_normal(spoilt.sum())
    return added, np.where(spoilt, FLAG, 0)


def _red(time: Floats, scale: float, random: np.random.Generator) -> Floats:
    """Exponentially correlated noise of unit variance at any spacing (exact recursion)."""
    kept = np.exp(-np.diff(time) / scale)
    fresh = random.standard_normal(time.size)
    red = np.empty(time.size)
    red[0] = fresh[0]
    for number, share in enumerate(kept, 1):
        red[number] = share * red[number - 1] + np.sqrt(1 - share**2) * fresh[number]
    return red


def _photometry_text(
    spec: PhotometrySpec, lights: Sequence[SimulatedLight], *, with_band: bool
) -> str:
    names = ("mag", "mag_err") if spec.kind == "magnitude" else ("flux", "flux_err")
    places = 5 if spec.kind == "magnitude" else 7
    header = [time_name(spec.time_scale, spec.time_offset), names[0]]
    header += [names[1]] if spec.errors else []
    header += ["band"] if with_band else []
    header += ["quality"] if spec.noise.flagged > 0 else []
    rows = []
    for light in lights:
        for time, value, error, flag in zip(light.time, light.value, light.error, light.flag):
            row = [written_time(time, spec.time_offset), f"{value:.{places}f}"]
            row += [f"{error:.{places}f}"] if spec.errors else []
            row += [light.band] if with_band else []
            row += [str(flag)] if spec.noise.flagged > 0 else []
            rows.append((time, row))
    rows.sort(key=lambda item: item[0])
    return printed(header, [row for _, row in rows])
