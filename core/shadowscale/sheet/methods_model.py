"""The methods paragraph on the model: limb darkening, third light, small effects."""

from __future__ import annotations

from shadowscale.fit.solution import Solution
from shadowscale.light.laws import LAWS
from shadowscale.sheet.citing import Methods, listed
from shadowscale.sheet.symbols import marked, plain

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


def model_sentences(solution: Solution, methods: Methods) -> list[str]:
    """What was computed."""
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
        priors = {solution.estimates[f"third_light[{band}]"].prior for band in free}
        given = priors.pop() if len(priors) == 1 else None
        prior = (
            ""
            if given is None
            else f", under a prior of {given[0]:g} \N{PLUS-MINUS SIGN} {given[1]:.2g}"
        )
        words.append(f"Third light was fitted in {listed([plain(band) for band in free])}{prior}.")
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
