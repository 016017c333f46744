"""Whether the stars that come out are stars."""

from __future__ import annotations

from math import exp, hypot, isfinite, log, log10, nan

from shadowscale.constants import DENSITY_SUN, LOGG_SUN
from shadowscale.fit.solution import ASSUMED, FIXED
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.words import capital, listed, number

LEAST_MASS, GREATEST_MASS = 1 / 12, 120.0  # [solar masses]
LEAST_RADIUS, GREATEST_RADIUS = 0.08, 1500.0  # [solar radii]
LEAST_GRAVITY, GREATEST_GRAVITY = -0.5, 5.5  # [dex cgs]
LEAST_DENSITY, GREATEST_DENSITY = 1e-8, 150.0  # [solar densities]
TOO_SMALL = 0.7  # of the radius with which a star of that mass begins to burn hydrogen
SURE = 3.0  # sigmas
NOT_EXCLUDED = 9.0  # in chi-squared


def masses(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Masses within the range of stars, by more than their errors."""
    found = {name: evidence.value(name) for name in ("M1", "M2")}
    found = {name: value for name, value in found.items() if isfinite(value)}
    if not found:
        return check.silent("masses need velocities of both stars, or an assumed mass of one.")
    shown = listed(
        [f"{name} = {number(value)}{_assumed(evidence, name)}" for name, value in found.items()]
    )
    bad = {
        name: value
        for name, value in found.items()
        if _beyond(value, evidence.sigma(name), LEAST_MASS, GREATEST_MASS)
    }
    if not bad:
        return check.passed(f"{shown} solar masses.", max(found.values()))
    worst = max(bad, key=lambda name: abs(log10(max(bad[name], 1e-9))))
    value = bad[worst]
    if 0.01 < value < LEAST_MASS:
        return check.warned(
            f"{worst} = {number(value)} solar masses is too little to burn hydrogen (limit 0.083): a brown "
            "dwarf, or a wrong velocity amplitude, inclination or assumed mass.",
            value,
            limit=LEAST_MASS,
        )
    return check.failed(
        f"{worst} = {number(value)} solar masses is no star's (1/12 to 120). Check the velocity amplitudes, "
        "their units, the period and the inclination.",
        value,
        limit=LEAST_MASS if value < LEAST_MASS else GREATEST_MASS,
    )


def _assumed(evidence: Evidence, name: str) -> str:
    estimate = evidence.solution.estimates.get(name)
    return " (assumed)" if estimate is not None and estimate.how in (ASSUMED, FIXED) else ""


def _beyond(value: float, sigma: float, lowest: float, highest: float) -> bool:
    """Whether a value lies outside a range by more than three sigma (or at all, without error)."""
    room = SURE * sigma if isfinite(sigma) and sigma > 0 else 0.0
    return value + room < lowest or value - room > highest or value <= 0


def radii(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Radii against the radius with which a star of that mass begins its life."""
    known = [star for star in (1, 2) if evidence.value(f"R{star}") > 0]
    if not known:
        return check.silent("radii in solar units need velocities of both stars.")
    ratios = {star: _against_young(evidence, star) for star in known}
    shown = listed([f"R{star} = {number(evidence.value(f'R{star}'))}" for star in known])
    for star in known:
        value, sigma = evidence.value(f"R{star}"), evidence.sigma(f"R{star}")
        if _beyond(value, sigma, 0.0, GREATEST_RADIUS):
            return check.failed(
                f"R{star} = {number(value)} solar radii is larger than any star. Check period, velocities and "
                "the length of the eclipses.",
                value,
                limit=GREATEST_RADIUS,
            )
        if _beyond(value, sigma, LEAST_RADIUS, GREATEST_RADIUS):
            return check.warned(
                f"R{star} = {number(value)} solar radii is smaller than a star that burns hydrogen: a white dwarf "
                "or a planet, or a wrong period, velocity amplitude or ratio of radii.",
                value,
                limit=LEAST_RADIUS,
            )
    small = [star for star in known if ratios[star] < TOO_SMALL]
    if small:
        star = small[0]
        return check.warned(
            f"Star {star} has {number(evidence.value(f'M{star}'))} solar masses but only "
            f"{number(evidence.value(f'R{star}'))} solar radii, {number(ratios[star])} of what a young star of that mass has: "
            "a white dwarf or stripped star, or a wrong mass, ratio of radii or third light.",
            ratios[star],
        )
    ratio = min(ratios.values(), key=lambda found: found if isfinite(found) else 1e9)
    return check.passed(f"{shown} solar radii.", ratio)


def _against_young(evidence: Evidence, star: int) -> float:
    """Radius over that of a star of the same mass on the zero-age main sequence."""
    mass = evidence.value(f"M{star}")
    return evidence.value(f"R{star}") / young_radius(mass) if mass > 0 else nan


def young_radius(mass: float) -> float:
    """Radius on the zero-age main sequence [solar radii], within some 15 % of observed stars.

    Two powers of the mass that meet near 1.66 solar masses, of the form given by
    Demircan & Kahraman 1991, Ap&SS 181, 313 (from memory).
    """
    return float(0.89 * mass**0.89 if mass < 1.66 else 1.01 * mass**0.57)


def gravities(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Surface gravities and mean densities within what stars have."""
    bad, shown = [], []
    for star in (1, 2):
        gravity, density = evidence.value(f"logg{star}"), evidence.value(f"density{star}")
        if not isfinite(gravity):
            gravity = _gravity(evidence, star)
        if isfinite(gravity):
            shown.append(f"log g{star} = {gravity:.2f}")
            if not LEAST_GRAVITY <= gravity <= GREATEST_GRAVITY:
                bad.append((f"star {star} has log g = {gravity:.2f} (stars: -0.5 to 5.5)", gravity))
        relative = density / DENSITY_SUN
        if isfinite(relative) and not LEAST_DENSITY <= relative <= GREATEST_DENSITY:
            bad.append(
                (
                    f"star {star} is {number(relative)} times as dense as the Sun (stars: 1e-8 to 150)",
                    gravity,
                )
            )
    if bad:
        words = listed([text for text, _ in bad])
        return check.failed(
            f"{capital(words)}. A compact star could be; more often period, radii or velocities are wrong.",
            bad[0][1],
        )
    if not shown:
        return check.passed(
            "No surface gravity without velocities; the mean densities are possible ones."
        )
    return check.passed(f"{listed(shown)}.")


def _gravity(evidence: Evidence, star: int) -> float:
    mass, radius = evidence.value(f"M{star}"), evidence.value(f"R{star}")
    return LOGG_SUN + log10(mass / radius**2) if mass > 0 and radius > 0 else nan


def order_of_densities(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Whether the more massive star is the less dense one, as with two stars of one age.

    The densities' ratio is q/k^3: only the mass ratio and the ratio of radii enter, with their errors.
    """
    mass1, mass2, k = evidence.value("M1"), evidence.value("M2"), evidence.value("radius_ratio")
    if not (mass1 > 0 and mass2 > 0 and k > 0):
        return check.silent("the order needs the masses of both stars.")
    q = mass2 / mass1
    error_q = evidence.sigma("mass_ratio") / q
    error = hypot(error_q, 3 * evidence.sigma("radius_ratio") / k)
    if not (error_q > 0 and error > 0):
        return check.silent("the mass ratio or the ratio of radii has no error.")
    heavy = 1 if q < 1 else 2
    # Positive where the heavier star is the denser one.
    excess = (3 * log(k) - log(q)) * (1 if heavy == 1 else -1)
    words = f"Star {heavy} is the more massive and {number(exp(min(abs(excess), 99)))} times as"
    limit = check.limit or 0.0
    if excess / error > limit and abs(log(q)) / error_q > limit:
        reason = (
            "the solution with the radii exchanged, which also fits, has the usual order and is the likelier one."
            if _mirror_is_open(evidence)
            else "perhaps the radii are exchanged, or mass was, or the pair is very young."
        )
        return check.warned(
            f"{words} dense as the other ({number(excess / error)} sigma). Two stars of one age are the other "
            f"way round; {reason}",
            excess / error,
        )
    return check.passed(
        f"{words} {'dense' if excess > 0 else 'thin'} as the other, as can be.", excess / error
    )


def _mirror_is_open(evidence: Evidence) -> bool:
    """Whether a solution with the larger star exchanged is among those not excluded."""
    k = evidence.value("radius_ratio")
    return any(
        (other.values.get("radius_ratio", k) - 1) * (k - 1) < 0 and other.delta_chi2 < NOT_EXCLUDED
        for other in evidence.solution.alternatives
    )


CHECKS = (
    Check(
        "masses",
        "Are the masses those of stars?",
        masses,
        GREATEST_MASS,
        "1/12 (hydrogen burning) to 120 solar masses (common practice), less three sigma",
    ),
    Check(
        "radii",
        "Are the radii possible for these masses?",
        radii,
        TOO_SMALL,
        "0.7 of the zero-age radius (form of Demircan & Kahraman 1991, Ap&SS 181, 313, from memory); "
        "0.08 to 1500 solar radii (common practice)",
    ),
    Check(
        "gravities and densities",
        "Are surface gravities and mean densities those of stars?",
        gravities,
        GREATEST_GRAVITY,
        "log g from -0.5 (supergiants) to 5.5 (smallest stars); 1e-8 to 150 solar densities (common practice)",
    ),
    Check(
        "order of densities",
        "Is the more massive star the less dense one?",
        order_of_densities,
        SURE,
        "of two stars of one age the more massive is the more evolved and the less dense; three sigma (common practice)",
    ),
)
