"""The level of the light in each band, errors from its scatter, and the numbering of nights."""

from __future__ import annotations

from dataclasses import dataclass
from math import log, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats, Ints
from shadowscale.errors import Problem, TableError

NIGHT_GAP = 0.3  # [d] no night of one site is interrupted that long and goes on
SPACINGS = 20.0  # a gap is also longer than this many usual spacings, for slow series
UNLIKE = 2.0  # files whose levels differ by more than this factor are scaled one by one
FEWEST_ERRORS = 0.5  # share of rows with an error below which all are estimated
MAD_TO_SIGMA = 1.482602218505602  # of a Gaussian: 1 / Phi^-1(3/4)
FLOOR = 1e-7  # relative error where the scatter is nought
MAG = 0.4 * log(10.0)
SQRT2 = sqrt(2.0)

Bools = NDArray[np.bool_]


@dataclass(frozen=True, eq=False)
class Errors:
    """Errors of the flux, which of them are usable, and in which bands any were estimated."""

    error: Floats
    usable: Bools
    estimated: dict[int, bool]


def scaled(
    linear: Floats,
    error: Floats,
    *,
    band: Ints,
    file: Ints,
    used: Bools,
    bands: tuple[str, ...],
    magnitudes: Bools,
    paths: tuple[str, ...],
) -> tuple[Floats, Floats, list[str]]:
    """Flux and its error with each band's median at 1, and a note on each factor.

    Parameters
    ----------
    linear, error : (n,) float64
        Magnitudes [mag] in the files where `magnitudes`, else flux.
    band, file : (n,) int64
    used : (n,) bool
        Rows that count for the median.
    magnitudes : (number of files,) bool
    """
    flux, flux_error = np.full(len(linear), np.nan), np.full(len(linear), np.nan)
    notes = []
    for number, name in enumerate(bands):
        of_band = band == number
        for rows, files in _groups(
            linear, of_band=of_band, file=file, used=used, magnitudes=magnitudes
        ):
            is_mag = bool(magnitudes[files[0]])
            level = _level(linear[rows & used], is_mag, paths[files[0]], name)
            flux[rows], flux_error[rows] = _one_scale(
                linear[rows], error[rows], level=level, is_mag=is_mag
            )
            where = f"band {name}" + (
                f" in {paths[files[0]]}" if len(files) < len(np.unique(file[of_band])) else ""
            )
            unit = "magnitude" if is_mag else "flux"
            notes.append(f"{where}: {unit} {level:.7g} is taken as 1")
    return flux, flux_error, notes


def _groups(
    linear: Floats, *, of_band: Bools, file: Ints, used: Bools, magnitudes: Bools
) -> list[tuple[Bools, list[int]]]:
    """Rows of a band that share one scale: all of them, unless the files' levels are too unlike."""
    files = [int(k) for k in np.unique(file[of_band])]
    groups = [(of_band & (file == k), [k]) for k in files]
    if len(files) > 1:
        with_rows = [(rows, k) for rows, (k,) in groups if np.any(rows & used)]
        levels = [float(np.median(linear[rows & used])) for rows, _ in with_rows]
        kinds = {bool(magnitudes[k]) for _, k in with_rows}
        alike = len(kinds) == 1 and (not levels or _alike(levels, kinds.pop()))
        if alike:
            return [(of_band, files)]
    return groups


def _alike(levels: list[float], is_mag: bool) -> bool:
    low, high = min(levels), max(levels)
    return high - low < 2.5 * np.log10(UNLIKE) if is_mag else 0 < high < UNLIKE * low


def _level(values: Floats, is_mag: bool, path: str, band: str) -> float:
    if not len(values):
        return 0.0 if is_mag else 1.0
    level = float(np.median(values))
    if not is_mag and level <= 0:
        help = "is it a difference of magnitudes (name the column as mag), or flux in ppm (unit)?"
        raise TableError(
            Problem(path, f"flux above zero in band {band}", f"a median of {level:.6g}", help=help)
        )
    return level


def _one_scale(
    linear: Floats, error: Floats, *, level: float, is_mag: bool
) -> tuple[Floats, Floats]:
    if not is_mag:
        return linear / level, error / level
    with np.errstate(over="ignore", invalid="ignore"):
        flux = 10.0 ** (-0.4 * (linear - level))
        return flux, flux * error * MAG


def night_numbers(time: Floats, band: Ints) -> Ints:
    """Number of the night or segment of each row, from 0 in each band.

    A gap of more than 0.3 d, or of 20 times the median spacing if that is longer, starts a new one:
    nights of one site are that far apart, while a series with a point an hour or a day goes on.

    Parameters
    ----------
    time : (n,) float64 [d]
        Rising.
    band : (n,) int64
    """
    night = np.zeros(len(time), dtype=np.int64)
    for number in np.unique(band):
        rows = np.flatnonzero(band == number)
        gaps = np.diff(time[rows])
        usual = float(np.median(gaps[gaps > 0])) if np.any(gaps > 0) else 0.0
        night[rows[1:]] = np.cumsum(gaps > max(NIGHT_GAP, SPACINGS * usual))
    return night


def with_errors(
    flux: Floats, error: Floats, *, night: Ints, band: Ints, file: Ints, used: Bools
) -> Errors:
    """Errors as given, or from the scatter for a file's band where most rows have none.

    The estimate is the scatter of successive differences within nights, 1.4826 median |d| / sqrt 2,
    which neither eclipses nor slow trends nor outliers disturb much.
    """
    error = error.copy()
    given = np.isfinite(error) & (error > 0)
    estimated = {int(number): False for number in np.unique(band)}
    for number in estimated:
        for one_file in np.unique(file[band == number]):
            rows = (band == number) & (file == one_file)
            wanted = rows & used
            needed = FEWEST_ERRORS * max(int(np.count_nonzero(wanted)), 1)
            if np.count_nonzero(given & wanted) >= needed:
                continue
            error[rows] = _scatter(flux[wanted], night[wanted])
            given[rows] = True
            estimated[number] = True
    return Errors(error, given, estimated)


def _scatter(flux: Floats, night: Ints) -> float:
    steps = np.diff(flux)[np.diff(night) == 0]
    if len(steps) < 5:
        steps = np.diff(flux)
    sigma = MAD_TO_SIGMA * float(np.median(np.abs(steps))) / SQRT2 if len(steps) else 0.0
    if sigma <= 0 and len(steps):
        sigma = float(np.std(steps)) / SQRT2
    return max(sigma, FLOOR)
