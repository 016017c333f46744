"""Invented systems, tables made of them without any file, and a light curve that is not the engine's.

`outside_light` puts two light curves of batman-package together (Kreidberg 2015, PASP 127, 1161: a
limb-darkened sphere behind a dark one); orbits and velocities are solved here with scipy.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cache
from math import atan2, degrees, hypot, pi, radians, sin, sqrt

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import newton

from shadowscale.data.photometry import InputFile, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.model import model_light, model_velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Estimate, Solution
from shadowscale.fit.solve import solve
from shadowscale.fit.system import System
from shadowscale.quantities import Key, key

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

PERIOD, EPOCH = 2.4371926, 2459000.3127
DIGEST = "0123456789abcdef" * 4
POWER2 = (0.62, 0.55), (0.68, 0.60)
QUADRATIC = (0.40, 0.26), (0.46, 0.22)
GEOMETRY: Mapping[str, float] = {
    "period": PERIOD, "epoch": EPOCH, "radius_sum": 0.27, "radius_ratio": 0.78,
    "inclination": 88.2, "ecosw": 0.0, "esinw": 0.0,
}  # fmt: skip
ORBITS: Mapping[str, float] = {"K1": 98.4, "K2": 112.9, "gamma1": -14.2, "gamma2": -14.2}


def invented(
    *,
    law: str = "power-2",
    limb: Sequence[Sequence[float]] = POWER2,
    bands: Mapping[str, float] | None = None,
    third: float = 0.0,
    velocities: bool = True,
    exposure: float = 0.0,
    light_time: bool = False,
    effects: Mapping[str, float] | None = None,
    **changes: float,
) -> System:
    """A system by the register's names; `bands` gives each its surface-brightness ratio."""
    values = dict(GEOMETRY) | (dict(ORBITS) if velocities else {}) | changes
    bands = {"V": 0.62} if bands is None else bands
    for band, brightness in bands.items():
        values[key("surface_brightness_ratio", band)] = brightness
        values[key("third_light", band)] = third
        for star in (1, 2):
            for number, value in enumerate(limb[star - 1], 1):
                values[str(Key(f"limb_darkening{star}", band, number))] = value
        for name, amplitude in (effects or {}).items():
            values[key(name, band)] = amplitude
    used = {name.rstrip("12") for name in effects or {}}
    return System(
        values=values, free=(), law=law, bands=tuple(bands), exposure=exposure,
        effects=dict.fromkeys(used, "predicted"), light_time=light_time,
    )  # fmt: skip


# ---------------------------------------------------------------- tables


def photometry_of(
    time: ArrayLike,
    flux: ArrayLike,
    error: ArrayLike,
    *,
    band: Ints | None = None,
    night: Ints | None = None,
    bands: tuple[str, ...] = ("V",),
    from_scatter: bool = False,
) -> Photometry:
    """A table of photometry in time order, every row used; a night a day where none are given."""
    time, flux = np.asarray(time, dtype=np.float64), np.asarray(flux, dtype=np.float64)
    error = np.broadcast_to(np.asarray(error, dtype=np.float64), time.shape)
    band = np.zeros(time.size, dtype=np.int64) if band is None else band
    if night is None:
        days = np.floor(time - EPOCH)
        night = np.unique(days, return_inverse=True)[1].astype(np.int64)
    order = np.argsort(time, kind="stable")
    count = time.size
    return Photometry(
        time=time[order], flux=flux[order], flux_error=np.array(error[order]), band=band[order],
        night=night[order], file=np.zeros(count, dtype=np.int64),
        line=np.arange(count, dtype=np.int64) + 1, value=flux[order], value_error=error[order],
        why=np.zeros(count, dtype=np.int64), bands=bands,
        files=(InputFile("made.csv", DIGEST, count, count),), time_scale="BJD_TDB",
        errors_from_scatter=(from_scatter,) * len(bands),
    )  # fmt: skip


def phases_of(count: int, *, wide: float = 0.06, middles: Sequence[float] = (0.0, 0.5)) -> Floats:
    """`count` phases: four fifths close to the eclipses, the rest all around."""
    inside = count * 4 // 5 // len(middles)
    near = [middle + np.linspace(-wide, wide, inside) for middle in middles]
    around = np.linspace(0.03, 0.97, count - inside * len(middles))
    return np.concatenate([*near, around])


def times_of(
    system: System, count: int, *, cycles: int = 40, seed: int = 3, **form: object
) -> Floats:
    """Times of a light curve well spread over the eclipses and over `cycles` turns."""
    random = np.random.default_rng(seed)
    turns = random.integers(0, cycles, count)
    phases = phases_of(count, **form)  # type: ignore[arg-type]
    return system.value("epoch") + (turns + phases) * system.value("period")


def observed(
    system: System, *, count: int = 700, sigma: float = 1e-3, seed: int = 1, **form: object
) -> Photometry:
    """Noisy light of all bands of a system, `count` points each."""
    random = np.random.default_rng(seed)
    times, fluxes, bands = [], [], []
    for number, name in enumerate(system.bands):
        time = times_of(system, count, seed=seed + 10 + number, **form)  # type: ignore[arg-type]
        times.append(time)
        fluxes.append(model_light(system, name, time) + sigma * random.standard_normal(count))
        bands.append(np.full(count, number, dtype=np.int64))
    return photometry_of(
        np.concatenate(times), np.concatenate(fluxes), sigma, band=np.concatenate(bands),
        bands=system.bands,
    )  # fmt: skip


def velocities_of(
    time: ArrayLike,
    rv1: ArrayLike,
    rv2: ArrayLike | None,
    error: float,
    *,
    source: Ints | None = None,
    sources: tuple[str, ...] = ("north",),
    from_scatter: bool = False,
) -> Velocities:
    """A table of velocities; None for star 2: it was not measured."""
    time, rv1 = np.asarray(time, dtype=np.float64), np.asarray(rv1, dtype=np.float64)
    count = time.size
    second = np.full(count, np.nan) if rv2 is None else np.asarray(rv2, dtype=np.float64)
    missing = np.isnan(second)
    return Velocities(
        time=time, rv1=rv1, rv1_error=np.full(count, error), rv2=second,
        rv2_error=np.where(missing, np.nan, error),
        source=np.zeros(count, dtype=np.int64) if source is None else source,
        file=np.zeros(count, dtype=np.int64), line=np.arange(count, dtype=np.int64) + 1,
        why1=np.zeros(count, dtype=np.int64), why2=missing.astype(np.int64), sources=sources,
        files=(InputFile("made_rv.csv", DIGEST, count, count),), time_scale="BJD_TDB",
        errors_from_scatter=from_scatter,
    )  # fmt: skip


def observed_velocities(
    system: System,
    *,
    count: int = 20,
    sigma: float = 0.5,
    seed: int = 2,
    stars: int = 2,
    offsets: Mapping[str, float] | None = None,
) -> Velocities:
    """Noisy velocities at even phases in changing cycles; a source after another where offsets are given."""
    random = np.random.default_rng(seed)
    turns = random.integers(0, 30, count)
    time = system.value("epoch") + (turns + (np.arange(count) + 0.4) / count) * system.value(
        "period"
    )
    time = np.sort(time)
    offsets = {"north": 0.0} if offsets is None else offsets
    source = (np.arange(count) % len(offsets)).astype(np.int64)
    added = np.array(list(offsets.values()))[source]
    curves = [
        model_velocities(system, star, time) + added + sigma * random.standard_normal(count)
        for star in range(1, stars + 1)
    ]
    return velocities_of(
        time, curves[0], curves[1] if stars == 2 else None, sigma, source=source,
        sources=tuple(offsets),
    )  # fmt: skip


# ---------------------------------------------------------------- answers


def ephemeris(**wishes: object) -> Plan:
    """Wishes with the true ephemeris to start from."""
    return replace(Plan(period=PERIOD, epoch=EPOCH), **wishes)  # type: ignore[arg-type]


@dataclass(frozen=True, eq=False)
class Solved:
    """What was invented, what was made of it, and what the engine says."""

    truth: System
    photometry: Photometry
    velocities: Velocities | None
    solution: Solution

    def pull(self, name: str, true: float | None = None) -> float:
        """(found - true)/sigma of a quantity that has an error."""
        true = self.truth.values[name] if true is None else true
        found = self.solution.estimates[name]
        return (found.value - true) / sigma_of(found)


def sigma_of(estimate: Estimate) -> float:
    """The mean of both limits."""
    assert estimate.minus is not None
    assert estimate.plus is not None
    return (estimate.minus + estimate.plus) / 2


def solved(
    truth: System,
    plan: Plan | None = None,
    *,
    photometry: Photometry | None = None,
    velocities: Velocities | None = None,
) -> Solved:
    """Solve a system's light, made where it is not given."""
    photometry = observed(truth) if photometry is None else photometry
    found = solve(photometry, velocities, ephemeris() if plan is None else plan)
    return Solved(truth, photometry, velocities, found)


@cache
def ordinary() -> Solved:
    """Two stars in one band with the velocities of both: total and annular, circular, no third light."""
    truth = invented(light_time=True)  # as the engine takes it where both stars were measured
    return solved(truth, velocities=observed_velocities(truth))


# ---------------------------------------------------------------- truths from outside


def eccentricity_of(system: System) -> tuple[float, float]:
    """e, and omega of star 1 [degrees]."""
    k, h = system.value("ecosw"), system.value("esinw")
    return hypot(k, h), degrees(atan2(h, k))


def mean_anomaly(true_anomaly: float, e: float) -> float:
    """By way of the eccentric anomaly (textbook)."""
    half = sqrt((1 - e) / (1 + e))
    eccentric = 2 * atan2(half * sin(true_anomaly / 2), np.cos(true_anomaly / 2))
    return eccentric - e * sin(eccentric)


def true_anomaly(mean: ArrayLike, e: float) -> Floats:
    """Kepler's equation by scipy's Newton iteration on an array."""
    mean = np.asarray((np.asarray(mean, dtype=np.float64) + pi) % (2 * pi) - pi)
    eccentric = newton(
        lambda x: x - e * np.sin(x) - mean, mean + e * np.sin(mean),
        lambda x: 1 - e * np.cos(x), tol=1e-14, maxiter=100,
    )  # fmt: skip
    return np.asarray(
        2 * np.arctan2(sqrt(1 + e) * np.sin(eccentric / 2), sqrt(1 - e) * np.cos(eccentric / 2))
    )


def secondary_phase(system: System) -> float:
    """Phase of the conjunction at which star 2 is behind."""
    e, omega = eccentricity_of(system)
    w = radians(omega)
    return ((mean_anomaly(-pi / 2 - w, e) - mean_anomaly(pi / 2 - w, e)) / (2 * pi)) % 1.0


def longitude(system: System, time: ArrayLike) -> tuple[Floats, Floats]:
    """nu and nu + omega of star 1 at `time`; primary conjunction at the epoch."""
    e, omega = eccentricity_of(system)
    w = radians(omega)
    turns = (np.asarray(time, dtype=np.float64) - system.value("epoch")) / system.value("period")
    nu = true_anomaly(mean_anomaly(pi / 2 - w, e) + 2 * pi * turns, e)
    return nu, nu + w


def outside_velocity(system: System, star: int, time: ArrayLike) -> Floats:
    """gamma +- K [cos(nu + omega) + e cos omega] (textbook)."""
    _, angle = longitude(system, time)
    sign = 1 if star == 1 else -1
    shape = np.cos(angle) + system.value("ecosw")
    return np.asarray(system.value(f"gamma{star}") + sign * system.value(f"K{star}") * shape)


def _hidden(separation: Floats, ratio: float, coefficients: tuple[float, ...]) -> Floats:
    """Light lost of a star of radius 1 behind a dark one, by batman-package.

    Asked through a circular orbit seen edge on, on which the times are chosen to give the separations:
    its own solution of Kepler's equation is good to 3e-7 of the light only.
    """
    import batman

    wide = float(separation.max()) * 1.01
    wished = batman.TransitParams()
    wished.t0, wished.per, wished.ecc, wished.w, wished.inc = 0.0, 2 * pi, 0.0, 90.0, 90.0
    wished.rp, wished.a, wished.u, wished.limb_dark = ratio, wide, list(coefficients), "quadratic"
    time = np.arcsin(separation / wide)
    return np.asarray(1.0 - batman.TransitModel(wished, time).light_curve(wished))


def outside_light(system: System, band: str, time: Floats) -> Floats:
    """Light of one band by batman-package: two stars, each behind the other in turn; quadratic law."""
    nu, angle = longitude(system, time)
    e, _ = eccentricity_of(system)
    rho = (1 - e**2) / (1 + e * np.cos(nu))
    sine = sin(radians(system.value("inclination")))
    apart = rho * np.sqrt(1 - (np.sin(angle) * sine) ** 2)
    total, ratio = system.value("radius_sum"), system.value("radius_ratio")
    radii = total / (1 + ratio), total * ratio / (1 + ratio)
    is_behind = np.sin(angle) > 0, np.sin(angle) <= 0
    light, means = [], []
    for star in (0, 1):
        coefficients = system.limb_darkening(star + 1, band)
        hidden = _hidden(apart / radii[star], radii[1 - star] / radii[star], coefficients)
        light.append(1 - np.where(is_behind[star], hidden, 0.0))
        means.append(1 - coefficients[0] / 3 - coefficients[1] / 6)  # of the disc, over its centre
    light_ratio = system.value("surface_brightness_ratio", band) * ratio**2 * means[1] / means[0]
    third = system.value("third_light", band)
    return np.asarray((1 - third) * (light[0] + light_ratio * light[1]) / (1 + light_ratio) + third)
