"""Simulated pairs that are really solved: one without fault, and others each with a fault of its own."""

from __future__ import annotations

import tempfile
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from functools import cache
from pathlib import Path

import numpy as np

from made_up_judge import Case
from shadowscale.data import read_photometry, read_velocities
from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solve import solve
from shadowscale.jobs.simulate import simulate, write_simulation
from shadowscale.jobs.spec import (
    BandSpec,
    Noise,
    PhotometrySpec,
    Run,
    Spec,
    VelocitySource,
    VelocitySpec,
)

PERIOD, EPOCH = 2.4371926, 2459000.3127
LIMB1, LIMB2 = (0.62, 0.55), (0.68, 0.60)
SYSTEM: Mapping[str, float] = {
    "period": PERIOD, "epoch": EPOCH, "r1": 0.151, "r2": 0.118, "inclination": 88.2,
    "ecosw": 0.0, "esinw": 0.0, "K1": 98.4, "K2": 112.9, "gamma1": -14.2, "gamma2": -14.2,
}  # fmt: skip


@dataclass(frozen=True)
class Pair:
    """What differs from the pair without fault.

    hidden : phases that are taken out of the photometry; quadratures : whether velocities there are kept.
    """

    system: Mapping[str, float] = field(default_factory=dict)
    band: Mapping[str, object] = field(default_factory=dict)
    noise: Noise = field(default_factory=lambda: Noise(0.003))
    nights: int = 20
    cadence: float = 900.0
    error_factor: float = 1.0
    velocities: int = 0
    plan: Plan = field(default_factory=lambda: ephemeris())
    hidden: tuple[float, float] | None = None
    quadratures: bool = True


def ephemeris(**wishes: object) -> Plan:
    """Wishes with the true ephemeris to start from."""
    return replace(Plan(period=PERIOD, epoch=EPOCH), **wishes)  # type: ignore[arg-type]


TIDES = {"ellipsoidal1": 0.0041, "ellipsoidal2": 0.0026}
PAIRS: Mapping[str, Pair] = {
    "good": Pair(
        band=TIDES,
        nights=30,
        velocities=18,
        plan=ephemeris(effects={"ellipsoidal": "predicted"}, fixed={"third_light": (0.0,)}),
    ),
    "contact": Pair(system={"r1": 0.42, "r2": 0.34, "inclination": 80.0}, velocities=18),
    "grazing": Pair(system={"inclination": 80.5}, noise=Noise(0.006), nights=30, velocities=12),
    "larger companion": Pair(
        system={"r1": 0.13, "r2": 0.15, "inclination": 84.0},
        velocities=18,
        plan=ephemeris(fixed={"third_light": (0.0,)}),
    ),
    "held circular": Pair(
        system={"ecosw": 0.004, "esinw": 0.01}, nights=30, plan=ephemeris(orbit="circular")
    ),
    "needlessly eccentric": Pair(nights=16, plan=ephemeris(orbit="eccentric")),
    "equal": Pair(
        system={"r1": 0.13, "r2": 0.13, "inclination": 87.0},
        band={"surface_brightness_ratio": 1.0, "limb_darkening2": LIMB1},
    ),
    "restless": Pair(
        noise=Noise(0.001, red=0.004, red_time=0.5), cadence=300.0, nights=24, error_factor=0.3
    ),
    "cloudy": Pair(noise=Noise(0.003, night_offset=0.2)),
    "blended": Pair(
        system={"r1": 0.16, "r2": 0.08, "inclination": 86.0},
        band={"third_light": 0.1},
        noise=Noise(0.001),
        plan=ephemeris(fixed={"limb_darkening1": LIMB1, "limb_darkening2": LIMB2}),
    ),
    "too deep": Pair(
        band={"third_light": -0.2},
        plan=ephemeris(fixed={"limb_darkening1": LIMB1, "limb_darkening2": LIMB2}),
    ),
    "edge on": Pair(system={"inclination": 90.0}),
    "tiny and heavy": Pair(
        system={"r1": 0.02, "r2": 0.015, "inclination": 89.9, "K1": 984.0, "K2": 1129.0},
        nights=60,
        cadence=400.0,
        velocities=12,
    ),
    "sparse": Pair(noise=Noise(0.03), nights=18, cadence=7200.0),
    "half seen": Pair(hidden=(0.0, 0.05), velocities=18, quadratures=False),
    "black limb": Pair(plan=ephemeris(fixed={"limb_darkening1": (1.3, 0.5)})),
}  # fmt: skip


@cache
def solved(name: str) -> Case:
    """A pair, simulated, read and solved."""
    pair = PAIRS[name]
    photometry, velocities = _tables(pair)
    return Case(solve(photometry, velocities, pair.plan), photometry, velocities)


def _tables(pair: Pair) -> tuple[Photometry, Velocities | None]:
    simulation = simulate(_spec(pair))
    with tempfile.TemporaryDirectory() as folder:
        write_simulation(simulation, Path(folder))
        names = sorted(simulation.texts)
        light = [Path(folder) / name for name in names if name.startswith("photometry")]
        photometry = read_photometry(light)
        velocities = read_velocities([Path(folder) / "velocities.csv"]) if pair.velocities else None
    return _hidden(pair, photometry), _chosen(pair, velocities)


def _spec(pair: Pair) -> Spec:
    band = {
        "surface_brightness_ratio": 0.62,
        "limb_darkening1": LIMB1,
        "limb_darkening2": LIMB2,
    } | dict(pair.band)
    system = dict(SYSTEM) | dict(pair.system)
    source = VelocitySource("north", pair.velocities, 0.8, 0.8)
    return Spec(
        system=system,
        bands={"V": BandSpec(**band)},  # type: ignore[arg-type]
        photometry=PhotometrySpec(
            (Run(EPOCH - 0.25, 7.2, pair.cadence, pair.nights),),
            pair.noise,
            error_factor=pair.error_factor,
        ),
        velocities=VelocitySpec(EPOCH + 1, EPOCH + 60, (source,)) if pair.velocities else None,
        seed=1,
    )


def _hidden(pair: Pair, photometry: Photometry) -> Photometry:
    if pair.hidden is None:
        return photometry
    phase = np.mod((photometry.time - EPOCH) / PERIOD, 1.0)
    low, high = pair.hidden
    return photometry.excluded((phase > low) & (phase < high), "taken out")


def _chosen(pair: Pair, velocities: Velocities | None) -> Velocities | None:
    if velocities is None or pair.quadratures:
        return velocities
    far = np.abs(np.sin(2 * np.pi * (velocities.time - EPOCH) / PERIOD)) > 0.6
    return velocities.excluded(1, far, "taken out").excluded(2, far, "taken out")
