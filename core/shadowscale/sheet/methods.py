"""The methods paragraph: what was done in this very solution, in sentences that may be printed.

Every sentence follows from the solution, its plan or its tables; what was not done is not told of.
"""

from __future__ import annotations

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import FITTED, PROFILE, Solution
from shadowscale.sheet.citing import Methods, listed
from shadowscale.sheet.methods_fit import fit_sentences, weight_sentences
from shadowscale.sheet.methods_model import model_sentences
from shadowscale.sheet.references import LIBRARIES
from shadowscale.sheet.sheet import Sheet
from shadowscale.sheet.symbols import plain


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
    methods.add(model_sentences(solution, methods))
    methods.add(fit_sentences(solution, plan, methods))
    methods.add(weight_sentences(solution, photometry, velocities))
    methods.add([*_dimensions(solution, sheet, methods), _distance(solution, plan)])
    methods.add(_software(sheet, methods))
    return methods


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


def _dimensions(solution: Solution, sheet: Sheet, methods: Methods) -> list[str]:
    given = solution.estimates
    sentences = [
        "Errors are 68.3 % limits; those of derived quantities come from the joint covariance, all "
        "correlations kept."
    ]
    profiled = next((item for item in solution.decisions if item.chosen == PROFILE), None)
    if profiled is not None:
        sentences.append(
            "The limits of the ratio of the radii, and of all that hangs on it, are those of its "
            f"likelihood profile {methods.cite('wilks1938')}, since its valley is curved."
        )
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
