"""Random eclipsing pairs written as files by a simulator that shares no line with the engine.

The hidden light is that of batman-package (Kreidberg 2015, PASP 127, 1161: a limb-darkened sphere
behind a dark one), asked twice, once with each star behind. Orbits, light time, velocities,
exposures and noise are made here from textbook formulas. Limb darkening is that of published
atmospheres, so that it is not known to the fit any better than it would be for real stars.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import acos, atan2, cos, degrees, exp, hypot, log, pi, sin, sqrt
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

Floats = NDArray[np.float64]

GM, SOLAR_RADIUS, LIGHT = 1.3271244e20, 6.957e8, 299_792_458.0  # SI (IAU 2015 B3, SI brochure)
DAY, GAMMA = 86400.0, -8.0  # [s], [km/s]
NODES, WEIGHTS = np.polynomial.legendre.leggauss(21)
# Quadratic coefficients of ATLAS atmospheres, [M/H] = 0: Teff, then V and I (Claret & Bloemen 2011,
# A&A 529, A75, tables at CDS; log g 4.5, but 4.0 for 10,000 K in V; there I is our guess from TESS).
ATMOSPHERES = np.array([
    [4500.0, 0.7872, 0.0100, 0.4795, 0.1656],
    [5750.0, 0.4650, 0.2565, 0.2915, 0.2741],
    [6500.0, 0.3493, 0.3154, 0.2179, 0.3109],
    [10000.0, 0.2276, 0.3267, 0.1518, 0.2525],
])  # fmt: skip
MOST_NIGHTS = 100  # draws of nights before they are given up
BANDS = {"V": (550e-9, 1), "I": (786e-9, 3)}  # wavelength [m], column of `ATMOSPHERES`


@dataclass(frozen=True)
class OutsidePair:
    """A pair of stars: elements in days, a, radians; what else is true by the names of the sheet."""

    period: float
    conjunction: float  # [d] when star 1 would be seen behind star 2 if light took no time
    ecosw: float
    esinw: float
    inclination: float
    radii: tuple[float, float]
    masses: tuple[float, float]  # [solar]
    teffs: tuple[float, float]
    third_light: float
    exposure: float  # [s]

    @property
    def eccentricity(self) -> float:
        """From its two components."""
        return hypot(self.ecosw, self.esinw)

    @property
    def axis(self) -> float:
        """Kepler's third law: the relative orbit's half axis [m]."""
        total = GM * sum(self.masses)
        return float((total * (self.period * DAY / (2 * pi)) ** 2) ** (1 / 3))

    def amplitude(self, star: int) -> float:
        """Half the range of a star's velocity [km/s]."""
        share = self.masses[2 - star] / sum(self.masses)
        speed = 2 * pi * self.axis * share * sin(self.inclination) / (self.period * DAY)
        return float(speed / sqrt(1 - self.eccentricity**2) / 1e3)

    def angle(self, time: Floats) -> tuple[Floats, Floats]:
        """nu + omega of star 1 and the distance of the stars [a] at a time."""
        e, omega = self.eccentricity, atan2(self.esinw, self.ecosw)
        start = _mean_anomaly(pi / 2 - omega, e)
        mean = start + 2 * pi * (time - self.conjunction) / self.period
        eccentric = mean + e * np.sin(mean)
        for _ in range(12):
            eccentric = eccentric - (eccentric - e * np.sin(eccentric) - mean) / (
                1 - e * np.cos(eccentric)
            )
        half = np.sqrt(1 + e) * np.sin(eccentric / 2), np.sqrt(1 - e) * np.cos(eccentric / 2)
        return 2 * np.arctan2(*half) + omega, 1 - e * np.cos(eccentric)

    def emission(self, star: int, time: Floats) -> Floats:
        """When the light left a star that arrives at `time` [d]: t - z/c, z away from us."""
        share = self.masses[2 - star] / sum(self.masses) * self.axis / LIGHT / DAY
        left = time
        for _ in range(3):
            angle, distance = self.angle(left)
            depth = share * distance * np.sin(angle) * sin(self.inclination)
            left = time - (depth if star == 1 else -depth)
        return left

    def seen(self, time: Floats) -> tuple[Floats, Floats, Floats]:
        """Star 1 less star 2 on the sky, along the line of nodes and across, and which is nearer [a].

        Each star stands where its own light left it.
        """
        position = np.zeros((3, time.size))
        for star in (1, 2):
            share = self.masses[2 - star] / sum(self.masses)  # both add to the relative orbit
            angle, distance = self.angle(self.emission(star, time))
            across = np.sin(angle) * cos(self.inclination)
            away = np.sin(angle) * sin(self.inclination)
            position += share * distance * np.array([np.cos(angle), across, away])
        return position[0], position[1], position[2]

    def observed_conjunction(self) -> float:
        """When star 1 is seen on the plane through star 2 and the line of sight: the sheet's epoch."""
        near = 0.01 * self.period
        return float(
            brentq(
                lambda t: float(self.seen(np.array([t]))[0][0]),
                self.conjunction - near, self.conjunction + near, xtol=1e-10,
            )
        )  # fmt: skip

    def velocity(self, star: int, time: Floats) -> Floats:
        """gamma +- K [cos(nu + omega) + e cos omega], at the time when the light left [km/s]."""
        angle, _ = self.angle(self.emission(star, time))
        sign = 1.0 if star == 1 else -1.0
        return GAMMA + sign * self.amplitude(star) * (np.cos(angle) + self.ecosw)

    def limb_darkening(self, star: int, band: str) -> tuple[float, float]:
        """Quadratic coefficients of a published atmosphere of that temperature."""
        _, column = BANDS[band]
        teff = self.teffs[star - 1]
        first, second = (
            float(np.interp(teff, ATMOSPHERES[:, 0], ATMOSPHERES[:, c]))
            for c in (column, column + 1)
        )
        return first, second

    def light(self, band: str, time: Floats) -> Floats:
        """Light of a band, 1 outside eclipse, averaged over the exposure."""
        if not self.exposure:
            return self._instant(band, time)
        half = self.exposure / DAY / 2
        parts = (w / 2 * self._instant(band, time + x * half) for x, w in zip(NODES, WEIGHTS))
        return np.sum(list(parts), axis=0)

    def _instant(self, band: str, time: Floats) -> Floats:
        along, across, depth = self.seen(time)
        apart = np.hypot(along, across)
        left, discs = [], []
        for star in (1, 2):
            u1, u2 = self.limb_darkening(star, band)
            own, other = self.radii[star - 1], self.radii[2 - star]
            behind = (depth > 0) if star == 1 else (depth < 0)
            hidden = np.zeros(time.size)
            near = behind & (apart < own + other)
            if near.any():
                hidden[near] = _hidden(apart[near] / own, other / own, (u1, u2))
            left.append(1 - hidden)
            planck = 1 / np.expm1(0.014387769 / (BANDS[band][0] * self.teffs[star - 1]))
            discs.append(planck * own**2)
        stars = (discs[0] * left[0] + discs[1] * left[1]) / sum(discs)
        return np.asarray((1 - self.third_light) * stars + self.third_light)

    def truth(self) -> Mapping[str, float]:
        """By the names of the sheet; angles in degrees, sizes in solar units."""
        r1, r2 = self.radii
        size = self.axis / SOLAR_RADIUS
        return {
            "period": self.period, "radius_sum": r1 + r2, "radius_ratio": r2 / r1, "r1": r1, "r2": r2,
            "inclination": degrees(self.inclination), "ecosw": self.ecosw, "esinw": self.esinw,
            "K1": self.amplitude(1), "K2": self.amplitude(2), "a": size,
            "M1": self.masses[0], "M2": self.masses[1], "R1": r1 * size, "R2": r2 * size,
        }  # fmt: skip


def _mean_anomaly(true_anomaly: float, e: float) -> float:
    half = sqrt((1 - e) / (1 + e))
    eccentric = 2 * atan2(half * sin(true_anomaly / 2), cos(true_anomaly / 2))
    return eccentric - e * sin(eccentric)


def _hidden(separation: Floats, ratio: float, coefficients: tuple[float, float]) -> Floats:
    """Light lost of a star of radius 1 behind a dark one, by batman-package.

    Asked through a circular orbit seen edge on, with times that give the separations: its own
    solution of Kepler's equation is good to 3e-7 of the light only.
    """
    import batman

    wished = batman.TransitParams()
    wide = 1.01 * float(separation.max())
    wished.t0, wished.per, wished.ecc, wished.w, wished.inc = 0.0, 2 * pi, 0.0, 90.0, 90.0
    wished.rp, wished.a, wished.u, wished.limb_dark = ratio, wide, list(coefficients), "quadratic"
    time = np.arcsin(separation / wide)
    return np.asarray(1.0 - batman.TransitModel(wished, time).light_curve(wished))


def draw_pair(rng: np.random.Generator) -> OutsidePair:
    """A detached pair, star 1 the hotter one; both eclipses deeper than one per cent."""
    while True:
        e = 0.0 if rng.random() < 0.4 else rng.uniform(0.02, 0.5)
        omega = rng.uniform(0, 2 * pi)
        ratio = exp(rng.uniform(log(0.2), log(1.8)))
        total = exp(rng.uniform(log(0.08), log(0.3))) * (1 - e)
        height = rng.uniform(0, 0.75) * total * (1 + e * sin(omega)) / (1 - e**2)
        if height > 0.5:
            continue
        period, teff = exp(rng.uniform(log(1.5), log(9.0))), rng.uniform(5000.0, 9500.0)
        mass = rng.uniform(0.8, 2.5)
        pair = OutsidePair(
            period=period,
            conjunction=2459100.0 + rng.uniform(0, period),
            ecosw=e * cos(omega),
            esinw=e * sin(omega),
            inclination=acos(height),
            radii=(total / (1 + ratio), total * ratio / (1 + ratio)),
            masses=(mass, mass * rng.uniform(0.5, 1.0)),
            teffs=(teff, max(teff * rng.uniform(0.7, 0.97), 4500.0)),
            third_light=0.0 if rng.random() < 0.7 else rng.uniform(0.05, 0.3),
            exposure=0.0
            if rng.random() < 0.6
            else rng.uniform(0.05, 0.3) * total / pi * period * DAY,
        )
        first, second = _depths(pair)
        if first > 1.05 * second and second > 0.01:
            return pair


def _depths(pair: OutsidePair) -> tuple[float, float]:
    """Light lost in primary and secondary eclipse."""
    time = pair.conjunction + np.linspace(-0.5, 0.5, 4001) * pair.period
    light, (_, _, depth) = pair.light("V", time), pair.seen(time)
    return 1 - float(light[depth > 0].min()), 1 - float(light[depth <= 0].min())


def write_files(pair: OutsidePair, folder: Path, rng: np.random.Generator) -> None:
    """`photometry.csv` and `velocities.csv` as an observer would have them."""
    bands = ("V", "I") if rng.random() < 0.4 else ("V",)
    sigma = exp(rng.uniform(log(4e-4), log(3e-3)))
    magnitudes, nights = bool(rng.random() < 0.5), bool(rng.random() < 0.5)
    lines = ["BJD_TDB,filter," + ("mag,mag_err" if magnitudes else "flux,flux_err")]
    for band in bands:
        time = _times(pair, rng, nights=nights)
        flux = pair.light(band, time) + sigma * rng.standard_normal(time.size)
        if magnitudes:
            flux, errors = 11.3 - 2.5 * np.log10(flux), sigma / flux * 2.5 / log(10)
        else:
            errors = np.full(time.size, sigma)
        lines += [f"{t:.7f},{band},{f:.7f},{s:.7f}" for t, f, s in zip(time, flux, errors)]
    (folder / "photometry.csv").write_text("\n".join(lines) + "\n")
    time = np.sort(pair.conjunction + rng.uniform(0, 15, 24) * pair.period)
    error = rng.uniform(0.2, 1.0)
    offset = np.where(np.arange(24) % 3 == 2, 1.3, 0.0)  # every third by another spectrograph
    rv1, rv2 = (
        pair.velocity(star, time) + offset + error * rng.standard_normal(24) for star in (1, 2)
    )
    lines = ["BJD_TDB,rv1,rv1_err,rv2,rv2_err,source"]
    for t, v1, v2, o in zip(time, rv1, rv2, offset):
        source = "south" if o else "north"
        lines.append(f"{t:.6f},{v1:.4f},{error:.4f},{v2:.4f},{error:.4f},{source}")
    (folder / "velocities.csv").write_text("\n".join(lines) + "\n")


def _times(pair: OutsidePair, rng: np.random.Generator, *, nights: bool) -> Floats:
    """Some weeks without a break, or nights of eight hours, in which both eclipses were seen.

    Nights never see both eclipses of some periods near whole days: then without a break.
    """
    attempts = 0
    while True:
        attempts += 1
        count = int(exp(rng.uniform(log(1500), log(9000))))
        if nights and attempts < MOST_NIGHTS:
            days = np.sort(rng.choice(150, 60, replace=False)) + rng.uniform(0, 1)
            parts = [np.sort(rng.uniform(day, day + 0.33, count // 60)) for day in days]
            time = pair.conjunction + np.concatenate(parts)
        else:
            time = np.sort(pair.conjunction + rng.uniform(-1, 7, count) * pair.period)
        if _are_covered(pair, time):
            return time


def _are_covered(pair: OutsidePair, time: Floats) -> bool:
    """Whether twelve points or more lie on either side of the middle of both eclipses."""
    along, across, depth = pair.seen(time)
    inside = np.hypot(along, across) < sum(pair.radii)
    return all(
        np.count_nonzero(inside & (np.sign(depth) == sign) & (np.sign(along) == side)) >= 12
        for sign in (-1, 1)
        for side in (-1, 1)
    )
