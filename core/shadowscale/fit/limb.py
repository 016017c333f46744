"""Limb darkening: what is held, what is free, where it starts, and under which prior."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import exp, hypot, log, log1p

import numpy as np

from shadowscale.constants import H_PLANCK, K_BOLTZMANN, C
from shadowscale.data.bands import wavelength_of
from shadowscale.data.limb_tables import LimbTable
from shadowscale.errors import UsageError
from shadowscale.fit.objective import Constraint
from shadowscale.fit.plan import Plan
from shadowscale.light.grey import grey_coefficients
from shadowscale.light.laws import LAWS
from shadowscale.quantities import key

UNKNOWN_TEFF = 6500.0  # [K] where none is given: middle of the range of well-studied pairs
UNKNOWN_LOGGS = (4.2, 4.2)
UNKNOWN_WAVELENGTH = 600.0  # [nm]
COOLEST, HOTTEST = 2500.0, 50000.0  # [K] where the grey atmosphere is asked
# Grey atmospheres miss line blanketing: against published tables and the measured Sun they are off by
# up to 0.1 in I(mu = 1/2), much the same way in every band and star. So the prior is wider than that,
# and most of it is one error common to all.
GREY_COMMON, GREY_OWN = 0.13, 0.08
# Between 4500 and 12000 K the coefficients move by this much to either side of UNKNOWN_TEFF.
BLIND = 0.10
# Spread between published tables (common practice), common in the same way.
TABLE_COMMON, TABLE_OWN = 0.04, 0.03


def grey_errors(*, blind: bool) -> tuple[float, float]:
    """Common and own sigma of a grey atmosphere's coefficients; `blind`: at a guessed temperature."""
    return hypot(GREY_COMMON, BLIND if blind else 0.0), GREY_OWN


def table_errors(*, blind: bool) -> tuple[float, float]:
    """Common and own sigma of a published table's coefficients; `blind`: at a guessed temperature."""
    return hypot(TABLE_COMMON, BLIND if blind else 0.0), TABLE_OWN


@dataclass(frozen=True)
class LimbChoice:
    """One star in one band: its coefficients, whether a fit moves them, under which priors, and why."""

    coefficients: tuple[float, ...]
    free: bool
    constraints: tuple[Constraint, ...]
    words: str


def wavelengths(plan: Plan, bands: tuple[str, ...]) -> dict[str, float]:
    """Wavelength [nm] of each band: as given, by its usual name, or a guess in the middle."""
    return {
        band: plan.wavelengths.get(band) or wavelength_of(band) or UNKNOWN_WAVELENGTH
        for band in bands
    }


def limb_choice(
    plan: Plan,
    star: int,
    band: str,
    *,
    wavelength: float,
    teff: float,
    logg: float,
    table: LimbTable | None,
    blind: bool = False,
) -> LimbChoice:
    """What to do with one star in one band; the user's word first, then a table, then grey.

    `blind`: the temperature is a guess, for which the prior is wider.

    UsageError where the number of coefficients is not the law's.
    """
    law = LAWS[plan.law]
    names = (key(f"limb_darkening{star}", band), f"limb_darkening{star}")
    fixed = next((plan.fixed[name] for name in names if name in plan.fixed), None)
    if fixed is not None:
        return LimbChoice(_checked(names[0], fixed, law.coefficients), False, (), "held as given")
    told_free = any(name in plan.free for name in names)
    prior = next((each for name in names for each in plan.priors if each.name == name), None)
    if prior is not None:
        values = _checked(names[0], prior.values, law.coefficients)
        rules = tuple(
            Constraint(key(f"limb_darkening{star}", band, n + 1), value, sigma)
            for n, (value, sigma) in enumerate(zip(values, prior.sigmas, strict=True))
        )
        return LimbChoice(values, True, rules, "free with the prior given")
    if table is not None:
        start = table.coefficients(teff, logg, band, law=plan.law)
        words = f"published table at {teff:.0f} K, log g {logg:.2f}"
        common, own = table_errors(blind=blind)
    else:
        start = grey_coefficients(min(max(teff, COOLEST), HOTTEST), wavelength, plan.law)
        words = f"grey atmosphere at {teff:.0f} K and {wavelength:.0f} nm"
        common, own = grey_errors(blind=blind)
    if told_free:
        return LimbChoice(start, True, (), f"{words}, start only")
    rules = _sampling_prior(plan.law, star, band, start=start, common=common, own=own)
    words = f"{words}, prior of sigma {common:.2f} common and {own:.2f} each"
    return LimbChoice(start, True, rules, words)


def _checked(name: str, values: tuple[float, ...], wanted: tuple[str, ...]) -> tuple[float, ...]:
    if len(values) != len(wanted):
        raise UsageError(
            name,
            ",".join(f"{v:g}" for v in values),
            expected=f"{len(wanted)} coefficients ({', '.join(wanted)})",
        )
    return tuple(float(value) for value in values)


def _sampling_prior(
    law_name: str, star: int, band: str, *, start: tuple[float, ...], common: float, own: float
) -> tuple[Constraint, ...]:
    """A prior on the law's sampling coordinates; wider on those beyond the second, which are degenerate."""
    law = LAWS[law_name]
    found = []
    for number, value in enumerate(law.to_sampling(np.array(start))):
        wider = 1.0 if number < 2 else 4.0
        found.append(
            Constraint(
                key(f"limb_darkening{star}", band, number + 1), float(value), own * wider,
                coordinate=True, common=f"limb darkening {number + 1}", common_sigma=common * wider,
            )
        )  # fmt: skip
    return tuple(found)


def teff_from_brightness(teff1: float, ratio: float, wavelength: float) -> float:
    """Temperature [K] of star 2 from the mean surface-brightness ratio at `wavelength` [nm], by Planck's law."""
    if ratio <= 0.0:
        return COOLEST
    x1 = H_PLANCK * C / (wavelength * 1e-9 * K_BOLTZMANN * teff1)
    x2 = log1p((exp(x1) - 1.0) / ratio) if x1 < 500 else x1 - log(ratio)
    return float(min(max(teff1 * x1 / x2, COOLEST), HOTTEST))


def teffs(
    plan: Plan, brightness: Mapping[str, float], at: Mapping[str, float]
) -> tuple[float, float, str]:
    """Temperatures for limb darkening [K], and how they were had."""
    band = next(iter(brightness))
    if plan.teff1 and plan.teff2:
        return plan.teff1[0], plan.teff2[0], "as given"
    if plan.teff2:
        return (
            teff_from_brightness(plan.teff2[0], 1 / max(brightness[band], 1e-6), at[band]),
            plan.teff2[0],
            ("star 1 from the surface-brightness ratio"),
        )
    first = plan.teff1[0] if plan.teff1 else UNKNOWN_TEFF
    words = "star 2 from the surface-brightness ratio"
    if not plan.teff1:
        words = f"star 1 taken as {UNKNOWN_TEFF:.0f} K for want of a value, " + words
    return first, teff_from_brightness(first, brightness[band], at[band]), words


def limb_choices(
    plan: Plan,
    bands: tuple[str, ...],
    values: Mapping[str, float],
    *,
    logg: Sequence[float] = UNKNOWN_LOGGS,
    table: LimbTable | None = None,
) -> tuple[dict[tuple[int, str], LimbChoice], str]:
    """Choices for both stars in every band at the brightness ratios of `values`, and their story."""
    at = wavelengths(plan, bands)
    brightness = {band: values[key("surface_brightness_ratio", band)] for band in bands}
    teff1, teff2, words = teffs(plan, brightness, at)
    blind = plan.teff1 is None and plan.teff2 is None
    choices = {
        (star, band): limb_choice(
            plan, star, band, wavelength=at[band], teff=(teff1, teff2)[star - 1],
            logg=logg[star - 1], table=table, blind=blind,
        )
        for star in (1, 2) for band in bands
    }  # fmt: skip
    told = sorted({f"star {star}, {band}: {each.words}" for (star, band), each in choices.items()})
    return choices, f"{plan.law} law; {'; '.join(told)}; temperatures: {words}"
