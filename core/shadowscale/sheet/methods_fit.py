"""The methods paragraph on the fit: free parameters, decisions, priors, errors, outliers."""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import Decision, Solution
from shadowscale.fit.weights import EXPECTED_FALSE
from shadowscale.quantities import QUANTITIES, parse_key
from shadowscale.sheet.citing import Methods, listed, symbol_of
from shadowscale.sheet.symbols import plain, unit_words

LEVEL_WORDS = {
    "one": "one brightness level a band was",
    "night": "a brightness level for every night of each band was",
    "trend": "a brightness level and a linear trend for every night of each band were",
}
# What a test asked, by the words of the fit.
TESTED = {
    "a level a night": "a brightness level for every night instead of one",
    "a level and a slope a night": "a linear trend for every night",
}


def fit_sentences(solution: Solution, plan: Plan, methods: Methods) -> list[str]:
    """What was free, and what the data decided."""
    system, fit = solution.system, solution.fit
    free = [symbol_of(name, system.law) for name in system.free]
    what = "light curves" if solution.velocity is None else "light curves and velocities"
    sentences = [
        f"All {what} were fitted together: {plain(fit.method)}.",
        f"The free parameters were {listed(free)}.",
        f"In the fit, {LEVEL_WORDS.get(system.levels, system.levels)} solved linearly "
        f"{methods.cite('golub1973')}.",
    ]
    decided = [
        each for each in solution.decisions if each.what not in ("limb darkening", "small effects")
    ]
    if any("needed" in each.numbers for each in decided):
        sentences.append(
            "What the data should decide was settled by likelihood-ratio tests "
            f"{methods.cite('wilks1938')}."
        )
    sentences += [_decided(each) for each in decided]
    sentences.append(_priors(solution, plan))
    return sentences


def _decided(decision: Decision) -> str:
    """A decision as a sentence; a test with what it found and what it asked."""
    numbers, words = decision.numbers, plain(decision.words)
    if {"gain", "extra", "needed"} <= set(numbers):
        what = TESTED.get(words.split(" wins", 1)[0], words.split(" wins", 1)[0])
        gain, extra, needed = (numbers[name] for name in ("gain", "extra", "needed"))
        found = (
            f"more than the {needed:.1f} needed at the level of one per cent: adopted"
            if gain > needed
            else f"where {needed:.1f} is needed at the level of one per cent: not adopted"
        )
        many = "parameter" if extra == 1 else "parameters"
        words = f"{what} lowers chi-squared by {gain:.1f} for {extra:.0f} more {many}, {found}"
    elif decision.what == "period":
        words = f"half and twice the period were weighed: {words}"
    return words[:1].upper() + words[1:].rstrip(".") + "."


def _priors(solution: Solution, plan: Plan) -> str:
    texts = []
    for prior in plan.priors:
        pairs = zip(prior.values, prior.sigmas, strict=True)
        numbers = listed([f"{value:g} \N{PLUS-MINUS SIGN} {sigma:g}" for value, sigma in pairs])
        unit = unit_words(QUANTITIES[parse_key(prior.name).name].unit)
        texts.append(f"{symbol_of(prior.name, solution.system.law)} = {numbers} {unit}".rstrip())
    if not texts:
        return "No priors were given by the observer."
    return f"Gaussian priors of the observer: {listed(texts)}."


def weight_sentences(
    solution: Solution, photometry: Photometry, velocities: Velocities | None
) -> list[str]:
    """How errors were scaled and rows set aside."""
    fit = solution.fit
    scales = [f"{scale:.3f} in {plain(band)}" for band, scale in fit.error_scale.items()]
    guessed = [
        plain(band) for band, flag in zip(photometry.bands, photometry.errors_from_scatter) if flag
    ]
    sentences = [
        "Errors of the photometry were multiplied so that reduced chi-squared is one in each band "
        f"({listed(scales)})."
    ]
    if guessed:
        sentences.append(
            f"The files gave no errors for {listed(guessed)}; they were estimated from the scatter."
        )
    if velocities is not None:
        sentences.append(_velocity_errors(solution, velocities))
    outliers = _count_outliers(solution)
    sentences.append(
        f"The fit set aside {outliers} measurements as outliers: those farther from the model than "
        f"the limit beyond which {EXPECTED_FALSE:g} of all good ones are expected, never less than "
        "3.5 (photometry) or 5 (velocities) times the robust scatter."
        if outliers
        else "No measurement was set aside as an outlier."
    )
    sentences.append(
        f"Chi-squared is {fit.chi2:.1f} for {fit.points} measurements and {fit.free} free "
        f"quantities, levels included ({fit.reduced_chi2:.3f} for each degree of freedom)."
    )
    return sentences


def _velocity_errors(solution: Solution, velocities: Velocities) -> str:
    if velocities.errors_from_scatter:
        return "The velocities came without errors; their scatter about the model was taken."
    jitter = [f"{value:.2g} km/s ({plain(name)})" for name, value in solution.fit.jitter.items()]
    if not jitter:
        return "Errors of the velocities were taken as given."
    return f"To the errors of the velocities a jitter was added in quadrature: {listed(jitter)}."


def _count_outliers(solution: Solution) -> int:
    count = 0
    results = [(solution.light.why, solution.light.reasons)]
    if solution.velocity is not None:
        reasons = solution.velocity.reasons
        results += [(solution.velocity.why1, reasons), (solution.velocity.why2, reasons)]
    for why, reasons in results:
        codes = [code for code, reason in enumerate(reasons) if reason.startswith("outlier")]
        count += int(np.isin(why, codes).sum())
    return count
