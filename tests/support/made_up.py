"""An invented pair of stars with tables, solution and findings, for tests that need no solver.

The light is that of two uniform discs on a circular orbit (exact overlap of two circles), so the
curves look right; nothing here is fitted, the numbers are simply consistent with one another.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from math import cos, pi, radians, sin, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.constants import AXIS_FACTOR, MASS_FACTOR
from shadowscale.data.photometry import InputFile, Photometry, UnreadableRow
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.solution import (
    ASSUMED,
    DERIVED,
    FITTED,
    FIXED,
    Alternative,
    Decision,
    Estimate,
    FitSummary,
    LightResult,
    Solution,
    VelocityResult,
)
from shadowscale.fit.system import System
from shadowscale.geometry.contacts import ContactSolution, EclipseTiming
from shadowscale.judge.finding import PASS, WARN, Finding
from shadowscale.session.session import Exclusion, Kept, Markers, Session, Source

Floats = NDArray[np.float64]

PERIOD, EPOCH = 2.4371926, 2459000.3127
R1, R2, INCLINATION = 0.151, 0.118, 89.1
K1, K2, GAMMA = 98.4, 112.9, -14.2
BRIGHTNESS = {"V": 0.62, "I": 0.74}
THIRD_LIGHT = 0.02
LIMB = (0.60, 0.55)
NIGHT_SIGMA = 0.004
DIGEST = "0123456789abcdef" * 4


def _overlap(separation: Floats, front: float, behind: float) -> Floats:
    """Fraction of the disc `behind` hidden by the disc `front`: overlap of two circles."""
    d = np.clip(separation, 1e-12, None)
    inside = np.clip((d**2 + behind**2 - front**2) / (2 * d * behind), -1, 1)
    other = np.clip((d**2 + front**2 - behind**2) / (2 * d * front), -1, 1)
    kite = (-d + behind + front) * (d + behind - front) * (d - behind + front)
    kite = np.sqrt(np.clip(kite * (d + behind + front), 0, None)) / 2
    area = behind**2 * np.arccos(inside) + front**2 * np.arccos(other) - kite
    area = np.where(d >= front + behind, 0.0, area)
    area = np.where(d <= abs(front - behind), pi * min(front, behind) ** 2, area)
    return area / (pi * behind**2)


def made_up_light(phase: Floats, band: str = "V") -> Floats:
    """Flux of the invented pair at `phase` [cycles], 1 outside eclipse."""
    angle = 2 * pi * np.asarray(phase, dtype=float)
    separation = np.sqrt(1 - (np.cos(angle) * sin(radians(INCLINATION))) ** 2)
    ratio = BRIGHTNESS.get(band, 0.7) * (R2 / R1) ** 2
    light1, light2 = 1 / (1 + ratio), ratio / (1 + ratio)
    primary = np.cos(angle) > 0
    hidden1 = np.where(primary, _overlap(separation, R2, R1), 0.0)
    hidden2 = np.where(primary, 0.0, _overlap(separation, R1, R2))
    stars = light1 * (1 - hidden1) + light2 * (1 - hidden2)
    return (1 - THIRD_LIGHT) * stars + THIRD_LIGHT


def made_up_velocity(phase: Floats, star: int = 1) -> Floats:
    """Velocity of one star of the invented pair [km/s]."""
    amplitude = -K1 if star == 1 else K2
    return GAMMA + amplitude * np.sin(2 * pi * np.asarray(phase, dtype=float))


def _folded(time: Floats) -> Floats:
    return np.mod((time - EPOCH) / PERIOD + 0.25, 1.0) - 0.25


def made_up_photometry(
    bands: tuple[str, ...] = ("V",), *, nights: int = 12, points: int = 60, seed: int = 1
) -> Photometry:
    """Nights of photometry in magnitudes; one row flagged, two lines of the file unreadable."""
    random = np.random.default_rng(seed)
    starts = np.floor(EPOCH) + 0.25 + np.arange(nights)
    one_band = (starts[:, None] + np.linspace(0.0, 0.3, points)).ravel()
    count = one_band.size
    time = np.concatenate([one_band + 1e-3 * n for n in range(len(bands))])
    band = np.repeat(np.arange(len(bands)), count)
    night = np.tile(np.repeat(np.arange(nights), points), len(bands))
    order = np.argsort(time, kind="stable")
    time, band, night = time[order], band[order], night[order]
    light = np.empty(time.size)
    for number, name in enumerate(bands):
        light[band == number] = made_up_light(_folded(time[band == number]), name)
    flux = light * (1 + NIGHT_SIGMA * random.standard_normal(time.size))
    error = NIGHT_SIGMA * flux
    why = np.zeros(time.size, dtype=np.int64)
    why[7] = 1
    name = "nights.csv"
    return Photometry(
        time=time,
        flux=flux,
        flux_error=error,
        band=band,
        night=night,
        file=np.zeros(time.size, dtype=np.int64),
        line=np.arange(time.size) + 2,
        value=12.3 - 2.5 * np.log10(flux),
        value_error=np.full(time.size, NIGHT_SIGMA * 2.5 / np.log(10)),
        why=why,
        bands=bands,
        files=(InputFile(name, DIGEST, time.size + 2, time.size - 1, (("time", "BJD"),)),),
        time_scale="BJD_TDB",
        magnitudes=True,
        errors_from_scatter=(False,) * len(bands),
        reasons=("used", "quality flag 1"),
        unreadable=(
            UnreadableRow(name, time.size + 2, "expected a number in column 'mag'", "2459001.3,--"),
            UnreadableRow(name, time.size + 3, "expected 3 cells, found 1", "end"),
        ),
    )


def made_up_velocities(points: int = 24, *, seed: int = 2) -> Velocities:
    """Velocities of both stars from two sources; star 2 is missing in one row."""
    random = np.random.default_rng(seed)
    time = EPOCH + 3 + np.sort(random.uniform(0, 20, points))
    phase = _folded(time)
    rv1 = made_up_velocity(phase, 1) + 0.8 * random.standard_normal(points)
    rv2 = made_up_velocity(phase, 2) + 1.1 * random.standard_normal(points)
    rv2[3] = np.nan
    source = (np.arange(points) >= points // 2).astype(np.int64)
    why2 = np.zeros(points, dtype=np.int64)
    why2[3] = 1
    return Velocities(
        time=time,
        rv1=rv1,
        rv1_error=np.full(points, 0.8),
        rv2=rv2,
        rv2_error=np.where(np.isnan(rv2), np.nan, 1.1),
        source=source,
        file=np.zeros(points, dtype=np.int64),
        line=np.arange(points) + 2,
        why1=np.zeros(points, dtype=np.int64),
        why2=why2,
        sources=("north", "south"),
        files=(InputFile("velocities.csv", DIGEST[::-1], points, points, (("time", "BJD"),)),),
        time_scale="BJD_TDB",
    )


def made_up_system(bands: tuple[str, ...] = ("V",), *, velocities: bool = True) -> System:
    """The invented pair with every basic quantity."""
    values: dict[str, float] = {
        "period": PERIOD,
        "epoch": EPOCH,
        "radius_sum": R1 + R2,
        "radius_ratio": R2 / R1,
        "inclination": INCLINATION,
        "ecosw": 0.0,
        "esinw": 0.0,
    }
    free = ["period", "epoch", "radius_sum", "radius_ratio", "inclination"]
    if velocities:
        values |= {"K1": K1, "K2": K2, "gamma1": GAMMA, "gamma2": GAMMA}
        values |= {"offset1[south]": 0.3, "offset2[south]": 0.2}
        free += ["K1", "K2", "gamma1", "gamma2", "offset1[south]", "offset2[south]"]
    for band in bands:
        values[f"surface_brightness_ratio[{band}]"] = BRIGHTNESS.get(band, 0.7)
        values[f"third_light[{band}]"] = THIRD_LIGHT
        free.append(f"surface_brightness_ratio[{band}]")
        for star in (1, 2):
            for number, coefficient in enumerate(LIMB, 1):
                values[f"limb_darkening{star}[{band}].{number}"] = coefficient
    return System(
        values=values,
        free=tuple(free),
        law="power-2",
        bands=bands,
        sources=("north", "south") if velocities else (),
        priors=(Prior("radius_ratio", (0.78,), (0.05,)),),
        levels="night",
        effects={"ellipsoidal": "off", "reflection": "off", "beaming": "off"},
        wavelengths={band: {"V": 545.0, "I": 800.0}.get(band, 600.0) for band in bands},
    )


_SIGMAS = {
    "period": 3e-6,
    "epoch": 2e-4,
    "radius_sum": 4e-4,
    "radius_ratio": 6e-3,
    "inclination": 0.05,
    "K1": 0.2,
    "K2": 0.3,
    "gamma1": 0.15,
    "gamma2": 0.2,
    "surface_brightness_ratio": 5e-3,
}


def _derived(system: System) -> dict[str, tuple[float, float]]:
    """Derived values with invented errors."""
    sine = sin(radians(INCLINATION))
    found = {
        "r1": (R1, 5e-4),
        "r2": (R2, 6e-4),
        "impact1": (cos(radians(INCLINATION)) / R1, 6e-3),
        "impact2": (cos(radians(INCLINATION)) / R1, 6e-3),
        "eccentricity": (0.0, 0.0),
        "T14_1": (_duration(R1 + R2), 4e-4),
        "T23_1": (_duration(abs(R1 - R2)), 9e-4),
        "T14_2": (_duration(R1 + R2), 4e-4),
        "T23_2": (_duration(abs(R1 - R2)), 9e-4),
        "depth1": (float(1 - made_up_light(np.array([0.0]))[0]), 1e-3),
        "depth2": (float(1 - made_up_light(np.array([0.5]))[0]), 1e-3),
    }
    if system.has("K1"):
        axis = AXIS_FACTOR * PERIOD * (K1 + K2) / sine
        mass = MASS_FACTOR * PERIOD * (K1 + K2) ** 2 / sine**3
        found |= {
            "a": (axis, 0.02),
            "mass_ratio": (K1 / K2, 3e-3),
            "M1": (mass * K2, 0.009),
            "M2": (mass * K1, 0.007),
            "R1": (R1 * axis, 0.006),
            "R2": (R2 * axis, 0.007),
        }
    return found


def _duration(reach: float) -> float:
    """Days for which the centres are closer than `reach` on a circular orbit (exact)."""
    cosine = sqrt(max(0.0, (1 - reach**2))) / sin(radians(INCLINATION))
    return float(PERIOD / pi * np.arccos(min(1.0, cosine)))


def _estimates(system: System) -> Mapping[str, Estimate]:
    found: dict[str, Estimate] = {}
    for name, value in system.values.items():
        sigma = _SIGMAS.get(name.split("[")[0], 0.01)
        prior = (0.78, 0.05) if name == "radius_ratio" else None
        if name in system.free:
            found[name] = Estimate(value, sigma, sigma, FITTED, prior)
        else:
            found[name] = Estimate(value, None, None, FIXED)
    for name, (value, sigma) in _derived(system).items():
        found[name] = Estimate(value, sigma or None, sigma or None, DERIVED)
    found["teff1"] = Estimate(6350.0, 110.0, 110.0, ASSUMED)
    for band in system.bands:
        brightness = system.value("surface_brightness_ratio", band)
        found[f"light_ratio[{band}]"] = Estimate(brightness * (R2 / R1) ** 2, 0.006, 0.007, DERIVED)
        found[f"mean_surface_brightness_ratio[{band}]"] = Estimate(
            brightness, 0.005, 0.005, DERIVED
        )
    return found


def made_up_contact() -> ContactSolution:
    """What the contacts of the invented pair say."""
    outer, inner = _duration(R1 + R2) / PERIOD, _duration(abs(R1 - R2)) / PERIOD
    ingress = (outer - inner) / 2
    covariance = np.diag([1e-5, 2e-4, 2e-4, 2e-4, 1e-3]) ** 2
    depths = [float(1 - made_up_light(np.array([phase]))[0]) for phase in (0.0, 0.5)]
    primary = EclipseTiming(0.0, outer, ingress, ingress, depths[0], True, covariance)
    secondary = replace(primary, middle=0.5, depth=depths[1])
    values = {"r1": R1, "r2": R2, "inclination": INCLINATION, "T14_1": outer * PERIOD}
    errors = {"r1": 0.002, "r2": 0.002, "inclination": 0.2, "T14_1": 5e-4}
    return ContactSolution(
        primary=primary,
        secondary=secondary,
        values=values,
        errors=errors,
        names=tuple(errors),
        covariance=np.diag(list(errors.values())) ** 2,
        others=({"r1": R2, "r2": R1, "inclination": INCLINATION},),
        notes=("k and 1/k both fit the contact times",),
    )


def made_up_solution(photometry: Photometry, velocities: Velocities | None = None) -> Solution:
    """A solution of the invented tables, complete and consistent, though nothing was fitted."""
    system = made_up_system(photometry.bands, velocities=velocities is not None)
    estimates = _estimates(system)
    sigmas = np.array([estimates[name].plus for name in system.free], dtype=float)
    names = (*system.free[:5], "r1", "r2")
    correlations = np.eye(len(names))
    correlations[2, 3] = correlations[3, 2] = -0.42
    return Solution(
        system=system,
        covariance=np.diag(sigmas**2),
        estimates=estimates,
        correlation_names=names,
        correlations=correlations,
        fit=_fit_summary(photometry, velocities, len(system.free)),
        light=_light_result(photometry),
        velocity=None if velocities is None else _velocity_result(velocities),
        contact=made_up_contact(),
        decisions=(
            Decision("orbit", "circular", "an eccentric orbit fits no better", {"delta_bic": 9.1}),
            Decision("levels", "night", "the nights differ by more than their errors"),
        ),
        alternatives=(Alternative("radii exchanged", {"radius_ratio": 1.28}, 31.0),),
        absent={"distance": "needs a magnitude, bolometric corrections and an extinction"},
        notes=("errors of band V are taken as given",),
    )


def _fit_summary(photometry: Photometry, velocities: Velocities | None, free: int) -> FitSummary:
    points = int(photometry.used.sum())
    if velocities is not None:
        points += int(velocities.used1.sum() + velocities.used2.sum())
    bands = photometry.bands
    both = {"star 1": 0.8, "star 2": 1.1} if velocities is not None else {}
    return FitSummary(
        points=points,
        free=free,
        chi2=1.02 * (points - free),
        reduced_chi2=1.02,
        rms_light=dict.fromkeys(bands, NIGHT_SIGMA),
        rms_velocity=both,
        error_scale=dict.fromkeys(bands, 1.01),
        jitter={f"north, {name}": 0.1 for name in both},
        raw_reduced_chi2=dict.fromkeys(bands, 1.04),
        method="made up",
        converged=True,
        iterations=7,
    )


def _light_result(photometry: Photometry) -> LightResult:
    phase = _folded(photometry.time)
    model = np.empty(phase.size)
    for number, band in enumerate(photometry.bands):
        rows = photometry.band == number
        model[rows] = made_up_light(phase[rows], band)
    why = photometry.why.copy()
    why[11] = len(photometry.reasons)
    reasons = (*photometry.reasons, "outlier of the fit")
    return LightResult(model, np.ones(phase.size), phase, why, reasons)


def _velocity_result(velocities: Velocities) -> VelocityResult:
    phase = _folded(velocities.time)
    return VelocityResult(
        made_up_velocity(phase, 1),
        made_up_velocity(phase, 2),
        phase,
        velocities.why1,
        velocities.why2,
        velocities.reasons,
    )


def made_up_findings() -> tuple[Finding, ...]:
    """A pass, a warning, and one without a number."""
    return (
        Finding(
            "fill-out", 0.41, 0.9, PASS, "both stars are well inside their lobes", "Eggleton 1983"
        ),
        Finding(
            "mirror solution", 31.0, 40.0, WARN, "radii exchanged fit only a little worse", "ours"
        ),
        Finding("period", None, None, PASS, "half and twice the period fit worse", "ours"),
    )


def made_up_markers() -> Markers:
    """Markers at the contacts of the invented pair."""
    contact = made_up_contact()
    secondary = contact.secondary
    assert secondary is not None
    return Markers(
        primary=contact.primary.contacts,
        secondary=secondary.contacts,
        level=((0.15, 0.35), (-0.15, -0.1)),
        excluded=((0.27, 0.28),),
    )


def made_up_session(
    bands: tuple[str, ...] = ("V",), *, solved: bool = True, velocities: bool = True
) -> Session:
    """A session on the invented tables, solved or only loaded; no file stands behind it."""
    photometry = made_up_photometry(bands)
    table = made_up_velocities() if velocities else None
    plan = Plan(period=PERIOD, epoch=EPOCH, priors=(Prior("radius_ratio", (0.78,), (0.05,)),))
    session = Session(
        name="invented pair",
        photometry_sources=(Source("nights.csv", {"time": "BJD"}, DIGEST),),
        velocity_sources=(Source("velocities.csv", {}, DIGEST[::-1]),) if velocities else (),
        photometry=photometry,
        velocities=table,
        plan=plan,
    )
    if not solved:
        return session
    solution = made_up_solution(photometry, table)
    findings = made_up_findings()
    return replace(
        session,
        exclusions=(Exclusion("light", "nights.csv", (40, 41), "clouds"),),
        markers=made_up_markers(),
        contact=solution.contact,
        system=solution.system,
        solution=solution,
        audit=findings,
        kept=(Kept("first try", plan, solution.system, solution, findings),),
        command="shadowscale solve nights.csv --velocities velocities.csv --out result",
    )
