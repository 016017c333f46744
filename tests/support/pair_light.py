"""Light of a pair computed point by point, without tables, grids or interpolation."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from fit_examples import invented
from shadowscale.fit.system import System
from shadowscale.light.eclipse import hidden_fraction
from shadowscale.light.laws import LAWS
from shadowscale.orbit.elements import Orbit
from shadowscale.orbit.sky import line_of_sight, sky_separation

Floats = NDArray[np.float64]

BAND = "V"
LIMB: Mapping[str, tuple[tuple[float, ...], tuple[float, ...]]] = {
    "linear": ((0.55,), (0.62,)),
    "quadratic": ((0.35, 0.22), (0.41, 0.18)),
    "square-root": ((0.21, 0.48), (0.18, 0.55)),
    "logarithmic": ((0.62, 0.21), (0.68, 0.25)),
    "power-2": ((0.64, 0.71), (0.70, 0.63)),
    "four-parameter": ((0.52, -0.05, 0.41, -0.2), (0.6, -0.1, 0.35, -0.15)),
}
PAIRS: Mapping[str, Mapping[str, float]] = {
    "total": {},
    "annular and small": {"radius_ratio": 0.08},
    "partial": {"inclination": 84.0},
    "grazing": {"inclination": 75.2},
    "larger companion": {"radius_ratio": 1.6},
    "nearly equal and central": {"radius_ratio": 0.995, "inclination": 89.9},
    "equal": {"radius_ratio": 1.0, "inclination": 87.0},
    "equal and edge on": {"radius_ratio": 1.0, "inclination": 90.0},
    "edge on": {"inclination": 90.0},
    "inner contacts touch": {"inclination": 88.0837},
    "eccentric": {"ecosw": 0.168, "esinw": 0.330, "inclination": 88.5},
    "one eclipse": {"ecosw": 0.02, "esinw": 0.45, "inclination": 79.0},
    "wide": {"radius_sum": 0.03, "inclination": 89.6},
    "nearly touching": {"radius_sum": 0.62, "inclination": 80.0},
    "very eccentric": {"ecosw": -0.5, "esinw": 0.4, "radius_sum": 0.12, "inclination": 88.0},
}


def pair(name: str = "total", law: str = "quadratic", **changes: object) -> System:
    """One of `PAIRS` without velocities, `changes` as `invented` takes them."""
    told: dict[str, object] = {"velocities": False, "third": 0.04, **PAIRS[name], **changes}
    return invented(law=law, limb=LIMB[law], **told)  # type: ignore[arg-type]


def direct_light(system: System, times: Floats, *, light_time: float = 0.0) -> Floats:
    """(n,) light at instants, the hidden fraction of each from its kernel; no small effects."""
    values, law = system.values, LAWS[system.law]
    total, ratio = values["radius_sum"], values["radius_ratio"]
    c1, c2 = (np.array(system.limb_darkening(star, BAND)) for star in (1, 2))
    light_ratio = system.value("surface_brightness_ratio", BAND) * ratio**2
    light_ratio *= float(law.mean_intensity(c2)) / float(law.mean_intensity(c1))
    orbit = Orbit(
        period=values["period"], epoch=values["epoch"], inclination=values["inclination"],
        ecosw=values["ecosw"], esinw=values["esinw"], light_time=light_time,
    )  # fmt: skip
    apart, behind = sky_separation(times, orbit), line_of_sight(times, orbit)
    r1, r2 = total / (1 + ratio), total * ratio / (1 + ratio)
    lost1 = np.where(behind < 0, hidden_fraction(apart / r1, ratio, system.law, c1), 0.0)
    lost2 = np.where(behind > 0, hidden_fraction(apart / r2, 1 / ratio, system.law, c2), 0.0)
    third = system.value("third_light", BAND)
    light = 1 - (lost1 + light_ratio * lost2) / (1 + light_ratio)
    result: Floats = (1 - third) * light + third
    return result


def dense_times(system: System, count: int = 4000) -> Floats:
    """Sorted times over a few cycles, most of them close to an eclipse of a circular orbit."""
    random = np.random.default_rng(5)
    phases = np.concatenate([
        random.uniform(-0.5, 0.5, count // 2),
        random.normal(0.0, 0.05, count // 4),
        random.normal(0.5, 0.05, count // 4),
    ])  # fmt: skip
    turns = random.integers(-3, 30, phases.size)
    times: Floats = np.sort(system.value("epoch") + (phases + turns) * system.value("period"))
    return times
