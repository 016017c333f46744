"""What kind of eclipses these are, and whether they fix the ratio of the radii."""

from __future__ import annotations

from math import isfinite, log, nan

from shadowscale.fit.solution import Alternative
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import TINY, Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.words import capital, listed, number, percent

NEARLY_EQUAL = 0.3  # in ln k between the two: then both say that the radii are about equal
MIRROR_WITHIN = 0.25  # |ln(k k')| below which another solution counts as the mirror of this one
NEARLY_CERTAIN = 0.95  # correlation above which two quantities cannot be told apart
ADVICE = "A light ratio measured in the spectra, given as a prior on light_ratio, would settle it."


def ratio_of_radii(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Relative error of k against the limit, in the light of the eclipses' geometry."""
    ratio = evidence.value("radius_ratio")
    kinds = [f"{window.name} eclipse {window.kind}" for window in evidence.windows]
    geometry = capital(listed(kinds).replace("eclipse none", "eclipse does not happen"))
    if not isfinite(ratio):
        return check.failed("The solution has no ratio of the radii.")
    if not evidence.is_free("radius_ratio"):
        return check.passed(f"{geometry}. The ratio of the radii was held at {number(ratio)}.")
    relative = evidence.sigma("radius_ratio") / abs(ratio) if ratio else nan
    if not isfinite(relative):
        return check.warned(
            f"{geometry}. The ratio of the radii has no error, so it cannot be trusted."
        )
    words = f"{geometry}. The ratio of the radii is known to {percent(relative)}"
    limit = check.limit or 0.0
    if relative > 5 * limit:
        return check.failed(
            f"{words}: the two radii are hardly told apart, only their sum is measured. {ADVICE}",
            relative,
        )
    if relative > limit:
        return check.warned(f"{words}, which is loose{_tied(evidence)}. {ADVICE}", relative)
    if _all_grazing(evidence) and not _has_help(evidence):
        return check.warned(
            f"{words} by the fit, but neither star's centre is ever covered, so this rests on "
            f"limb darkening and on the light outside eclipse. {ADVICE}",
            relative,
        )
    return check.passed(f"{words}.", relative)


def _all_grazing(evidence: Evidence) -> bool:
    return all(window.kind in ("grazing", "none") for window in evidence.windows)


def _has_help(evidence: Evidence) -> bool:
    helpful = ("radius_ratio", "light_ratio", "r1", "r2")
    return any(prior.name.split("[")[0] in helpful for prior in evidence.solution.system.priors)


def _tied(evidence: Evidence) -> str:
    """Says with what k is confused, where the correlation is nearly complete."""
    partners = ["inclination", "radius_sum"]
    for band in evidence.bands:
        partners += [f"surface_brightness_ratio[{band}]", f"light_ratio[{band}]"]
    found = [(abs(evidence.correlation("radius_ratio", name)), name) for name in partners]
    found = [(size, name) for size, name in found if size > NEARLY_CERTAIN]
    if not found:
        return ""
    size, name = max(found)
    return f" (it goes along with {name}, correlation {size:.2f})"


def mirror_solution(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Chi-squared by which the solution with the radii exchanged is worse."""
    mirrors = [other for other in evidence.solution.alternatives if _is_mirror(evidence, other)]
    if mirrors:
        return _known_mirror(
            evidence, check, mirror=min(mirrors, key=lambda other: other.delta_chi2)
        )
    ratio, sigma = evidence.value("radius_ratio"), evidence.sigma("radius_ratio")
    away = abs(log(ratio)) * ratio / sigma if ratio > 0 and sigma > 0 else nan
    if isfinite(away) and away < 2:
        return check.passed(
            f"The radii are equal within their errors (k is {number(away)} sigma from 1), so which "
            "star is the larger is open, and the errors say so."
        )
    if any(window.kind in ("total", "annular") for window in evidence.windows):
        return check.passed("A total or annular eclipse shows directly which star is the larger.")
    return check.passed("No solution with the radii exchanged was found to fit.")


def _known_mirror(evidence: Evidence, check: Check, *, mirror: Alternative) -> tuple[Finding, ...]:
    worse, other = mirror.delta_chi2, mirror.values["radius_ratio"]
    apart = abs(other - evidence.value("radius_ratio")) / max(evidence.sigma("radius_ratio"), TINY)
    if not isfinite(worse):
        return check.silent("the solution with the radii exchanged has no chi-squared.")
    words = f"With the radii exchanged (k = {number(other)}) chi-squared is {_worse(worse)}"
    alike = abs(log(other / evidence.value("radius_ratio"))) < NEARLY_EQUAL
    if worse < (check.limit or 0.0) and apart < 2 and alike:
        return check.passed(f"{words}, but that lies within the errors of k.", worse)
    if worse < (check.limit or 0.0):
        return check.warned(
            f"{words}: the light curve does not say which star is the larger. {ADVICE}", worse
        )
    return check.passed(f"{words}, so the exchange is excluded.", worse)


def _worse(difference: float) -> str:
    return f"{'worse' if difference >= 0 else 'better'} by {number(abs(difference))}"


def _is_mirror(evidence: Evidence, other: Alternative) -> bool:
    ratio, mirrored = evidence.value("radius_ratio"), other.values.get("radius_ratio", nan)
    if not (ratio > 0 and mirrored > 0):
        return False
    near_inverse = abs(log(ratio * mirrored)) < MIRROR_WITHIN
    return near_inverse and abs(log(mirrored / ratio)) > abs(log(ratio * mirrored))


def other_solutions(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Chi-squared of the nearest other solution that is not the mirror."""
    others = [
        other
        for other in evidence.solution.alternatives
        if isfinite(other.delta_chi2) and not _is_mirror(evidence, other)
    ]
    if not others:
        return check.passed("No other solution was found that the data do not exclude.")
    nearest = min(others, key=lambda other: other.delta_chi2)
    words = f"Another solution: {nearest.words.rstrip('.')}"
    if "chi-squared" not in words:
        words += f", chi-squared {_worse(nearest.delta_chi2)}"
    if nearest.delta_chi2 < (check.limit or 0.0):
        return check.warned(f"{words}.", nearest.delta_chi2)
    return check.passed(f"{words}; the data exclude it.", nearest.delta_chi2)


CHECKS = (
    Check(
        "ratio of radii",
        "Do the eclipses fix the ratio of the radii?",
        ratio_of_radii,
        0.03,
        "radii are useful when good to 3 % (Torres, Andersen & Gimenez 2010, A&ARv 18, 67); "
        "five times that and only the sum is measured (our choice)",
    ),
    Check(
        "mirror solution",
        "Does the curve fit as well with the two radii exchanged?",
        mirror_solution,
        9.0,
        "chi-squared difference of 9, three sigma for one quantity (common practice)",
    ),
    Check(
        "other solutions",
        "Is there another solution that fits as well?",
        other_solutions,
        9.0,
        "chi-squared difference of 9, three sigma for one quantity (common practice)",
    ),
)
