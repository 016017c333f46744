"""Random detached binaries and data of them, over the whole range the program claims."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from shadowscale.data.bands import wavelength_of
from shadowscale.data.photometry import InputFile, Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.limb import GREY_COMMON, GREY_OWN
from shadowscale.fit.model import model_light, model_velocities
from shadowscale.fit.system import System
from shadowscale.geometry.absolute import velocity_amplitudes
from shadowscale.geometry.roche import lobe_radius
from shadowscale.light.grey import grey_coefficients
from shadowscale.light.laws import LAWS, Law
from shadowscale.quantities import key

BANDS = ("B", "V", "R", "I")


@dataclass(frozen=True)
class Case:
    """A system, its data, and what it is called."""

    number: int
    truth: System
    photometry: Photometry
    velocities: Velocities
    words: str


def draw_case(seed: int) -> Case:
    """A random case; the same for the same seed."""
    rng = np.random.default_rng(seed)
    while True:
        truth = _system(rng)
        case = _observed(seed, truth, rng)
        if case is not None:
            return case


def _system(rng: np.random.Generator) -> System:
    """Detached stars whose primary eclipse is the deeper one."""
    bands = BANDS[: rng.integers(1, 5)]
    while True:
        ratio = float(np.exp(rng.uniform(np.log(0.1), np.log(3.0))))
        ecc = 0.0 if rng.random() < 0.4 else float(rng.uniform(0.0, 0.6))
        angle = rng.uniform(0, 2 * np.pi)
        total = float(np.exp(rng.uniform(np.log(0.06), np.log(0.45)))) * (1 - ecc)
        rho = (1 - ecc**2) / (1 + ecc * np.sin(angle))
        cosi = rng.uniform(0.0, 0.93) * total / rho
        q = float(rng.uniform(0.3, 1.1))
        r1, r2 = total / (1 + ratio), total * ratio / (1 + ratio)
        full = max(r1 / lobe_radius(1 / q), r2 / lobe_radius(q)) / (1 - ecc)
        if full > 0.75 or cosi > 0.9 or min(r1, r2) < 0.006:
            continue
        period = float(np.exp(rng.uniform(np.log(1.0), np.log(15.0))))
        inclination = float(np.degrees(np.arccos(cosi)))
        mass1 = float(np.exp(rng.uniform(np.log(0.7), np.log(5.0))))
        tilt = {"eccentricity": ecc, "inclination": inclination}
        k1, k2 = velocity_amplitudes(period, mass1, mass1 * q, **tilt)
        third = 0.0 if rng.random() < 0.5 else float(rng.uniform(0.0, 0.4))
        values = {
            "period": period, "epoch": 2459000.0 + rng.uniform(0, period), "radius_sum": total,
            "radius_ratio": ratio, "inclination": inclination, "ecosw": float(ecc * np.cos(angle)),
            "esinw": float(ecc * np.sin(angle)), "K1": float(k1), "K2": float(k2),
            "gamma1": 12.0, "gamma2": 12.0,
        }  # fmt: skip
        values |= _atmospheres(rng, bands, third)
        return System(values, (), "power-2", bands, ("spectrograph",), light_time=True)


def _atmospheres(
    rng: np.random.Generator, bands: tuple[str, ...], third: float
) -> dict[str, float]:
    """Brightness, third light and limb darkening of two stars of random temperature, band by band.

    Limb darkening is that of grey atmospheres, wrong by as much as the solver's prior says that
    they are: mostly the same error in every band and both stars.
    """
    law = LAWS["power-2"]
    teff1 = float(np.exp(rng.uniform(np.log(4500.0), np.log(12000.0))))
    teffs = teff1, teff1 * float(rng.uniform(0.55, 0.995))
    common = GREY_COMMON * rng.standard_normal(2)
    values = {}
    for number, band in enumerate(bands):
        wavelength = wavelength_of(band)
        bright = [1.0 / np.expm1(14387769.0 / (wavelength * teff)) for teff in teffs]
        values[key("surface_brightness_ratio", band)] = float(bright[1] / bright[0])
        values[key("third_light", band)] = third * (1 - 0.1 * number)
        for star, teff in enumerate(teffs, 1):
            start = law.to_sampling(np.array(grey_coefficients(teff, wavelength, law.name)))
            pair = _physical(rng, law, start + common)
            for place, value in enumerate(pair, 1):
                values[key(f"limb_darkening{star}", band, place)] = float(value)
    return values


def _physical(rng: np.random.Generator, law: Law, centre: np.ndarray) -> np.ndarray:
    """Coefficients with an error of their own, bright at the limb and darker outward."""
    spread = GREY_OWN
    while True:
        pair = law.from_sampling(centre + spread * rng.standard_normal(2))
        if np.all(np.isfinite(pair)) and 0.0 < pair[0] < 1.0 and 0.1 < pair[1] < 2.0:
            return pair
        spread *= 1.05


def _observed(seed: int, truth: System, rng: np.random.Generator) -> Case | None:
    """Data of the system, or None where the eclipses are too poor for anyone."""
    period, epoch = truth.value("period"), truth.value("epoch")
    points = int(np.exp(rng.uniform(np.log(200), np.log(100_000))))
    duration = truth.value("radius_sum") / np.pi * period
    exposure = 0.0 if rng.random() < 0.5 else float(rng.uniform(0.01, 0.5)) * duration * 86400
    truth = replace(truth, exposure=exposure)
    noise = float(np.exp(rng.uniform(np.log(3e-4), np.log(6e-3))))
    tables = []
    for band in truth.bands:
        count = max(points // len(truth.bands), 60)
        times = _times(rng, count, period, epoch)
        flux = model_light(truth, band, times)
        if not _worth(truth, times, flux, noise):
            return None
        tables.append((times, flux + noise * rng.standard_normal(times.size)))
    photometry = _photometry(truth, tables, noise)
    velocities = _velocities(truth, rng)
    ecc = np.hypot(truth.value("ecosw"), truth.value("esinw"))
    words = (
        f"{photometry.time.size} points, {len(truth.bands)} bands, noise {noise:.1e}, e {ecc:.2f}, "
        f"k {truth.value('radius_ratio'):.2f}, r1+r2 {truth.value('radius_sum'):.3f}, "
        f"i {truth.value('inclination'):.2f}, l3 {truth.value('third_light', truth.bands[0]):.2f}, "
        f"exposure {exposure:.0f} s"
    )
    return Case(seed, truth, photometry, velocities, words)


def _times(rng: np.random.Generator, count: int, period: float, epoch: float) -> np.ndarray:
    """Space data without a break, or nights with gaps."""
    if rng.random() < 0.5:
        return epoch + np.sort(rng.uniform(-0.5, 6.5, 1)[0] + np.linspace(0, 8 * period, count))
    nights = int(rng.integers(25, 60))
    start = epoch + np.sort(rng.choice(np.arange(0, 200), nights, replace=False)).astype(float)
    each = np.full(nights, count // nights)
    parts = [s + np.sort(rng.uniform(0, 0.33, n)) for s, n in zip(start, each, strict=True)]
    return np.concatenate(parts)


def _worth(truth: System, times: np.ndarray, flux: np.ndarray, noise: float) -> bool:
    """Both eclipses seen at more than noise, ingress and egress sampled."""
    cycles = (times - truth.value("epoch")) / truth.value("period")
    if not _repeats(truth, cycles, flux):
        return False
    near = np.abs(cycles - np.round(cycles)) < 0.15
    first, second = flux[near], flux[~near]
    for part, least in ((first, 12.0), (second, 8.0)):
        lost = 1.0 - part
        inside = lost > 0.02 * max(lost.max(initial=0.0), 1e-9)
        if inside.sum() < 25 or np.sqrt(np.sum(lost[inside] ** 2)) < least * noise * 2:
            return False
    return first.min() < second.min() - 2 * noise / np.sqrt(25)


def _repeats(truth: System, cycles: np.ndarray, flux: np.ndarray) -> bool:
    """Both eclipses seen in two cycles at least: without that nobody can tell the period."""
    near = np.abs(cycles - np.round(cycles)) < 0.15
    for rows in (near, ~near):
        lost = 1.0 - flux[rows]
        number = np.round(cycles[rows]) if rows is near else np.floor(cycles[rows])
        inside = lost > 0.3 * lost.max(initial=0.0)
        if np.count_nonzero(np.unique_counts(number[inside]).counts >= 5) < 2:
            return False
    return True


def _photometry(
    truth: System, tables: list[tuple[np.ndarray, np.ndarray]], noise: float
) -> Photometry:
    time = np.concatenate([t for t, _ in tables])
    flux = np.concatenate([f for _, f in tables])
    band = np.concatenate([np.full(t.size, n) for n, (t, _) in enumerate(tables)])
    night = np.concatenate([_nights(t) for t, _ in tables])
    order = np.argsort(time, kind="stable")
    zeros = np.zeros(time.size, dtype=np.int64)
    error = np.full(time.size, noise)
    return Photometry(
        time=time[order], flux=flux[order], flux_error=error, band=band[order], night=night[order],
        file=zeros, line=np.arange(1, time.size + 1), value=flux[order], value_error=error, why=zeros,
        bands=truth.bands, files=(InputFile("drawn", "", time.size, time.size),),
        errors_from_scatter=(False,) * len(truth.bands),
    )  # fmt: skip


def _nights(times: np.ndarray) -> np.ndarray:
    gap = np.diff(times) > max(0.3, 20 * float(np.median(np.diff(times))))
    return np.concatenate([[0], np.cumsum(gap)]).astype(np.int64)


def _velocities(truth: System, rng: np.random.Generator) -> Velocities:
    count = int(rng.integers(14, 40))
    period = truth.value("period")
    times = np.sort(truth.value("epoch") + rng.uniform(0, 20 * period, count))
    error = np.full(count, float(np.exp(rng.uniform(np.log(0.1), np.log(1.5)))))
    zeros = np.zeros(count, dtype=np.int64)
    rv1, rv2 = (
        model_velocities(truth, star, times) + error * rng.standard_normal(count) for star in (1, 2)
    )
    return Velocities(
        time=times, rv1=rv1, rv1_error=error, rv2=rv2, rv2_error=error, source=zeros, file=zeros,
        line=np.arange(1, count + 1), why1=zeros, why2=zeros, sources=("spectrograph",),
        files=(InputFile("drawn", "", count, count),),
    )  # fmt: skip
