"""The description of a system to simulate: a TOML or JSON file, checked key by key.

Stars and orbit are told in the register's names; a few are taken in either of two forms (`r1`, `r2`
for `radius_sum`, `radius_ratio`; `eccentricity`, `omega` for `ecosw`, `esinw`; `M1`, `M2` or `K1`,
`mass_ratio` for `K1`, `K2`).
"""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from shadowscale.errors import InputError, Problem
from shadowscale.session.plain import PlainError, from_plain

_PLACE = re.compile(r"\(at line (\d+), column (\d+)\)")


@dataclass(frozen=True)
class BandSpec:
    """One band: light and limb darkening of the stars, small effects as amplitudes."""

    surface_brightness_ratio: float
    limb_darkening1: tuple[float, ...]
    limb_darkening2: tuple[float, ...]
    third_light: float = 0.0
    ellipsoidal1: float = 0.0
    ellipsoidal2: float = 0.0
    reflection1: float = 0.0
    reflection2: float = 0.0
    beaming1: float = 0.0
    beaming2: float = 0.0
    magnitude: float = 12.0  # outside eclipse
    scatter: float | None = None  # in place of the noise's


@dataclass(frozen=True)
class Run:
    """An unbroken stretch of observing, or a row of such nights.

    start : float [d], hours : length [h], cadence : [s]; `repeat` nights, `every` so many days;
    gaps : spans [h] from the start without data; bands : those observed, all where empty.
    """

    start: float
    hours: float
    cadence: float
    repeat: int = 1
    every: float = 1.0
    gaps: tuple[tuple[float, float], ...] = ()
    bands: tuple[str, ...] = ()


@dataclass(frozen=True)
class Noise:
    """What is added to the light: in magnitudes, or relative to the flux where flux is printed.

    scatter : white, a point; red, red_time [h] : exponentially correlated within a run;
    night_offset, night_slope [1/d] : level and slope of each run and band, sigma;
    outliers : fraction of points, `outlier_size` times the scatter away; flagged : fraction of
    points spoilt and marked in a column of quality.
    """

    scatter: float = 0.005
    red: float = 0.0
    red_time: float = 1.0
    night_offset: float = 0.0
    night_slope: float = 0.0
    outliers: float = 0.0
    outlier_size: float = 15.0
    flagged: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Clock:
    """How times are printed: their scale, and what is taken off them [d]."""

    time_scale: str = "BJD_TDB"
    time_offset: float = 0.0


@dataclass(frozen=True)
class PhotometrySpec(Clock):
    """When light was measured and how it is printed.

    kind : `magnitude` or `flux`; errors : whether they are printed, times `error_factor`;
    files : `one`, or one for each `band`.
    """

    runs: tuple[Run, ...]
    noise: Noise = field(default_factory=Noise)
    kind: str = "magnitude"
    errors: bool = True
    error_factor: float = 1.0
    files: str = "one"


@dataclass(frozen=True)
class VelocitySource:
    """A spectrograph: how many spectra, errors and offsets of either star [km/s], stars seen."""

    name: str
    number: int
    error1: float = 0.5
    error2: float = 0.5
    offset1: float = 0.0
    offset2: float = 0.0
    stars: int = 2


@dataclass(frozen=True)
class VelocitySpec(Clock):
    """When velocities were measured: spread over phases, between two dates [d]."""

    start: float
    end: float
    sources: tuple[VelocitySource, ...]


@dataclass(frozen=True)
class Spec:
    """A system and its observations.

    exposure : float [s]; light_time : whether the stars are seen where their own light left them.
    """

    system: Mapping[str, float]
    bands: Mapping[str, BandSpec]
    photometry: PhotometrySpec
    velocities: VelocitySpec | None = None
    name: str = ""
    seed: int = 0
    law: str = "power-2"
    exposure: float = 0.0
    light_time: bool = False


def read_spec(path: Path) -> Spec:
    """Read a description; what is not known in it is an error with the nearest name.

    Raises
    ------
    InputError
        With file, line or key, what was expected, what was found.
    """
    try:
        return from_plain(Spec, _document(path), where="spec")
    except PlainError as error:
        place = error.where.removeprefix("spec.").removeprefix("spec")
        problem = Problem(str(path), error.expected, error.found, column=place or None)
        raise InputError(problem) from error


def _document(path: Path) -> dict[str, Any]:
    try:
        text = path.read_text(encoding="utf-8")
        found: dict[str, Any] = json.loads(text) if _is_json(path, text) else tomllib.loads(text)
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise InputError(Problem(str(path), "a description of a system", reason)) from error
    except json.JSONDecodeError as error:
        raise InputError(
            Problem(str(path), "JSON", error.msg, line=error.lineno, column=str(error.colno))
        ) from error
    except tomllib.TOMLDecodeError as error:
        raise InputError(_toml_problem(path, str(error), lines=text.count("\n") + 1)) from error
    except (UnicodeDecodeError, RecursionError, ValueError) as error:
        raise InputError(Problem(str(path), "TOML or JSON text", str(error))) from error
    return found


def _is_json(path: Path, text: str) -> bool:
    return path.suffix.lower() == ".json" or text.lstrip().startswith("{")


def _toml_problem(path: Path, message: str, *, lines: int) -> Problem:
    """Where the reader of TOML stumbled; at the end where it names no place."""
    match = _PLACE.search(message)
    words = re.sub(r"\s*\(at .*\)$", "", message)
    if match is None:
        return Problem(str(path), "TOML", words, line=lines)
    return Problem(str(path), "TOML", words, line=int(match[1]), column=match[2])
