"""Random detached binaries of wide variety with the light curve of some instrument."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Photometry
from simple_eclipses import (
    Blemishes,
    Floats,
    SimpleBinary,
    ground_times,
    observe,
    space_times,
    survey_times,
)

CADENCES = ("space 30 min", "space 5 min", "ground", "survey")


@dataclass(frozen=True)
class Animal:
    """A binary, its light curve, and the cadence's name."""

    binary: SimpleBinary
    photometry: Photometry
    cadence: str
    noise: float


def random_animal(rng: np.random.Generator, cadence: str) -> Animal:
    """A binary whose primary eclipse comes at least twice in the data and stands out of the noise."""
    while True:
        times, longest, noise = _plan(rng, cadence)
        binary = _random_binary(rng, times, longest)
        if binary is not None and _observable(
            binary, times, noise, fewest=3 if cadence == "survey" else 2
        ):
            marks = _blemishes(rng, cadence)
            photometry = observe(binary, times, noise, rng, blemishes=marks)
            return Animal(binary, photometry, cadence, noise)


def _plan(rng: np.random.Generator, cadence: str) -> tuple[Floats, float, float]:
    if cadence == "space 30 min":
        return space_times(rng), 18.0, 10 ** rng.uniform(-3.7, -2.3)
    if cadence == "space 5 min":
        return space_times(rng, step=5 / 1440), 18.0, 10 ** rng.uniform(-3.3, -2.0)
    if cadence == "ground":
        nights = int(rng.integers(12, 40))
        times = ground_times(rng, nights=nights, season=90.0, step=6 / 1440)
        return times, 8.0, 10 ** rng.uniform(-2.6, -2.0)
    return survey_times(rng, points=900), 10.0, 10 ** rng.uniform(-2.3, -1.8)


def _blemishes(rng: np.random.Generator, cadence: str) -> Blemishes:
    return Blemishes(
        outliers=float(rng.choice([0.0, 0.003])),
        spots=float(rng.choice([0.0, 0.003])) if cadence.startswith("space") else 0.0,
        night_offsets=float(rng.choice([0.0, 0.003])) if cadence == "ground" else 0.0,
        exposure=1 / 48 if cadence == "space 30 min" else 0.0,
    )


def _random_binary(rng: np.random.Generator, times: Floats, longest: float) -> SimpleBinary | None:
    period = float(np.exp(rng.uniform(np.log(0.25), np.log(longest))))
    total = min(0.42, 0.35 * period ** (-2 / 3) * 10 ** rng.uniform(-0.25, 0.25))
    k = float(10 ** rng.uniform(-1, 0.48))
    r1 = total / (1 + k)
    e = float(rng.uniform(0, 0.6)) if period > 2 and rng.uniform() < 0.6 else 0.0
    if total > 0.8 * (1 - e):
        return None
    impact = rng.uniform(0, 0.85) * total
    return SimpleBinary(
        period=period,
        epoch=float(times[0] + rng.uniform(0, period)),
        r1=r1,
        k=k,
        inclination=float(np.degrees(np.arccos(impact))),
        eccentricity=e,
        omega=float(rng.uniform(0, 360)),
        brightness=(float(rng.choice([1.0, rng.uniform(0.02, 1.2)])),),
        third=float(rng.choice([0.0, rng.uniform(0, 0.4)])),
    )


def _observable(binary: SimpleBinary, times: Floats, noise: float, *, fewest: int) -> bool:
    """Whether the deeper eclipse comes in enough cycles, and stands out; at least 1 % deep."""
    depths = [binary.depths(1), binary.depths(2)]
    which = int(np.argmax(depths)) + 1
    depth = max(depths)
    if depth < 0.01:
        return False
    contacts = binary.contacts(which)
    phase = (times - binary.epoch) / binary.period
    away = phase - (contacts[0] + contacts[-1]) / 2
    inside = np.abs(away - np.round(away)) < 0.3 * (contacts[-1] - contacts[0])
    count = np.unique(np.round(away[inside]), return_counts=True)[1]
    enough = 1 if times.size < 1000 else 3
    good = count >= enough
    return bool(good.sum() >= fewest and depth * np.sqrt(inside.sum()) > 12 * noise)


def right_period(animal: Animal, period: float) -> bool:
    """Whether eclipses stay in phase to a quarter of the eclipse through the whole data."""
    binary, time = animal.binary, animal.photometry.time
    contacts = binary.contacts(1) or binary.contacts(2)
    drift = abs(period / binary.period - 1) * (time[-1] - time[0]) / binary.period
    return bool(drift < 0.25 * (contacts[-1] - contacts[0]))
