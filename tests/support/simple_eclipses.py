"""Light curves of two spheres in pure numpy: a truth that shares no code with the engine.

The overlap of two discs is the textbook area; a linearly darkened disc is a pile of uniform
discs, so its hidden light is one integral over their radii. Light time and proximity effects are
left out.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import pi

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq, minimize_scalar

from shadowscale.data.photometry import Photometry

Floats = NDArray[np.float64]
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(48)
_THETA = (1 + _NODES) * pi / 4
_THETA_WEIGHTS = _WEIGHTS * pi / 4


def overlap_area(distance: Floats, radius: float, other: Floats | float) -> Floats:
    """Common area of two discs (textbook formula)."""
    d, r, s = np.broadcast_arrays(np.maximum(distance, 1e-12), radius, other)
    inside = pi * np.minimum(r, s) ** 2
    with np.errstate(invalid="ignore", divide="ignore"):
        first = np.arccos(np.clip((d**2 + r**2 - s**2) / (2 * d * r), -1, 1))
        second = np.arccos(np.clip((d**2 + s**2 - r**2) / (2 * d * s), -1, 1))
    kite = (-d + r + s) * (d + r - s) * (d - r + s) * (d + r + s)
    lens = r**2 * first + s**2 * second - np.sqrt(np.maximum(kite, 0)) / 2
    return np.where(d >= r + s, 0.0, np.where(d <= np.abs(r - s), inside, lens))


def hidden(distance: Floats, ratio: float, darkening: float) -> Floats:
    """Hidden fraction of a disc of radius 1 with I = 1 - u (1 - mu) behind a disc of radius `ratio`."""
    edge = (1 - darkening) * overlap_area(distance, ratio, 1.0)
    radii = np.sin(_THETA)
    rings = overlap_area(np.asarray(distance)[..., None], ratio, radii)
    pile = darkening * (rings * radii * _THETA_WEIGHTS).sum(axis=-1)
    return (edge + pile) / (pi * (1 - darkening / 3))


@dataclass(frozen=True)
class SimpleBinary:
    """Two spheres; angles in degrees; `epoch` is the primary conjunction; brightness star 2 / star 1."""

    period: float
    epoch: float
    r1: float
    k: float
    inclination: float = 90.0
    eccentricity: float = 0.0
    omega: float = 90.0
    brightness: tuple[float, ...] = (0.5,)
    darkening: float = 0.5
    third: float = 0.0
    wave: float = 0.0  # semi-amplitude of cos 2 phi outside eclipse

    @property
    def r2(self) -> float:
        return self.k * self.r1

    def position(self, phase: Floats) -> tuple[Floats, Floats]:
        """Distance on the sky [a] and sin(nu + omega): positive where star 1 is behind."""
        e, w = self.eccentricity, np.radians(self.omega)
        nu0 = pi / 2 - w
        start = 2 * np.arctan2(np.sqrt(1 - e) * np.sin(nu0 / 2), np.sqrt(1 + e) * np.cos(nu0 / 2))
        mean = 2 * pi * np.asarray(phase) + start - e * np.sin(start)
        mean = (mean + pi) % (2 * pi) - pi
        anomaly = mean + e * np.sin(mean)
        for _ in range(60):
            anomaly = anomaly - (anomaly - e * np.sin(anomaly) - mean) / (1 - e * np.cos(anomaly))
        nu = 2 * np.arctan2(
            np.sqrt(1 + e) * np.sin(anomaly / 2), np.sqrt(1 - e) * np.cos(anomaly / 2)
        )
        rho = (1 - e**2) / (1 + e * np.cos(nu))
        side = np.sin(nu + w)
        return rho * np.sqrt(1 - (side * np.sin(np.radians(self.inclination))) ** 2), side

    def flux_at_phase(self, phase: Floats, band: int = 0) -> Floats:
        """Flux of an instant, 1 outside eclipse (apart from the wave)."""
        phase = np.asarray(phase, float)
        distance, side = self.position(phase)
        disc = 1 - self.darkening / 3
        light2 = self.brightness[band] * self.k**2 * disc
        light1 = disc
        share1, share2 = light1 / (light1 + light2), light2 / (light1 + light2)
        lost = np.zeros_like(phase)
        for behind, ratio, radius, share in (
            (side > 0, self.k, self.r1, share1),
            (side <= 0, 1 / self.k, self.r2, share2),
        ):
            near = behind & (distance < self.r1 + self.r2)
            lost[near] = share * self._hidden(distance[near] / radius, ratio)
        shine = 1 - (1 - self.third) * lost
        return shine * (1 - self.wave * np.cos(4 * pi * phase))

    def _hidden(self, distance: Floats, ratio: float) -> Floats:
        if distance.size < 4000:
            return hidden(distance, ratio, self.darkening)
        grid = np.linspace(0, 1 + ratio, 4001)
        return np.interp(distance, grid, hidden(grid, ratio, self.darkening))

    def flux(self, time: Floats, *, band: int = 0, exposure: float = 0.0) -> Floats:
        """Flux at times [d], averaged over an exposure [d]."""
        phase = (np.asarray(time) - self.epoch) / self.period
        if exposure == 0:
            return self.flux_at_phase(phase, band)
        nodes = (np.arange(11) - 5) / 11 * exposure / self.period
        return np.mean([self.flux_at_phase(phase + node, band) for node in nodes], axis=0)

    @property
    def secondary_phase(self) -> float:
        """Phase of the secondary conjunction (Sterne; Kopal 1959), 0...1."""
        e, w = self.eccentricity, np.radians(self.omega)
        ec, es = e * np.cos(w), e * np.sin(w)
        root = np.sqrt(1 - e**2)
        shift = np.arctan(ec / root) + ec * root / (1 - es**2)
        return float((0.5 + shift / pi) % 1)

    def contacts(self, which: int) -> tuple[float, ...]:
        """Phases of the contacts of eclipse 1 or 2: four, or the outer two if partial, or none."""
        centre = 0.0 if which == 1 else self.secondary_phase
        span = 0.15

        def distance(phase: float) -> float:
            found, side = self.position(np.array([phase]))
            return float(found[0]) if (side[0] > 0) == (which == 1) else 2.0

        middle = minimize_scalar(
            distance,
            bounds=(centre - 0.03, centre + 0.03),
            method="bounded",
            options={"xatol": 1e-10},
        ).x
        found: list[float] = []
        for limit in (self.r1 + self.r2, abs(self.r1 - self.r2)):
            if distance(middle) < limit:
                offset = lambda phase, limit=limit: distance(phase) - limit  # noqa: E731
                found += [brentq(offset, middle - span, middle, xtol=1e-12)]
                found += [brentq(offset, middle, middle + span, xtol=1e-12)]
        return tuple(sorted(found))

    def depths(self, which: int, band: int = 0) -> float:
        """Light lost at the deepest point of eclipse 1 or 2."""
        contacts = self.contacts(which)
        if not contacts:
            return 0.0
        phases = np.linspace(contacts[0], contacts[-1], 2001)
        return float(1 - self.flux_at_phase(phases, band).min())


def trapezoid(
    time: Floats, *, middle: float, duration: float, ingress: float, depth: float
) -> Floats:
    """A plain trapezoid: first to fourth contact `duration`, first to second `ingress`."""
    inside = np.clip((duration / 2 - np.abs(time - middle)) / ingress, 0, 1)
    return 1 - depth * inside


def space_times(rng: np.random.Generator, *, span: float = 27.0, step: float = 1 / 48) -> Floats:
    """Even sampling with one gap of a day in the middle, as from a satellite."""
    time = np.arange(0, span, step)
    gap = span / 2 + rng.uniform(-1, 1)
    return 2459000.0 + time[np.abs(time - gap) > 0.5]


def ground_times(
    rng: np.random.Generator,
    *,
    nights: int = 12,
    season: float = 60.0,
    hours: float = 7.0,
    step: float = 4 / 1440,
) -> Floats:
    """Some whole nights of a season with small gaps, as from one site."""
    chosen = np.sort(rng.choice(int(season), size=nights, replace=False))
    parts = []
    for night in chosen:
        length = hours * rng.uniform(0.6, 1.0) / 24
        time = np.arange(0, length, step)
        kept = rng.uniform(size=time.size) > 0.05
        parts.append(night + rng.uniform(-0.02, 0.02) + time[kept])
    return 2458000.25 + np.concatenate(parts)


def survey_times(rng: np.random.Generator, *, points: int = 600, span: float = 1500.0) -> Floats:
    """One point a night now and then over years, with seasons."""
    day = rng.uniform(0, span, size=4 * points)
    season = (day % 365.25) < 220
    return np.sort(
        2456000.0
        + np.floor(day[season][:points])
        + rng.normal(0.3, 0.08, size=season[:].sum())[:points]
    )


def as_photometry(
    times: list[Floats],
    fluxes: list[Floats],
    errors: list[float],
    *,
    bands: tuple[str, ...] = ("V",),
    gap: float = 0.3,
) -> Photometry:
    """A table of light from one array a band; a gap [d] begins another night."""
    columns: dict[str, list[NDArray]] = {
        "time": [],
        "flux": [],
        "error": [],
        "band": [],
        "night": [],
    }
    for number, (time, flux, error) in enumerate(zip(times, fluxes, errors, strict=True)):
        columns["time"].append(time)
        columns["flux"].append(flux / np.median(flux))
        columns["error"].append(np.full(time.size, error))
        columns["band"].append(np.full(time.size, number))
        columns["night"].append(np.cumsum(np.diff(time, prepend=time[:1]) > gap))
    flat = {name: np.concatenate(parts) for name, parts in columns.items()}
    order = np.argsort(flat["time"], kind="stable")
    flat = {name: values[order] for name, values in flat.items()}
    size = order.size
    return Photometry(
        time=flat["time"],
        flux=flat["flux"],
        flux_error=flat["error"],
        band=flat["band"].astype(np.int64),
        night=flat["night"].astype(np.int64),
        file=np.zeros(size, np.int64),
        line=np.arange(1, size + 1),
        value=flat["flux"],
        value_error=flat["error"],
        why=np.zeros(size, np.int64),
        bands=bands,
        files=(),
    )


@dataclass(frozen=True)
class Blemishes:
    """What real light curves have beside noise."""

    outliers: float = 0.0  # fraction of points far off
    spots: float = 0.0  # semi-amplitude of a slow wave
    night_offsets: float = 0.0  # scatter of the levels of the nights
    spot_period: float = 7.3
    exposure: float = 0.0  # [d]
    extra: dict[str, float] = field(default_factory=dict)


CLEAN = Blemishes()


def observe(
    binary: SimpleBinary,
    times: Floats | list[Floats],
    noise: float,
    rng: np.random.Generator,
    *,
    blemishes: Blemishes = CLEAN,
    bands: tuple[str, ...] = ("V",),
) -> Photometry:
    """Photometry of a binary, one series of times for each band."""
    series = times if isinstance(times, list) else [times] * len(bands)
    fluxes = []
    for number, time in enumerate(series):
        flux = binary.flux(time, band=number, exposure=blemishes.exposure)
        wave = np.sin(2 * pi * (time - time[0]) / blemishes.spot_period + rng.uniform(0, 6))
        night = np.cumsum(np.diff(time, prepend=time[:1]) > 0.3)
        offsets = rng.normal(0, blemishes.night_offsets or 1e-300, size=night.max() + 1)
        flux = flux * (1 + blemishes.spots * wave) * (1 + offsets[night])
        flux = flux + rng.normal(0, noise, size=time.size)
        wild = rng.uniform(size=time.size) < blemishes.outliers
        flux[wild] += rng.normal(0, 20 * noise, size=wild.sum())
        fluxes.append(flux)
    return as_photometry(series, fluxes, [noise] * len(series), bands=bands)
