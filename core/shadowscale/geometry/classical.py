"""The classical solution: from contact times and depths of one or two eclipses to the geometry.

Circular orbits (theta = pi T/P):

    (r1+r2)^2 = 1 - cos^2(theta14) sin^2 i,    (r1-r2)^2 = 1 - cos^2(theta23) sin^2 i

Two equations for three unknowns; the third comes from the depths. In a total eclipse the light left
is the front star's alone; the annular one then gives k. Here the same equations are kept on the exact
eccentric orbit (`contact_equations`) and solved together by weighted least squares, so that what is
measured twice counts twice, and what is not measured stays as wide as what was believed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from math import acos, degrees, exp, isfinite, log, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.geometry.contact_equations import (
    COS2I,
    ECOSW,
    ESINW,
    LOG_BRIGHTNESS,
    LOG_RATIO,
    SHIFT,
    SUM,
    THIRD,
    UNKNOWNS,
    Equations,
    contact_equations,
)
from shadowscale.geometry.contacts import ContactSolution, EclipseTiming
from shadowscale.geometry.discs import hidden_light
from shadowscale.geometry.least_squares import HIGHEST, LOWEST, QUICK, Candidate, Guess, solve
from shadowscale.orbit import _kernels
from shadowscale.orbit.longitude import ecosw_of_phase

Floats = NDArray[np.float64]

CENTRAL_GAIN = 1.15  # a disc in front of the bright centre hides that much more than its area
WIDEST_LOG_RATIO = (log(0.1), log(3.0))  # of partial eclipses, whose depths may allow still more
BELIEVED_LOG_BRIGHTNESS = (log(0.6), 0.6)  # of a pair whose other eclipse was not seen
SURE = 9.0  # chi2 by which one solution must beat another to stand alone
SMALLEST_TIME_ERROR = 1e-5  # of a duration
_GRID = np.linspace(0.0, 0.97, 30) ** 2  # of cos^2 i
SMALLEST_DEPTH, LARGEST_DEPTH = 1e-5, 0.9999

UNDETERMINED = (
    "Partial eclipses have no inner contacts: the ratio of the radii is weakly determined, and k and 1/k "
    "may both fit."
)
ONE_ECLIPSE = (
    "Only one eclipse was given: a circular orbit is taken, and the surface-brightness ratio is assumed, "
    "so radii and inclination are rough."
)
LIMB_NOTE = "Depths were read with one linear limb-darkening law (u = 0.5) for both stars."


@dataclass(frozen=True, eq=False)
class Ground:
    """Eclipses fit for use, their equations, and the guesses from which to solve them."""

    eclipses: tuple[EclipseTiming, ...]
    equations: Equations
    guesses: tuple[Guess, ...]
    log_ratios: tuple[float, float]  # that the depths allow
    notes: tuple[str, ...]

    @property
    def flat(self) -> bool:
        """Whether any inner contact was seen."""
        return any(eclipse.flat for eclipse in self.eclipses)


def classical_solution(
    primary: EclipseTiming,
    secondary: EclipseTiming | None,
    *,
    period: float,
    light_below1: float | None = None,
    light_below2: float | None = None,
) -> ContactSolution:
    """See `shadowscale.geometry.contacts.contact_solution`."""
    if not (isfinite(period) and period > 0):
        raise ValueError(f"period: expected a positive number, found {period}")
    ground = prepared(primary, secondary, (light_below1, light_below2))
    best, others, notes = solutions(ground)
    values, errors, names, covariance = _written(ground, best, period)
    return ContactSolution(
        primary,
        secondary,
        values,
        errors,
        names,
        covariance,
        tuple(described(other.unknowns) for other in others),
        (*ground.notes, *notes, LIMB_NOTE),
    )


def prepared(
    primary: EclipseTiming,
    secondary: EclipseTiming | None,
    light_below: tuple[float | None, float | None] = (None, None),
) -> Ground:
    """Check the eclipses and set up their equations and guesses."""
    notes: list[str] = []
    given = [primary] if secondary is None else [primary, secondary]
    eclipses = tuple(
        _usable(eclipse, name, below, notes)
        for eclipse, name, below in zip(given, ("primary", "secondary"), light_below)
    )
    if secondary is not None and not 0.02 < (secondary.middle - primary.middle) % 1.0 < 0.98:
        raise ValueError(
            f"secondary: expected another eclipse than the primary, found its middle at phase {secondary.middle}"
        )
    equations = contact_equations(eclipses)
    allowed = _allowed(eclipses)
    guesses = tuple(_guesses(eclipses, equations, allowed))
    return Ground(eclipses, equations, guesses, allowed, tuple(notes))


def _usable(
    eclipse: EclipseTiming, name: str, below: float | None, notes: list[str]
) -> EclipseTiming:
    """The eclipse with what noise made impossible put right, or ValueError if it is nonsense."""
    numbers = (eclipse.middle, eclipse.duration, eclipse.ingress, eclipse.egress, eclipse.depth)
    if not all(map(isfinite, numbers)):
        raise ValueError(f"{name}: expected finite numbers, found {numbers}")
    if not 0 < eclipse.duration < 0.5:
        raise ValueError(f"{name}: expected a duration of 0...0.5 cycles, found {eclipse.duration}")
    if eclipse.ingress < 0 or eclipse.egress < 0:
        raise ValueError(
            f"{name}: expected ingress and egress not negative, found {eclipse.ingress}, {eclipse.egress}"
        )
    if eclipse.covariance.shape != (5, 5):
        raise ValueError(f"{name}: expected a (5, 5) covariance, found {eclipse.covariance.shape}")
    depth = eclipse.depth if below is None else 1.0 - below
    if not SMALLEST_DEPTH <= depth <= LARGEST_DEPTH:
        notes.append(
            f"The {name} depth of {depth:.4g} is outside 0...1; the nearest possible was used."
        )
        depth = min(max(depth, SMALLEST_DEPTH), LARGEST_DEPTH)
    flat = eclipse.flat
    if flat and eclipse.ingress + eclipse.egress >= eclipse.duration:
        notes.append(f"The {name} has no room for a flat part: it is taken as partial.")
        flat = False
    covariance = np.where(np.isfinite(eclipse.covariance), eclipse.covariance, 0.0)
    floor = [(SMALLEST_TIME_ERROR * eclipse.duration) ** 2] * 4 + [(1e-4 * depth) ** 2]
    return replace(eclipse, depth=depth, flat=flat, covariance=covariance + np.diag(floor))


def _allowed(eclipses: tuple[EclipseTiming, ...]) -> tuple[float, float]:
    """ln k that the depths allow: each star must be large enough to hide what is hidden of the other."""
    flat = any(eclipse.flat for eclipse in eclipses)
    low, high = (-4.5, 4.5) if flat else WIDEST_LOG_RATIO
    first = eclipses[0].depth
    second = eclipses[1].depth if len(eclipses) > 1 else 0.0
    low = max(low, 0.5 * log(first / (CENTRAL_GAIN * max(1 - second, 0.02))))
    if second > 0:
        high = min(high, -0.5 * log(second / (CENTRAL_GAIN * max(1 - first, 0.02))))
    if not low < high:  # both depths ask for nearly equal stars hidden whole
        low = high = (low + high) / 2
    return low - 0.02, high + 0.02


def _guesses(
    eclipses: tuple[EclipseTiming, ...], equations: Equations, allowed: tuple[float, float]
) -> list[Guess]:
    """One guess for each side of k = 1 with flat eclipses, the middle of what is allowed without."""
    base = _base(eclipses)
    low, high = allowed
    first = eclipses[0].depth
    if len(eclipses) == 1:
        base = base.believing(LOG_BRIGHTNESS, *BELIEVED_LOG_BRIGHTNESS)
    if not any(eclipse.flat for eclipse in eclipses):
        found = [base.believing(LOG_RATIO, (low + high) / 2, (high - low) / sqrt(12.0))]
    else:
        found = []
        for log_ratio in (min(low, -0.01), max(high, 0.01)):
            sigma = 0.4 if len(eclipses) == 1 else np.inf
            if len(eclipses) == 1 and log_ratio > 0:  # total: the depth says nothing about k
                log_ratio = 0.5 * (log((1 - first) / first) - BELIEVED_LOG_BRIGHTNESS[0])
                log_ratio = min(max(log_ratio, 0.05), 2.0)
            found.append(base.believing(LOG_RATIO, log_ratio, sigma))
    return [placed(guess, eclipses, equations) for guess in found]


def _base(eclipses: tuple[EclipseTiming, ...]) -> Guess:
    """Orbit from the durations and the middles; nothing of the stars yet."""
    unknowns = np.zeros(UNKNOWNS)
    unknowns[SHIFT] = eclipses[0].middle
    free = np.ones(UNKNOWNS, dtype=bool)
    free[THIRD] = False
    if len(eclipses) == 2:
        first, second = eclipses
        h = (second.duration - first.duration) / (second.duration + first.duration)
        unknowns[ESINW] = min(max(h, -0.8), 0.8)
        unknowns[ECOSW] = ecosw_of_phase(
            (second.middle - first.middle) % 1.0, esinw=unknowns[ESINW]
        )
    else:
        free[[ECOSW, ESINW]] = False
    return Guess(unknowns, free, np.zeros(UNKNOWNS), np.full(UNKNOWNS, np.inf))


def placed(guess: Guess, eclipses: tuple[EclipseTiming, ...], equations: Equations) -> Guess:
    """Radii, inclination and brightness for the guess's orbit and k."""
    unknowns = guess.unknowns.copy()
    if any(eclipse.flat for eclipse in eclipses):
        _place_by_contacts(unknowns, equations)
    else:
        _place_by_depths(unknowns, eclipses, equations)
    unknowns[LOG_BRIGHTNESS] = log_brightness(unknowns, eclipses, equations)
    return replace(guess, unknowns=unknowns)


def plane(unknowns: Floats, equations: Equations) -> tuple[Floats, Floats]:
    """X^2 and Y^2 of the orbit at the contacts and middles: delta^2 = X^2 + Y^2 cos^2 i."""
    edge_on = unknowns.copy()
    edge_on[COS2I] = 0.0
    sky = equations.sky(edge_on, equations.times)
    return sky[:, _kernels.DELTA] ** 2, sky[:, _kernels.Z] ** 2


def _place_by_contacts(unknowns: Floats, equations: Equations) -> None:
    """(r1+r2)^2 and cos^2 i from the contacts: linear once the orbit and k are given."""
    along, across = plane(unknowns, equations)
    c = equations.contacts
    half = np.tanh(abs(unknowns[LOG_RATIO]) / 2)
    size = np.where(equations.inner, half * half, 1.0)
    design = np.column_stack([size, -across[:c]])
    square, cos2i = np.linalg.lstsq(design, along[:c], rcond=None)[0]
    if cos2i < 0:
        cos2i, square = 0.0, along[:c][~equations.inner].mean()
    unknowns[COS2I] = min(cos2i, 0.9)
    unknowns[SUM] = sqrt(min(max(square, 1e-8), 0.8))


def _place_by_depths(
    unknowns: Floats, eclipses: tuple[EclipseTiming, ...], equations: Equations
) -> None:
    """The inclination at which both depths together account for all the light."""
    along, across = plane(unknowns, equations)
    c = equations.contacts
    cos2i = _GRID
    outer = np.flatnonzero(~equations.inner)
    total = np.sqrt(along[outer].mean() + across[outer].mean() * cos2i)
    k = exp(unknowns[LOG_RATIO])
    share = np.zeros(cos2i.size)
    if len(eclipses) == 1:
        share += 1 / (1 + 1 / (exp(BELIEVED_LOG_BRIGHTNESS[0]) * k * k))
    for number, eclipse in enumerate(eclipses):
        delta = np.sqrt(along[c + number] + across[c + number] * cos2i)
        radius = total / (1 + k) * (1.0 if number == 0 else k)
        ratio = np.full(cos2i.size, k if number == 0 else 1 / k)
        share = share + eclipse.depth / np.maximum(hidden_light(delta / radius, ratio), 1e-9)
    # Shares of the two stars add up to 1; they grow as the eclipse becomes more grazing.
    place = int(np.argmin(np.abs(np.log(share))))
    unknowns[COS2I], unknowns[SUM] = cos2i[place], min(total[place], 0.9)


def log_brightness(
    unknowns: Floats, eclipses: tuple[EclipseTiming, ...], equations: Equations
) -> float:
    """ln J from the depths at the guess's geometry."""
    k = exp(unknowns[LOG_RATIO])
    sky = equations.sky(unknowns, equations.times[equations.contacts :])
    radii = unknowns[SUM] / (1 + k) * np.array([1.0, k])
    ratio = np.array([k, 1 / k])
    count = len(eclipses)
    hidden = np.maximum(hidden_light(sky[:, 0] / radii[:count], ratio[:count]), 1e-4)
    light1 = min(max(eclipses[0].depth / hidden[0], 1e-3), 0.999)
    light2 = 1 - light1 if count == 1 else eclipses[1].depth / hidden[1]
    found = log(light2 / light1 / k**2)
    return float(min(max(found, LOWEST[LOG_BRIGHTNESS]), HIGHEST[LOG_BRIGHTNESS]))


def solutions(
    ground: Ground, *, steps: tuple[int, ...] = QUICK
) -> tuple[Candidate, list[Candidate], list[str]]:
    """The solution that is given, the others that the same data allow, and what to say."""
    notes: list[str] = []
    found = sorted(
        (solve(ground.equations, guess, steps=steps) for guess in ground.guesses), key=_rank
    )
    best = found[0]
    if len(ground.eclipses) == 1:
        notes.append(ONE_ECLIPSE)
    if ground.flat:
        found = _with_third_light(ground, found, notes)
        best = found[0]
        others = [other for other in found[1:] if other.chi2 - best.chi2 < SURE]
        if others:
            notes.append("k and 1/k both fit these times and depths.")
    else:
        notes.append(UNDETERMINED)
        others = _along_the_valley(ground, best)
    if best.unknowns[COS2I] < sqrt(best.covariance[COS2I, COS2I]):
        notes.append("The eclipses are central within the errors: i may be 90 deg.")
    return best, others, notes


def _rank(candidate: Candidate) -> float:
    """chi2; where it does not decide, less unlike stars, star 2 not the brighter in its surface."""
    bright = max(0.0, float(candidate.unknowns[LOG_BRIGHTNESS]))
    return candidate.chi2 + 2 * bright + 0.5 * abs(float(candidate.unknowns[LOG_RATIO]))


def _with_third_light(ground: Ground, found: list[Candidate], notes: list[str]) -> list[Candidate]:
    """Let third light explain depths that the contacts contradict."""
    best = found[0]
    if best.chi2 < SURE + len(ground.equations.times):
        return found
    diluted = sorted(
        (
            solve(
                ground.equations,
                replace(other.guess, unknowns=other.unknowns).believing(THIRD, 0.0, 0.3),
            )
            for other in found
        ),
        key=_rank,
    )
    third = float(diluted[0].unknowns[THIRD])
    if diluted[0].chi2 > best.chi2 - SURE or third < 0.01:
        return found
    notes.append(
        f"The depths are shallower than the contacts ask for; third light of about {third:.2f} would explain it."
    )
    return diluted


def _along_the_valley(ground: Ground, best: Candidate) -> list[Candidate]:
    """Other ratios that the same partial eclipses allow: the mirror, or both sides of k near 1."""
    low, high = ground.log_ratios
    middle = best.unknowns[LOG_RATIO]
    aside = (high - low) / 4
    mirrored = abs(middle) > 0.1 and low <= -middle <= high
    found: list[Candidate] = []
    for log_ratio in (-middle,) if mirrored else (middle - aside, middle + aside):
        if abs(log_ratio - middle) < 0.05:
            continue
        guess = best.guess.believing(LOG_RATIO, log_ratio, 0.02)
        other = solve(ground.equations, placed(guess, ground.eclipses, ground.equations))
        if other.chi2 - best.chi2 < SURE:
            found.append(other)
    return found


def described(unknowns: Floats) -> dict[str, float]:
    """The geometry of a solution by name."""
    k = exp(unknowns[LOG_RATIO])
    total = float(unknowns[SUM])
    return {
        "r1": total / (1 + k),
        "r2": total * k / (1 + k),
        "inclination": degrees(acos(sqrt(unknowns[COS2I]))),
        "radius_sum": total,
        "radius_ratio": k,
        "ecosw": float(unknowns[ECOSW]),
        "esinw": float(unknowns[ESINW]),
        "light_ratio": exp(unknowns[LOG_BRIGHTNESS]) * k * k,
        "surface_brightness_ratio": exp(unknowns[LOG_BRIGHTNESS]),
    }


def _slopes(candidate: Candidate) -> Floats:
    """Derivatives of `described` to the unknowns, (9, 8)."""
    unknowns = candidate.unknowns
    named = described(unknowns)
    k, total = named["radius_ratio"], named["radius_sum"]
    out = np.zeros((9, UNKNOWNS))
    out[0, SUM], out[0, LOG_RATIO] = 1 / (1 + k), -total * k / (1 + k) ** 2
    out[1, SUM], out[1, LOG_RATIO] = k / (1 + k), total * k / (1 + k) ** 2
    # At 90 deg the derivative is infinite; half a sigma away it gives the right size.
    cos2i = max(unknowns[COS2I], sqrt(candidate.covariance[COS2I, COS2I]) / 2, 1e-8)
    out[2, COS2I] = -np.degrees(0.5 / sqrt(cos2i * (1 - min(cos2i, 0.99))))
    out[3, SUM] = 1.0
    out[4, LOG_RATIO] = k
    out[5, ECOSW] = out[6, ESINW] = 1.0
    out[7, LOG_BRIGHTNESS], out[7, LOG_RATIO] = named["light_ratio"], 2 * named["light_ratio"]
    out[8, LOG_BRIGHTNESS] = named["surface_brightness_ratio"]
    return out


def _written(
    ground: Ground, best: Candidate, period: float
) -> tuple[Mapping[str, float], Mapping[str, float], tuple[str, ...], Floats]:
    """Values, errors, names and covariance: the geometry, then what was measured directly."""
    derived = described(best.unknowns)
    slopes = _slopes(best)
    kept = [row for row, name in enumerate(derived) if name not in _missing(ground)]
    names = [name for name in derived if name not in _missing(ground)]
    values = {name: derived[name] for name in names}
    rows = []
    for number, eclipse in enumerate(ground.eclipses):
        measured = {f"T14_{number + 1}": (eclipse.duration, [0, 1, 0, 0, 0], period)}
        if eclipse.flat:
            inner = eclipse.duration - eclipse.ingress - eclipse.egress
            measured[f"T23_{number + 1}"] = (inner, [0, 1, -1, -1, 0], period)
        measured[f"depth{number + 1}"] = (eclipse.depth, [0, 0, 0, 0, 1], 1.0)
        for name, (value, parts, unit) in measured.items():
            values[name] = value * unit
            row = np.zeros(ground.equations.covariance.shape[0])
            row[5 * number : 5 * number + 5] = np.array(parts) * unit
            rows.append(row)
            names.append(name)
    direct = np.array(rows)
    spread = ground.equations.covariance
    cross = slopes[kept] @ best.gain @ spread @ direct.T
    covariance = np.block(
        [
            [slopes[kept] @ best.covariance @ slopes[kept].T, cross],
            [cross.T, direct @ spread @ direct.T],
        ]
    )
    errors = dict(zip(names, np.sqrt(np.maximum(np.diag(covariance), 0.0)).tolist()))
    return values, errors, tuple(names), covariance


def _missing(ground: Ground) -> tuple[str, ...]:
    """What these eclipses cannot give."""
    if len(ground.eclipses) == 2:
        return ()
    orbit = ("ecosw", "esinw")
    return orbit if ground.flat else (*orbit, "light_ratio", "surface_brightness_ratio")
