"""Whether the residuals look like the noise that the errors promise."""

from __future__ import annotations

from math import isfinite, nan, sqrt

import numpy as np

from shadowscale.data.photometry import Floats, Ints
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import Solution, VelocityResult
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import TINY, Bools, Evidence, LightRows
from shadowscale.judge.finding import FAIL, WARN, Finding
from shadowscale.judge.words import counted, listed, number, percent

FAR_OFF = 25.0  # reduced chi-squared of a misfit of five times the errors
FEWEST_PAIRS = 10
FEWEST_BINS = 10
FEWEST_NIGHTS = 4
FAINT_RUN = 5
SAME_LEVEL = 1e-9
WANDERING = 1.2  # Durbin-Watson of neighbours with a correlation of 0.4
SHORTEST_BIN, LONGEST_BIN = 5.0 / 1440, 0.25  # [d]


def size_of_errors(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Reduced chi-squared with the errors as given; the band or velocity set farthest from 1."""
    given = _errors_given(evidence)
    if not given:
        return check.silent(
            "no errors came with the data; they were taken from the scatter of the residuals."
        )
    judged = {name: _excess(value, _chance(evidence, name), check) for name, value in given.items()}
    worst = max(judged, key=lambda name: judged[name])
    off = [name for name in given if judged[name] > 1]
    if not off:
        return check.passed(
            "Residuals agree with the errors given "
            f"({listed([f'{name}: {number(given[name])}' for name in given])} in reduced chi-squared).",
            given[worst],
        )
    words = " ".join(_misjudged(name, given[name]) for name in off)
    if given[worst] > FAR_OFF:
        return check.failed(
            f"{words} Either the errors mean nothing, or the model does not describe the data.",
            given[worst],
        )
    return check.warned(
        f"{words} The fit rescaled them, and the quoted uncertainties with them; find out why.",
        given[worst],
    )


def _errors_given(evidence: Evidence) -> dict[str, float]:
    """Reduced chi-squared of every set whose errors came with the data."""
    table = evidence.photometry
    guessed = {band for band, scatter in zip(table.bands, table.errors_from_scatter) if scatter}
    raw = evidence.solution.fit.raw_reduced_chi2
    no_errors = evidence.velocities is not None and evidence.velocities.errors_from_scatter
    return {
        name: float(value)
        for name, value in raw.items()
        if isfinite(value)
        and value >= 0
        and name not in guessed
        and not (no_errors and name not in table.bands)
    }


def _excess(value: float, chance: float, check: Check) -> float:
    """How far a reduced chi-squared is from 1, in units of the limit or of three sigma of chance."""
    limit = check.limit or 1.0
    if value >= 1:
        return min(value / limit, (value - 1) / chance)
    return min(1 / (limit * max(value, TINY)), (1 - value) / chance)


def _chance(evidence: Evidence, name: str) -> float:
    """Three sigma of a reduced chi-squared of that many points: 3 sqrt(2/n)."""
    return 3 * sqrt(2 / max(_points(evidence, name), 1))


def _points(evidence: Evidence, name: str) -> int:
    """Points behind a band's or a star's chi-squared."""
    if name in evidence.bands:
        return int((evidence.light.band == evidence.bands.index(name)).sum())
    result = evidence.solution.velocity
    if result is None:
        return 1
    counts = {1: int((result.why1 == 0).sum()), 2: int((result.why2 == 0).sum())}
    return next((counts[star] for star in (1, 2) if f"star {star}" in name), sum(counts.values()))


def _misjudged(name: str, value: float) -> str:
    factor = sqrt(value) if value > 0 else 0.0
    if value > 1:
        return f"{name}: residuals are {number(factor)} times as large as the errors given."
    return (
        f"{name}: residuals are only {number(factor)} times the errors given, which are too large."
    )


def durbin_watson(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Durbin-Watson statistic of each band, neighbours in time within a night."""
    light, found = evidence.light, {}
    for place, band in enumerate(evidence.bands):
        statistic, pairs = neighbour_statistic(light, place)
        if pairs >= FEWEST_PAIRS and isfinite(statistic):
            found[band] = (statistic, pairs)
    if not found:
        return check.silent("too few points stand next to each other in one night.")
    limits = {band: _needed(check, pairs) for band, (_, pairs) in found.items()}
    worst = min(found, key=lambda band: found[band][0] - limits[band])
    value, limit = found[worst][0], limits[worst]
    alike = 1 - value / 2
    words = f"Durbin-Watson is {number(value)} in band {worst} (2 for independent points)"
    if value >= limit:
        return check.passed(f"{words}: neighbouring residuals are independent.", value, limit=limit)
    growth = sqrt((1 + alike) / max(1 - alike, 1e-3))
    return check.warned(
        f"{words}: neighbouring residuals are alike (correlation {number(alike)}). If that is not "
        f"the model's fault, the errors should be about {number(growth)} times as large; "
        "look at the residuals night by night.",
        value,
        limit=limit,
    )


def _needed(check: Check, pairs: int) -> float:
    """The limit, lowered where chance alone reaches it: the statistic scatters by 2/sqrt(n)."""
    return min(check.limit or 0.0, 2 - 3 * 2 / sqrt(pairs))


def neighbour_statistic(light: LightRows, band: int) -> tuple[float, int]:
    """Durbin-Watson statistic of one band and the number of pairs it rests on."""
    chosen = light.band == band
    pull, block = light.pull[chosen], light.block[chosen]
    if pull.size < 2:
        return nan, 0
    same = np.diff(block) == 0
    pairs = int(same.sum())
    power = float(np.mean(pull**2)) * pairs
    if not power > 0:
        return nan, pairs
    return float(np.sum(np.diff(pull)[same] ** 2) / power), pairs


def red_noise(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Factor by which averages scatter more than independent points would allow."""
    light = evidence.light
    widths = bin_widths(evidence)
    tried = [(width, *noise_factor(light, width)) for width in widths]
    usable = [row for row in tried if row[2] >= FEWEST_BINS and isfinite(row[1])]
    if not usable:
        return check.silent(
            "the points are too far apart in time to average several within an ingress."
        )
    width, factor, bins = max(usable, key=lambda row: row[1])
    limit = max(check.limit or 1.0, sqrt(1 + 3 * sqrt(2 / bins)))
    words = f"Averages over {number(24 * 60 * width)} minutes scatter {number(factor)} times as much as independent points would"
    if factor <= limit:
        return check.passed(f"{words}: no slow noise worth mentioning.", factor, limit=limit)
    return check.warned(
        f"{words}: there is slow noise (weather, the instrument, spots, or a model that does not fit). "
        f"The uncertainties from the light curve should be about {percent(factor - 1)} larger.",
        factor,
        limit=limit,
    )


def bin_widths(evidence: Evidence) -> tuple[float, ...]:
    """Widths to average over [d]: half, once and twice the shorter ingress."""
    period = evidence.value("period")
    ingresses = [
        (window.outer - window.inner) * period for window in evidence.windows if window.happens
    ]
    if not ingresses or not isfinite(period):
        return (20.0 / 1440,)
    middle = float(np.clip(min(ingresses), SHORTEST_BIN, LONGEST_BIN))
    return middle / 2, middle, 2 * middle


def noise_factor(light: LightRows, width: float) -> tuple[float, int]:
    """Scatter of averages over `width` [d] against independent points, and how many averages.

    Each bin's sum of pulls, divided by sqrt(n) and by the pulls' own rms, has variance 1 for
    independent points, whatever n; its root mean square is Pont, Zucker & Queloz's beta.
    Bins lie within one night and band, and hold two points or more.
    """
    if light.size < 2:
        return nan, 0
    pull = light.pull / _rms_per_band(light)
    cell = np.floor((light.time - light.time[light.starts][light.block]) / width)
    new = np.ones(light.size, dtype=bool)
    new[1:] = (np.diff(cell) != 0) | (np.diff(light.block) != 0)
    starts = np.flatnonzero(new)
    counts = np.diff(np.append(starts, light.size))
    sums = np.add.reduceat(pull, starts)
    enough = counts >= 2
    if not enough.any():
        return nan, 0
    return float(np.sqrt(np.mean(sums[enough] ** 2 / counts[enough]))), int(enough.sum())


def _rms_per_band(light: LightRows) -> Floats:
    power = np.bincount(light.band, light.pull**2)
    rms = np.sqrt(power / np.maximum(np.bincount(light.band), 1))
    return np.where(rms > 0, rms, 1.0)[light.band]


def wandering_levels(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Depth of the deeper eclipse over the scatter of the nights' levels; the worst band."""
    found = {}
    for place, band in enumerate(evidence.bands):
        levels = _levels_of_nights(evidence, place)
        depth = _deepest(evidence, place)
        if levels.size >= FEWEST_NIGHTS and depth > 0 and np.ptp(levels) > SAME_LEVEL:
            found[band] = depth / float(np.std(levels))
    if not found:
        return check.silent("the nights share one level, or are too few to scatter.")
    band = min(found, key=lambda name: found[name])
    value = found[band]
    words = f"The deeper eclipse takes {number(value)} times as much light in band {band} as the nights' levels scatter"
    if value >= (check.limit or 0.0):
        return check.passed(f"{words}.", value)
    statistic, pairs = neighbour_statistic(evidence.light, evidence.bands.index(band))
    if pairs >= FEWEST_PAIRS and statistic < WANDERING:
        return check.failed(
            f"{words}, and the light wanders within the nights, too: these dips cannot be told from slow noise, so "
            "no eclipse is seen for certain. Observe whole nights in and out of an eclipse, with better comparison stars.",
            value,
            fatal=True,
        )
    return check.warned(
        f"{words}: the depths rest on single nights that show the light both in and out of eclipse. Look at them "
        "one by one.",
        value,
    )


def _levels_of_nights(evidence: Evidence, band: int) -> Floats:
    """The level of each night of a band, mean of its rows, over their median."""
    light = evidence.light
    level = evidence.solution.light.level[light.row]
    rows = light.band == band
    count = np.bincount(light.block[rows])
    levels = np.bincount(light.block[rows], level[rows])[count > 0] / count[count > 0]
    return levels / np.median(levels) if levels.size else levels


def _deepest(evidence: Evidence, band: int) -> float:
    """Light that the deeper eclipse takes where it was observed; 0 where neither was."""
    rows = evidence.light.band == band
    return 1 - float(np.min(evidence.light.model[rows], initial=1.0))


def outliers(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Share of the offered points that the fit itself set aside."""
    taken = evidence.photometry.used
    dropped = taken & (evidence.solution.light.why != 0)
    sets = [("photometry", int(dropped.sum()), int(taken.sum()))]
    sets += _dropped_velocities(evidence.velocities, evidence.solution)
    shares = [(gone / whole, name, gone) for name, gone, whole in sets if whole]
    if not shares:
        return check.failed("No point takes part in the fit.")
    share, name, gone = max(shares)
    words = f"{counted(gone, 'point')} of the {name} ({percent(share)}) set aside by the fit as outliers"
    limit, within = check.limit or 0.0, _in_eclipse(evidence, dropped)
    if _crowded(evidence, within, int(dropped.sum())):
        crowd = (
            f"{within} of {counted(int(dropped.sum()), 'photometric outlier')} lie in eclipse: not bad points, but a "
            "model that misses the shape or the place of the eclipses (an eccentric orbit, spots, a wrong period)."
        )
        return check.found(FAIL if share > limit else WARN, f"{words}; {crowd}", value=share)
    run = longest_faint_run(evidence)
    if run >= FAINT_RUN and name == "photometry":
        return check.failed(
            f"{words}; {run} of them follow each other in one night, all fainter than the model: a cloud, or an eclipse "
            "that this model does not know, as where the period is twice the true one.",
            share,
        )
    if share > 5 * limit:
        return check.failed(
            f"{words}: that is no longer a few bad points, the model does not fit.", share
        )
    if share > limit:
        return check.warned(f"{words}. Look at them before trusting the fit.", share)
    return check.passed(f"{words}." if gone else "No point was set aside by the fit.", share)


def _in_eclipse(evidence: Evidence, rows: Bools) -> int:
    """How many of some rows of the photometry lie in eclipse."""
    phase = evidence.solution.light.phase[rows]
    within = np.zeros(phase.size, dtype=bool)
    for window in evidence.windows:
        within |= np.abs(window.offset(phase)) < window.outer
    return int(within.sum())


def longest_faint_run(evidence: Evidence) -> int:
    """How many points that the fit set aside follow each other in one night, all of them faint."""
    light = evidence.offered
    faint = (evidence.solution.light.why[light.row] != 0) & (light.residual < 0)
    broken = np.flatnonzero(~faint | (np.diff(light.block, prepend=-1) != 0))
    ends = np.append(broken, light.size)
    lengths = np.diff(ends) - ~faint[broken]
    return int(max(lengths, default=0))


def _crowded(evidence: Evidence, within: int, whole: int) -> bool:
    """Whether outliers lie in eclipse more often, by three sigma and five points, than points do."""
    offered = evidence.photometry.used
    share = _in_eclipse(evidence, offered) / max(int(offered.sum()), 1)
    expected = share * whole
    return within - expected > max(3 * sqrt(expected), 5.0)


def _dropped_velocities(table: Velocities | None, solution: Solution) -> list[tuple[str, int, int]]:
    result = solution.velocity
    if table is None or result is None:
        return []
    return [
        (f"velocities of star {star}", int((used & (why != 0)).sum()), int(used.sum()))
        for star, used, why in _velocity_pairs(table, result)
    ]


def _velocity_pairs(
    table: Velocities, result: VelocityResult
) -> tuple[tuple[int, Bools, Ints], ...]:
    return ((1, table.used1, result.why1), (2, table.used2, result.why2))


def points_per_quantity(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Number of points for every free quantity."""
    fit = evidence.solution.fit
    if fit.free <= 0:
        return check.silent("nothing was free in the fit.")
    ratio = fit.points / fit.free
    words = f"{counted(fit.points, 'point')} for {counted(fit.free, 'free quantity')}"
    if fit.points <= fit.free:
        return check.failed(
            f"{words}: such a fit always succeeds and proves nothing.", ratio, fatal=True
        )
    if ratio < (check.limit or 0.0):
        return check.warned(f"{words}: hold some quantities fixed, or observe more.", ratio)
    return check.passed(f"{words}.", ratio)


CHECKS = (
    Check(
        "size of the errors",
        "Are the residuals as large as the errors that came with the data?",
        size_of_errors,
        2.0,
        "reduced chi-squared within a factor of 2 of 1: errors right to 40 % (common practice); more where few "
        "points scatter by chance, 3 sqrt(2/n)",
    ),
    Check(
        "neighbouring residuals",
        "Are residuals that follow each other independent?",
        durbin_watson,
        1.5,
        "Durbin & Watson 1950, Biometrika 37, 409; 1.5 is common practice and means a correlation "
        "of 0.25, lowered to three sigma of chance for few points",
    ),
    Check(
        "slow noise",
        "Do averages get better as fast as independent points would?",
        red_noise,
        1.25,
        "Pont, Zucker & Queloz 2006, MNRAS 373, 231; a quarter larger errors is our choice, "
        "raised to three sigma of chance for few averages",
    ),
    Check(
        "levels of the nights",
        "Are the eclipses deeper than the nights differ?",
        wandering_levels,
        6.0,
        "light that wandered by itself gave dips of 4 to 5.7 times the scatter of its levels (our trials with "
        "correlated noise); above 6 no such case was found",
    ),
    Check(
        "outliers",
        "How many points did the fit set aside?",
        outliers,
        0.02,
        "one in fifty; normal noise leaves fewer than one in a thousand beyond four sigma (our choice)",
    ),
    Check(
        "points per quantity",
        "Are there enough points for what is free?",
        points_per_quantity,
        10.0,
        "ten points a free quantity (common practice)",
    ),
)
