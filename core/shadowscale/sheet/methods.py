"""The methods paragraph: what was done in this very solution, in sentences that may be printed.

Every sentence follows from the solution, its plan or its tables; what was not done is not told of.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import FITTED, Decision, Solution
from shadowscale.fit.weights import EXPECTED_FALSE
from shadowscale.light.laws import LAWS
from shadowscale.quantities import QUANTITIES, parse_key
from shadowscale.sheet.references import LIBRARIES, REFERENCES
from shadowscale.sheet.sheet import Sheet
from shadowscale.sheet.symbols import coefficient_sign, marked, plain, unit_words

LAW_PAPERS = {
    "linear": "schwarzschild1906",
    "quadratic": "kopal1950",
    "square-root": "diazcordoves1992",
    "logarithmic": "klinglesmith1970",
    "power-2": "hestroffer1997",
    "four-parameter": "claret2000",
}
SAMPLING_PAPERS = {"quadratic": "kipping2013", "power-2": "maxted2018"}
EFFECT_PAPERS = {
    "ellipsoidal": ("morris1993", "vonzeipel1924", "lucy1967"),
    "reflection": ("russell1916",),
    "beaming": ("loeb2003",),
}
EFFECT_NAMES = {
    "ellipsoidal": "the ellipsoidal variation",
    "reflection": "reflection",
    "beaming": "Doppler beaming",
}
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


@dataclass
class Methods:
    """Paragraphs as they grow, and the works that they cite."""

    paragraphs: list[str] = field(default_factory=list)
    cited: list[str] = field(default_factory=list)

    def cite(self, *keys: str) -> str:
        """The works in brackets, as a sentence has them."""
        self.cited += [key for key in keys if key not in self.cited]
        return "(" + "; ".join(REFERENCES[key].cited for key in keys) + ")"

    def add(self, sentences: Iterable[str]) -> None:
        """A paragraph of sentences; empty ones are left out."""
        self.paragraphs.append(" ".join(sentence for sentence in sentences if sentence))


def methods_of(
    sheet: Sheet,
    solution: Solution,
    photometry: Photometry,
    *,
    velocities: Velocities | None = None,
    plan: Plan,
) -> Methods:
    """What was done, in prose, with the works it rests on."""
    methods = Methods()
    methods.add(_data(photometry, velocities, solution, plan, methods))
    methods.add(_model(solution, methods))
    methods.add(_fit(solution, plan, methods))
    methods.add(_weights(solution, photometry, velocities))
    methods.add([*_dimensions(solution, sheet, methods), _distance(solution, plan)])
    methods.add(_software(sheet, methods))
    return methods


def listed(items: Sequence[str]) -> str:
    """Words as a sentence lists them."""
    if len(items) < 2:
        return "".join(items)
    return ", ".join(items[:-1]) + " and " + items[-1]


def symbol_of(text: str, law: str) -> str:
    """The symbol of a key, with its coefficient and band or source."""
    key = parse_key(text)
    words = marked(QUANTITIES[key.name].tex)
    if key.number is not None:
        words += f" {coefficient_sign(LAWS[law].coefficients[key.number - 1])}"
    return words + (f" [{plain(key.label)}]" if key.label is not None else "")


def _data(
    photometry: Photometry,
    velocities: Velocities | None,
    solution: Solution,
    plan: Plan,
    methods: Methods,
) -> list[str]:
    light = solution.light
    used = [
        int(np.count_nonzero((light.why == 0) & (photometry.band == number)))
        for number in range(len(photometry.bands))
    ]
    counts = [f"{count} in {plain(band)}" for count, band in zip(used, photometry.bands)]
    sentences = [
        f"The photometry holds {photometry.time.size} measurements, of which {sum(used)} take part "
        f"({listed(counts)})."
    ]
    if velocities is not None and solution.velocity is not None:
        result = solution.velocity
        per_star = [
            f"{int(np.count_nonzero(why == 0))} of star {star}"
            for star, why in ((1, result.why1), (2, result.why2))
            if np.any(why == 0)
        ]
        many = len(velocities.sources) > 1
        source = f" from {listed([plain(name) for name in velocities.sources])}" if many else ""
        sentences.append(f"The radial velocities are {listed(per_star)}{source}.")
    else:
        sentences.append("No radial velocities were used, so that no masses are given.")
    sentences.append(f"Times are in {photometry.time_scale}.")
    if plan.period is None:
        cited = methods.cite("kovacs2002", "schwarzenberg1989")
        sentences.append(
            "The period was found in the photometry by a search with two boxes and by the "
            f"dispersion of the folded light {cited}."
        )
    return sentences


def _model(solution: Solution, methods: Methods) -> list[str]:
    system = solution.system
    eccentric = solution.estimates["eccentricity"].value > 0
    kernel = "mandel2002", "agol2020"
    exact = system.law in ("linear", "quadratic")
    how = "in closed form" if exact else "in closed form where the law allows and by quadrature"
    orbit = "an eccentric" if eccentric else "a circular"
    sentences = [
        f"The light curves were modelled as two limb-darkened spheres on {orbit} Keplerian orbit; "
        f"the light that each loses in eclipse was computed {how} {methods.cite(*kernel)}.",
        _limb(solution, methods),
    ]
    if system.light_time:
        sentences.append(
            "Each star is seen where it was when its own light left it "
            f"{methods.cite('kaplan2010')}."
        )
    if system.exposure > 0:
        sentences.append(f"The model was averaged over exposures of {system.exposure:g} s.")
    sentences.append(_third_light(solution))
    sentences += _effects(solution, methods)
    return sentences


def _limb(solution: Solution, methods: Methods) -> str:
    law = LAWS[solution.system.law]
    free = any(name.startswith("limb_darkening") for name in solution.system.free)
    words = f"Limb darkening follows the {law.name} law {methods.cite(LAW_PAPERS[law.name])}"
    told = " ".join(each.words for each in solution.decisions if each.what == "limb darkening")
    if "grey atmosphere" in told:
        methods.cite("chandrasekhar1960")
        words += ", starting from the grey atmosphere (Chandrasekhar 1960)"
    if not free:
        return words + "; all coefficients were held."
    paper = SAMPLING_PAPERS.get(law.name)
    names = listed([_sampling(name) for name in law.sampling_names])
    words += f". Fitted were its {names}" + (f" {methods.cite(paper)}" if paper else "")
    detail = plain(told.removeprefix(f"{law.name} law; "))
    return f"{words}, with these starting values and priors: {detail}." if detail else f"{words}."


def _sampling(name: str) -> str:
    head, digits = name.rstrip("0123456789"), name[len(name.rstrip("0123456789")) :]
    return marked(f"{head}_{digits}" if digits else head)


def _third_light(solution: Solution) -> str:
    system = solution.system
    free = [band for band in system.bands if f"third_light[{band}]" in system.free]
    held = [
        f"{system.value('third_light', band):g} in {plain(band)}"
        for band in system.bands
        if band not in free
    ]
    words = []
    if free:
        words.append(f"Third light was fitted in {listed([plain(band) for band in free])}.")
    if held and all(text.startswith("0 ") for text in held):
        words.append(
            "Third light was held at zero." if not free else "It was held at zero elsewhere."
        )
    elif held:
        words.append(f"Third light was held at {listed(held)}.")
    return " ".join(words)


def _effects(solution: Solution, methods: Methods) -> list[str]:
    sentences = []
    for state, words in (
        ("predicted", "as the theory predicts them"),
        ("fitted", "with fitted amplitudes"),
    ):
        names = [name for name, each in solution.system.effects.items() if each == state]
        if names:
            listing = listed(
                [f"{EFFECT_NAMES[n]} {methods.cite(*EFFECT_PAPERS[n])}" for n in names]
            )
            sentences.append(f"The model includes {listing}, {words}.")
    return sentences


def _fit(solution: Solution, plan: Plan, methods: Methods) -> list[str]:
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


def _weights(
    solution: Solution, photometry: Photometry, velocities: Velocities | None
) -> list[str]:
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


def _dimensions(solution: Solution, sheet: Sheet, methods: Methods) -> list[str]:
    given = solution.estimates
    sentences = [
        "Errors are 68.3 % limits; those of derived quantities come from the joint covariance, all "
        "correlations kept."
    ]
    if "M1" in given or "R1" in given:
        sentences.append(
            "Masses, radii and luminosities are in the nominal solar units of IAU 2015 Resolution B3 "
            f"{methods.cite('prsa2016')}; other constants are of CODATA 2018 "
            f"{methods.cite('tiesinga2021')}."
        )
    if given.get("M1") and given["M1"].how not in ("derived", FITTED):
        sentences.append(
            "The velocities show one star only: the mass of star 1 was assumed, and every number "
            "that needs it inherits its error."
        )
    if "logg2" in given and "K2" not in given:
        sentences.append(
            f"The surface gravity of star 2 needs no assumed mass {methods.cite('southworth2007')}."
        )
    temperatures = [
        f"star {star} {given[f'teff{star}'].value:.0f} \N{PLUS-MINUS SIGN} "
        f"{given[f'teff{star}'].plus:.0f} K"
        for star in (1, 2)
        if f"teff{star}" in given and given[f"teff{star}"].plus
    ]
    if temperatures:
        zero = f" {methods.cite('mamajek2015')}" if "Mbol1" in given or "Mbol2" in given else ""
        sentences.append(
            f"Effective temperatures were given ({listed(temperatures)}); luminosities follow from "
            f"them and the radii, bolometric magnitudes with the zero point of IAU 2015 B2{zero}."
        )
    sentences.append(
        "Filling of the Roche lobes was judged with the approximation of Eggleton (1983)."
        if any(finding.check == "fill-out" for finding in sheet.audit)
        else ""
    )
    if any(finding.check == "fill-out" for finding in sheet.audit):
        methods.cite("eggleton1983")
    if any("Pont" in finding.source for finding in sheet.audit):
        methods.cite("pont2006")
        sentences.append("Slow noise was judged as Pont, Zucker & Queloz (2006) do.")
    return sentences


def _distance(solution: Solution, plan: Plan) -> str:
    """What the distance rests on."""
    if "distance" not in solution.estimates:
        return ""
    inputs = (
        plan.apparent_magnitude,
        plan.bolometric_correction1,
        plan.bolometric_correction2,
        plan.extinction,
    )
    light, first, second, dust = (
        f"{value:g} \N{PLUS-MINUS SIGN} {sigma:g}".replace("-", "\N{MINUS SIGN}") + " mag"
        for value, sigma in (pair or (0.0, 0.0) for pair in inputs)
    )
    return (
        f"The distance follows from the luminosities, an apparent magnitude of both stars of {light}, "
        f"bolometric corrections of {first} (star 1) and {second} (star 2), and an extinction of {dust}."
    )


def _software(sheet: Sheet, methods: Methods) -> list[str]:
    made = sheet.provenance
    versions = made.versions
    used = [
        f"{name} {versions[name]} {methods.cite(key)}"
        for name, key in LIBRARIES.items()
        if name in versions
    ]
    return [f"The computations were made with {plain(made.program)}, {listed(used)}."]
