"""A synthetic system with known truth: photometry, velocities, and what is behind them.

The noise is drawn from one generator, seeded by the description, so that a description always
gives the same files.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from math import isfinite
from pathlib import Path
from typing import Any

import numpy as np

from shadowscale._version import __version__
from shadowscale.errors import InputError, Problem
from shadowscale.fit.system import System
from shadowscale.jobs.invented import invented_system
from shadowscale.jobs.results import check_paths, not_writable
from shadowscale.jobs.simulated_light import photometry_files, simulated_light
from shadowscale.jobs.simulated_velocities import velocity_file
from shadowscale.jobs.spec import Spec, VelocitySpec
from shadowscale.quantities import quantity_of
from shadowscale.session.atomic import write_text

MOST_POINTS = 5_000_000


@dataclass(frozen=True)
class Simulation:
    """Names of files with their texts; the truth is one of them."""

    texts: dict[str, str]


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
    lights = list(simulated_light(spec, system, random))
    texts = photometry_files(spec.photometry, lights, two_bands=len(spec.bands) > 1)
    if spec.velocities is not None:
        texts["velocities.csv"] = velocity_file(spec.velocities, system, random)
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
    if spec.seed < 0:
        wrong("seed", "a whole number, 0 or more", spec.seed)
    for band, item in spec.bands.items():
        if not item.third_light < 1:
            wrong(f"bands.{band}.third_light", "less than all of the light, 1", item.third_light)
        if not item.surface_brightness_ratio >= 0:
            found = item.surface_brightness_ratio
            wrong(f"bands.{band}.surface_brightness_ratio", "0 or more", found)
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
