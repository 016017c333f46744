"""What is measured in this process, beside a composite of batman-package and scipy."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from itertools import count

import numpy as np
from numpy.typing import NDArray
from rival import Composite, fit, velocities
from timing import Work

from shadowscale.constants import DAY
from shadowscale.fit.band_model import BandModel
from shadowscale.fit.least_squares import minimise
from shadowscale.fit.model import model_light
from shadowscale.fit.objective import Objective
from shadowscale.fit.observed import BandData, StarVelocities
from shadowscale.fit.system import System
from shadowscale.fit.vector import Vector
from shadowscale.quantities import Key, key

Floats = NDArray[np.float64]

BAND = "V"
COMPOSITE = "composite"
# Invented; e = 0.37, both eclipses, one total. Times are days from a zero point of their own.
VALUES = {
    "period": 3.2174, "epoch": 0.41, "radius_sum": 0.25, "k": 0.7, "inclination": 88.5,
    "ecosw": 0.168, "esinw": 0.3297, "J": 0.62, "u1": 0.35, "v1": 0.20, "u2": 0.41, "v2": 0.18,
    "K1": 91.0, "K2": 118.0, "gamma": -12.0, "level": 1.0,
}  # fmt: skip
SCALES = {
    "period": 1e-6, "epoch": 1e-4, "radius_sum": 1e-3, "k": 1e-2, "inclination": 0.1, "ecosw": 1e-4,
    "esinw": 1e-3, "J": 1e-2, "level": 1e-4,
}  # fmt: skip
NAMES = {"k": "radius_ratio", "J": key("surface_brightness_ratio", BAND)}
NOISE, SPAN = 1e-3, 400.0


def system_of(values: dict[str, float], law: str = "quadratic", **form: object) -> System:
    """The same pair in the engine's terms."""
    own = {NAMES.get(name, name): value for name, value in values.items() if name[0] not in "uvgl"}
    own |= {key("third_light", BAND): 0.0, "gamma1": values["gamma"], "gamma2": values["gamma"]}
    for star in (1, 2):
        pair = (values[f"u{star}"], values[f"v{star}"]) if law == "quadratic" else (0.6, 0.7)
        for number, value in enumerate(pair, start=1):
            own[str(Key(f"limb_darkening{star}", BAND, number))] = value
    return System(own, (), law, (BAND,), **form)  # type: ignore[arg-type]


def times_of(size: int) -> Floats:
    """Sorted times of a light curve."""
    return np.sort(np.random.default_rng(size).uniform(0.0, SPAN, size))


def moved(values: dict[str, float], turn: int) -> dict[str, float]:
    """Values that differ a little from call to call, as in any fit, so that nothing is kept."""
    return {**values, "epoch": values["epoch"] + 1e-9 * (turn % 1000)}


def shifted(system: System, turn: int) -> System:
    """The same in the engine's terms."""
    return system.with_values({"epoch": system.values["epoch"] + 1e-9 * (turn % 1000)})


def light_curves(sizes: Sequence[int], wanted: dict[int, float]) -> list[Work]:
    """Light alone, quadratic law."""
    works = []
    for size in sizes:
        times, turn = times_of(size), count()
        rival, system = Composite(times, VALUES), system_of(VALUES)
        apart = np.abs(model_light(system, BAND, times) - rival.light(VALUES)).max()
        works.append(
            Work(
                "light curve, quadratic, e = 0.37", f"{size:,} points",
                lambda s=system, t=times, n=turn: model_light(shifted(s, next(n)), BAND, t),
                lambda r=rival, n=turn: r.light(moved(VALUES, next(n))),
                COMPOSITE, wanted.get(size), checked=f"light differs by {apart:.0e}",
            )
        )  # fmt: skip
    return works


def objective_of(size: int, *, rows: int = 0, free: Sequence[str] = ()) -> Objective:
    """Chi-squared of noisy light (and velocities) of the pair, levels solved inside."""
    random = np.random.default_rng(1)
    times, system = times_of(size), system_of(VALUES)
    flux = model_light(system, BAND, times) + NOISE * random.standard_normal(size)
    none = np.arange(size)
    data = BandData(
        BAND, times, flux, np.full(size, NOISE**-2), np.array([0, size]), np.zeros(size), none
    )
    when = np.sort(random.uniform(0.0, SPAN, rows))
    stars = [
        StarVelocities(star, when, curve + random.standard_normal(rows), np.ones(rows),
                       np.zeros(rows, dtype=np.int64), np.arange(rows))
        for star, curve in zip((1, 2), velocities(VALUES, when), strict=True) if rows
    ]  # fmt: skip
    names = tuple(NAMES.get(name, name) for name in free if name not in ("level", "gamma"))
    if "gamma" in free:
        names = (*names, "gamma1", "gamma2")
    return Objective(Vector(replace(system, free=names, sources=("one",))), [data], stars)


def derivatives(size: int) -> list[Work]:
    """Light with the derivatives to all quantities, beside the bare composite; normal equations."""
    times, turn = times_of(size), count()
    rival, system = Composite(times, VALUES), system_of(VALUES)
    objective = objective_of(size, free=[name for name in SCALES if name != "level"])
    start = objective.vector.pack(objective.vector.system.values)

    def normal() -> object:
        return objective(start + 1e-9 * (next(turn) % 1000))

    def rows() -> object:
        model = BandModel.at(system, shifted(system, next(turn)).values, BAND, derivatives=True)
        return model.derivatives(times)

    def bare() -> object:
        return rival.light(moved(VALUES, next(turn)))

    said = f"{size:,} points"
    return [
        Work("light with all 14 derivatives", said, rows, bare, f"{COMPOSITE}, no derivatives", 12),
        Work("normal equations of 8, level inside", said, normal, bare,
             f"{COMPOSITE}, no derivatives", 12),
    ]  # fmt: skip


def likelihoods(size: int, rows: int = 30) -> list[Work]:
    """Chi-squared of light and velocities, as a sampler calls it."""
    free = [*SCALES, "K1", "K2", "gamma"]
    objective, turn = objective_of(size, rows=rows, free=free), count()
    data, rival = objective.bands[0], Composite(times_of(size), VALUES)
    start = objective.vector.pack(objective.vector.system.values)

    def ours() -> float:
        return objective.chi2(start + 1e-9 * (next(turn) % 1000))

    def other() -> float:
        values = moved(VALUES, next(turn))
        light = rival.light(values)
        chi2 = float(np.sum(data.weight * (data.flux - values["level"] * light) ** 2))
        for star, curve in zip(objective.stars, velocities(values, objective.stars[0].time)):
            chi2 += float(np.sum((star.velocity - curve) ** 2))
        return chi2

    found = f"chi-squared {objective.chi2(start):.1f} and {other():.1f}"
    return [
        Work("likelihood of light and velocities", f"{size:,} points, {rows} pairs", ours, other,
             COMPOSITE, 25, checked=found),
    ]  # fmt: skip


def fits(size: int) -> list[Work]:
    """The nine quantities from the same start to the same minimum."""
    objective = objective_of(size, free=[name for name in SCALES if name != "level"])
    vector, data = objective.vector, objective.bands[0]
    rival = Composite(times_of(size), VALUES)
    start = {name: VALUES[name] + 0.8 * SCALES.get(name, 0.0) for name in VALUES}
    first = vector.pack(system_of(start).values)

    def ours() -> float:
        return minimise(objective, first, bounds=vector.bounds, tolerance=1e-6).chi2

    def other() -> float:
        return fit(rival, data.flux, NOISE, start, SCALES)[1]

    return [
        Work("fit of nine quantities", f"{size:,} points", ours, other, f"{COMPOSITE} in scipy", 40,
             checked=f"chi-squared {ours():.3f} and {other():.3f}"),
    ]  # fmt: skip


def laws(size: int) -> list[Work]:
    """Power-2 beside quadratic."""
    times, turn = times_of(size), count()

    def light(law: str) -> Callable[[], object]:
        system = system_of(VALUES, law)
        return lambda: model_light(shifted(system, next(turn)), BAND, times)

    said = f"{size:,} points"
    return [
        Work("light curve, power-2", said, light("power-2"), light("quadratic"), "quadratic", 1.3,
             cost=True),
    ]  # fmt: skip


def exposures(size: int) -> list[Work]:
    """30-minute exposures of a 2-hour eclipse, beside instants."""
    values = {**VALUES, "radius_sum": 0.08, "inclination": 89.0, "ecosw": 0.0, "esinw": 0.0}
    times, turn = times_of(size), count()

    def light(exposure: float) -> Callable[[], object]:
        system = system_of(values, exposure=exposure)
        return lambda: model_light(shifted(system, next(turn)), BAND, times)

    some = values["epoch"] + np.linspace(-0.08, 0.08, 41)
    parts = (np.arange(4000) + 0.5) / 4000 - 0.5
    instants = system_of(values)
    mean = [model_light(instants, BAND, t + parts * 1800.0 / DAY).mean() for t in some]
    apart = np.abs(model_light(system_of(values, exposure=1800.0), BAND, some) - mean).max()
    return [
        Work("exposures of 30 min, eclipse of 2 h", f"{size:,} points", light(1800.0), light(0.0),
             "instants", 2.5, cost=True, checked=f"mean of 4000 parts: {apart:.0e}"),
    ]  # fmt: skip


def growth(size: int) -> list[Work]:
    """Ten times the points; and ten times the points outside eclipse alone."""
    short, long, turn = times_of(size), times_of(10 * size), count()
    system = system_of(VALUES)
    light = model_light(system, BAND, long)
    quiet = np.sort(np.concatenate([short, long[light == 1.0]]))

    def at(times: Floats) -> Callable[[], object]:
        return lambda: model_light(shifted(system, next(turn)), BAND, times)

    said = f"{size:,} points"
    return [
        Work("ten times the points", f"{10 * size:,} points", at(long), at(short), said, 10.5,
             cost=True),
        Work("more points outside eclipse", f"{quiet.size:,} points", at(quiet), at(short), said,
             quiet.size / size, cost=True),
    ]  # fmt: skip


def all_works(*, quick: bool) -> list[Work]:
    """Every work; small ones alone where it only has to be shown that they run."""
    if quick:
        small = 2000
        return [
            *light_curves([small], {}), *derivatives(small), *likelihoods(small), *fits(small),
            *laws(small), *exposures(small), *growth(small), *_more(quick=True),
        ]  # fmt: skip
    return [
        *light_curves([20_000, 1_000_000], {20_000: 30.0, 1_000_000: 40.0}), *derivatives(20_000),
        *likelihoods(20_000), *fits(20_000), *laws(1_000_000), *laws(20_000),
        *exposures(20_000), *growth(100_000), *_more(quick=False),
    ]  # fmt: skip


# Other parts of the project add functions here; each is told `quick` and gives more works.
MORE: list[Callable[[bool], Sequence[Work]]] = []


def _more(*, quick: bool) -> list[Work]:
    return [work for function in MORE for work in function(quick)]
