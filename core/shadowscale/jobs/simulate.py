"""A synthetic system with known truth: photometry, velocities, and what is behind them.

The noise is drawn from one generator, seeded by the description, so that a description always
gives the same files.
"""

from __future__ import annotations

import csv
import json
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from io import StringIO
from math import isfinite
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from shadowscale._version import __version__
from shadowscale.errors import InputError, Problem
from shadowscale.fit.system import System
from shadowscale.jobs.invented import invented_system
from shadowscale.jobs.results import check_paths, not_writable
from shadowscale.jobs.spec import Noise, PhotometrySpec, Run, Spec, VelocitySource, VelocitySpec
from shadowscale.quantities import quantity_of
from shadowscale.session.atomic import write_text

Floats = NDArray[np.float64]
DAY = 86400.0  # [s]
HOUR = 1 / 24  # [d]
FLAG = 4  # what the column of quality holds for a spoilt point
MOST_POINTS = 5_000_000
IMPLIED = {"MJD": 2400000.5, "BTJD": 2457000.0, "BKJD": 2454833.0}  # offsets in a name [d]
TIME_DIGITS = 6  # decimals of printed times [d]


@dataclass(frozen=True)
class Simulation:
    """Names of files with their texts; the truth is one of them."""

    texts: dict[str, str]


@dataclass(frozen=True, eq=False)
class _Light:
    """Simulated light of one run and band."""

    band: str
    time: Floats
    value: Floats
    error: Floats
    flag: NDArray[np.int64]


def simulate(spec: Spec, *, path: Path = Path("spec")) -> Simulation:
    """Photometry, velocities and truth of a description.

    Parameters
    ----------
    spec : Spec
    path : Path
        Where the description was read from, for messages.

    Raises
    ------
    InputError
        The description is incomplete or impossible.
    """
    system = invented_system(spec, path)
    _check(spec, system, path)
    random = np.random.default_rng(spec.seed)
    lights = list(_lights(spec, system, random))
    texts = _photometry_files(spec.photometry, lights, two_bands=len(spec.bands) > 1)
    if spec.velocities is not None:
        texts["velocities.csv"] = _velocity_file(spec.velocities, system, random)
    texts["truth.json"] = _truth(spec, system)
    return Simulation(texts)


def write_simulation(
    simulation: Simulation, folder: Path, *, overwrite: bool = False, spec: Path | None = None
) -> tuple[Path, ...]:
    """Write the files of a simulation; what was written.

    Raises
    ------
    UsageError
        A file is there already and `overwrite` is False, or the folder cannot be written.
    """
    paths = [folder / name for name in simulation.texts]
    check_paths(paths, inputs=[] if spec is None else [spec], overwrite=overwrite)
    try:
        for path, text in zip(paths, simulation.texts.values()):
            write_text(path, text)
    except OSError as error:
        raise not_writable(folder, error) from error
    return tuple(paths)


def _check(spec: Spec, system: System, path: Path) -> None:
    """What the types of the description cannot say."""
    light, problems = spec.photometry, []

    def wrong(place: str, expected: str, found: object) -> None:
        problems.append(Problem(str(path), expected, str(found), column=place))

    if light.kind not in ("magnitude", "flux"):
        wrong("photometry.kind", "magnitude or flux", repr(light.kind))
    if light.files not in ("one", "band"):
        wrong("photometry.files", "one or band", repr(light.files))
    if spec.exposure < 0:
        wrong("exposure", "seconds, 0 or more", spec.exposure)
    for number, run in enumerate(light.runs):
        place = f"photometry.runs[{number}]"
        if not (run.cadence > 0 and run.hours > 0 and run.repeat > 0):
            wrong(place, "hours, cadence and repeat above 0", "one that is not")
        wrong_bands = [band for band in run.bands if band not in spec.bands]
        if wrong_bands:
            wrong(f"{place}.bands", f"bands of {', '.join(spec.bands)}", wrong_bands[0])
    noise = light.noise
    if noise.scatter <= 0 or noise.red < 0 or noise.red_time <= 0:
        wrong("photometry.noise", "scatter and red_time above 0, red 0 or more", "one that is not")
    if not (0 <= noise.outliers < 1 and 0 <= noise.flagged < 1):
        wrong("photometry.noise", "fractions from 0 to 1", "one that is not")
    if not problems and _points(spec) > MOST_POINTS:
        wrong("photometry.runs", f"at most {MOST_POINTS} points", _points(spec))
    if spec.velocities is not None:
        _check_velocities(spec.velocities, system, wrong)
    if problems:
        raise InputError(*problems)


def _check_velocities(spec: VelocitySpec, system: System, wrong: Any) -> None:
    for number, source in enumerate(spec.sources):
        place = f"velocities.sources[{number}]"
        if source.stars not in (1, 2):
            wrong(f"{place}.stars", "1 or 2", source.stars)
        if source.number < 1 or source.error1 <= 0 or source.error2 <= 0:
            wrong(place, "number and errors above 0", "one that is not")
        for star in range(1, source.stars + 1):
            if not system.has(f"K{star}"):
                wrong("system", f"a value for 'K{star}', since {source.name} measures it", "none")
    if not spec.end > spec.start:
        wrong("velocities.end", f"a date after {spec.start:g}", f"{spec.end:g}")


def _points(spec: Spec) -> float:
    bands = len(spec.bands)
    return sum(
        run.repeat * run.hours * 3600 / run.cadence * (len(run.bands) or bands)
        for run in spec.photometry.runs
    )


def _lights(spec: Spec, system: System, random: np.random.Generator) -> Iterator[_Light]:
    """The light of every run and band."""
    for run in spec.photometry.runs:
        for night in range(run.repeat):
            for number, band in enumerate(run.bands or tuple(spec.bands)):
                # bands take turns within a cadence
                shift = run.cadence / DAY * number / len(run.bands or spec.bands)
                time = _times(run, night) + shift
                if time.size:
                    yield _light(spec, system, band, time=time, random=random)


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
) -> _Light:
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
    return _Light(band, time, value, error * spec.photometry.error_factor, flag)


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


def _photometry_files(
    spec: PhotometrySpec, lights: Sequence[_Light], *, two_bands: bool
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


def _photometry_text(spec: PhotometrySpec, lights: Sequence[_Light], *, with_band: bool) -> str:
    names = ("mag", "mag_err") if spec.kind == "magnitude" else ("flux", "flux_err")
    places = 5 if spec.kind == "magnitude" else 7
    header = [_time_name(spec.time_scale, spec.time_offset), names[0]]
    header += [names[1]] if spec.errors else []
    header += ["band"] if with_band else []
    header += ["quality"] if spec.noise.flagged > 0 else []
    rows = []
    for light in lights:
        for time, value, error, flag in zip(light.time, light.value, light.error, light.flag):
            row = [f"{time - spec.time_offset:.{TIME_DIGITS}f}", f"{value:.{places}f}"]
            row += [f"{error:.{places}f}"] if spec.errors else []
            row += [light.band] if with_band else []
            row += [str(flag)] if spec.noise.flagged > 0 else []
            rows.append((time, row))
    rows.sort(key=lambda item: item[0])
    return _csv(header, [row for _, row in rows])


def _velocity_file(spec: VelocitySpec, system: System, random: np.random.Generator) -> str:
    """All sources in one file, in time order; an empty cell where a star was not measured."""
    header = [_time_name(spec.time_scale, spec.time_offset)]
    header += ["rv1", "rv1_err", "rv2", "rv2_err", "source"]
    rows: list[tuple[float, list[str]]] = []
    for source in spec.sources:
        rows += _source_rows(spec, source, system, random)
    rows.sort(key=lambda item: item[0])
    return _csv(header, [row for _, row in rows])


def _source_rows(
    spec: VelocitySpec, source: VelocitySource, system: System, random: np.random.Generator
) -> list[tuple[float, list[str]]]:
    from shadowscale.fit.model import model_velocities

    time = _velocity_times(spec, source, system, random)
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
        (when, [f"{when - spec.time_offset:.{TIME_DIGITS}f}", *one, *two, source.name])
        for when, one, two in zip(time.tolist(), *cells)
    ]


def _velocity_times(
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


def _time_name(scale: str, offset: float) -> str:
    """The header of the times; an offset is said unless the name implies it."""
    if not offset or IMPLIED.get(scale) == offset:
        return scale
    return f"{scale}-{offset:.15g}"


def _csv(header: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    text = StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    return text.getvalue()


def _truth(spec: Spec, system: System) -> str:
    """Every basic and derived quantity, with units."""
    from shadowscale.fit.derived import derived_values

    values = {**system.values, **derived_values(system)}
    if spec.velocities is not None:
        values |= _offsets(spec.velocities)
    found = {name: value for name, value in values.items() if isfinite(value)}
    document = {
        "schema": 1,
        "program": f"shadowscale {__version__}",
        "name": spec.name,
        "seed": spec.seed,
        "law": spec.law,
        "exposure": spec.exposure,
        "light_time": spec.light_time,
        "values": found,
        "units": {name: quantity_of(name).unit for name in found},
    }
    return json.dumps(document, indent=1, allow_nan=False) + "\n"


def _offsets(spec: VelocitySpec) -> dict[str, float]:
    """Offsets of later sources against the first."""
    first = spec.sources[0]
    return {
        f"offset{star}[{source.name}]": getattr(source, f"offset{star}")
        - getattr(first, f"offset{star}")
        for source in spec.sources[1:]
        for star in range(1, source.stars + 1)
    }
