"""Whether the observations lie where they are needed."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite, nan, sqrt

import numpy as np

from shadowscale.data.photometry import Floats
from shadowscale.judge.check import Check
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import Finding
from shadowscale.judge.windows import EclipseWindow
from shadowscale.judge.words import capital, counted, listed, number, percent

DAY = 86400.0  # [s]
SAME_SPACING, MOSTLY = 0.05, 0.7
LONG_SPACING = 0.25  # of the ingress
INGRESS_ERROR = 0.05  # relative error of the ingress time that is asked for
FEWEST_A_SIDE = 4
CELLS = 10  # parts of an eclipse, each of which should hold a point
FEWEST_OUTSIDE = 10
NEAR_QUADRATURE = 0.7  # of the semi-amplitude
FEWEST_NEAR_QUADRATURE = 2


@dataclass(frozen=True)
class Sides:
    """Points of one eclipse between outer and inner contacts, before and after the middle.

    `quality` is the root mean square of depth over error there: signal to noise of one point.
    """

    name: str
    before: int
    after: int
    quality: float

    @property
    def fewest(self) -> int:
        """Points on the poorer side."""
        return min(self.before, self.after)

    @property
    def needed(self) -> float:
        """Points a side for the wanted error of the ingress time (Carter et al. 2008)."""
        if not self.quality > 0:
            return float("inf")
        return max(FEWEST_A_SIDE, 6 / (INGRESS_ERROR * self.quality) ** 2)

    @property
    def error(self) -> float:
        """Relative error of the ingress time that these points allow."""
        count = (self.before + self.after) / 2
        return sqrt(6 / count) / self.quality if count and self.quality > 0 else float("inf")


def exposure_time(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Exposure of the files, or the spacing of points, that the model leaves out, over the ingress."""
    ingress = min(
        ((w.outer - w.inner) * evidence.value("period") for w in evidence.windows if w.happens),
        default=nan,
    )
    if not ingress > 0:
        return check.silent("the length of the ingress is not known.")
    taken = evidence.solution.system.exposure / DAY
    printed = _printed_exposure(evidence)
    if printed > 0:
        share = abs(printed - taken) / ingress
        words = f"The files print exposures of {number(DAY * printed)} s and the model takes {number(DAY * taken)} s"
        if share <= (check.limit or 1.0):
            return check.passed(f"{words}, which is near enough.", share)
        return check.warned(
            f"{words}: ingress and egress, {number(24 * 60 * ingress)} minutes long, are blurred otherwise than it thinks. "
            f"Solve again with --exposure {number(DAY * printed)}.",
            share,
        )
    spacing = _even_spacing(evidence)
    share = spacing / ingress
    if taken > 0 or not share > LONG_SPACING:
        return check.passed(
            f"Exposures of {number(DAY * taken)} s and an ingress of {number(24 * 60 * ingress)} minutes go together."
        )
    return check.warned(
        f"Points follow each other every {number(24 * 60 * spacing)} minutes, {percent(share)} of the ingress, and the exposure "
        "was taken as none. If each of them is an exposure that long, the radii are wrong: give its length as --exposure.",
        share,
        limit=LONG_SPACING,
    )


def _printed_exposure(evidence: Evidence) -> float:
    """Median of the exposures that the files print [d], NaN where they print none."""
    exposure = evidence.photometry.exposure
    if exposure is None:
        return nan
    found = exposure[evidence.photometry.used]
    found = found[np.isfinite(found)]
    return float(np.median(found)) / DAY if found.size else nan


def _even_spacing(evidence: Evidence) -> float:
    """Usual time between points of a band [d] where it is the same all through; else NaN."""
    light = evidence.light
    spacing = np.diff(light.time)[np.diff(light.block) == 0]
    if spacing.size < FEWEST_OUTSIDE:
        return nan
    usual = float(np.median(spacing))
    even = np.abs(spacing - usual) < SAME_SPACING * usual
    return usual if even.mean() > MOSTLY else nan


def ingress_points(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Points in ingress and egress of the eclipse that says most, against what is needed."""
    sides = [eclipse_sides(evidence, window) for window in evidence.windows if window.happens]
    if not sides:
        return check.failed("In this solution the discs never meet: there is no eclipse to judge.")
    shown = "; ".join(
        f"{side.name} eclipse: {counted(side.before, 'point')} in ingress, {side.after} in egress"
        for side in sides
    )
    shown = capital(shown)
    best = min(sides, key=lambda side: side.error)
    limit = float(np.ceil(best.needed)) if isfinite(best.needed) else None
    if best.before + best.after == 0:
        return check.failed(
            f"{shown}. Without points there the radii come from the model alone.", 0.0, limit=limit
        )
    if best.error > INGRESS_ERROR:
        return check.warned(
            f"{shown}. They fix the time of ingress to {percent(best.error)}; about "
            f"{number(best.needed)} a side would give {percent(INGRESS_ERROR)}. More points in ingress and "
            "egress would help the radii most.",
            best.fewest,
            limit=limit,
        )
    if best.fewest < FEWEST_A_SIDE:
        return check.warned(
            f"{shown}. One side of the eclipse is nearly empty, so its time and shape rest on the other.",
            best.fewest,
            limit=limit,
        )
    return check.passed(f"{shown}.", best.fewest, limit=limit)


def eclipse_sides(evidence: Evidence, window: EclipseWindow) -> Sides:
    """Count the points between outer and inner contacts on either side of an eclipse."""
    offset, within = evidence.inside(window)
    sloping = within & (np.abs(offset) >= window.inner)
    before, after = sloping & (offset < 0), sloping & (offset >= 0)
    return Sides(
        window.name, int(before.sum()), int(after.sum()), _quality(evidence, within, sloping)
    )


def _quality(
    evidence: Evidence,
    within: np.ndarray[tuple[int, ...], np.dtype[np.bool_]],
    sloping: np.ndarray[tuple[int, ...], np.dtype[np.bool_]],
) -> float:
    """Root mean square of depth over error of the points on the slopes, depths band by band."""
    light = evidence.light
    if not sloping.any():
        return nan
    depths = np.zeros(len(evidence.bands))
    np.maximum.at(depths, light.band[within], 1 - light.model[within])
    ratio = depths[light.band[sloping]] / light.error[sloping]
    return float(np.sqrt(np.mean(ratio**2)))


def eclipse_coverage(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Share of each eclipse's length that holds points, the poorest band and eclipse."""
    covered = {
        (window.name, band): covered_share(evidence, window, band=place)
        for window in evidence.windows
        if window.happens
        for place, band in enumerate(evidence.bands)
    }
    if not covered:
        return check.silent("in this solution there is no eclipse.")
    worst = min(covered, key=lambda name: covered[name])
    share, limit = covered[worst], check.limit or 0.0
    seen = [share for (name, _), share in covered.items() if name == "primary"]
    poor = [
        f"{name} eclipse in band {band} to {percent(part)}"
        for (name, band), part in covered.items()
        if part < limit
    ]
    if seen and max(seen) < 0.3:
        return check.failed(
            f"Observed: {listed(poor)}. The primary eclipse is mostly unseen, so the solution is a guess "
            "in its most important part.",
            share,
        )
    if poor:
        return check.warned(
            f"Observed: {listed(poor)}. What is missing there, the model fills in.", share
        )
    lonely = _few_outside(evidence)
    if lonely:
        return check.warned(
            f"Fewer than {FEWEST_OUTSIDE} points outside eclipse in {listed(lonely)}: the depths have "
            "no level to stand on.",
            share,
        )
    return check.passed(
        f"Every eclipse is observed over {percent(share)} of its length or more.", share
    )


def covered_share(evidence: Evidence, window: EclipseWindow, *, band: int) -> float:
    """Share of `CELLS` equal parts of an eclipse that hold a point of one band, outliers counted."""
    light = evidence.offered
    offset = window.offset(light.phase[light.band == band])
    offset = offset[np.abs(offset) < window.outer]
    cells = np.floor((offset / window.outer + 1) / 2 * CELLS).astype(int)
    return np.unique(np.clip(cells, 0, CELLS - 1)).size / CELLS


def _few_outside(evidence: Evidence) -> list[str]:
    counts = np.bincount(
        evidence.light.band[evidence.outside], minlength=max(len(evidence.bands), 1)
    )
    return [
        f"band {band}"
        for place, band in enumerate(evidence.bands)
        if counts[place] < FEWEST_OUTSIDE
    ]


def velocity_coverage(evidence: Evidence, check: Check) -> tuple[Finding, ...]:
    """Velocities near both quadratures, of the star that has fewest."""
    if evidence.velocities is None or evidence.solution.velocity is None:
        return check.silent("there are no velocities; masses and radii in solar units need them.")
    counts = {
        star: found for star in (1, 2) if (found := quadrature_counts(evidence, star)) is not None
    }
    if not counts:
        return check.silent("no star has a velocity curve.")
    limit = int(check.limit or 0)
    shown = "; ".join(
        f"star {star}: {away} near greatest recession, {near} near greatest approach"
        for star, (away, near) in counts.items()
    )
    words = f"Velocities of {shown}"
    fewest = min(min(found) for found in counts.values())
    if any(max(found) == 0 for found in counts.values()):
        return check.failed(
            f"{words}. Without velocities near quadrature the amplitude is not measured.", fewest
        )
    if fewest < limit:
        return check.warned(
            f"{words}. Velocities near both quadratures would fix the amplitudes, and so the masses, best.",
            fewest,
        )
    return check.passed(f"{words}.", fewest)


def quadrature_counts(evidence: Evidence, star: int) -> tuple[int, int] | None:
    """Used velocities with more than 0.7 of the semi-amplitude, receding and approaching."""
    table, result = evidence.velocities, evidence.solution.velocity
    amplitude = evidence.value(f"K{star}")
    if table is None or result is None or not amplitude > 0:
        return None
    model, why = (result.model1, result.why1) if star == 1 else (result.model2, result.why2)
    if not np.any(why == 0):
        return None
    shift = evidence.value("ecosw") * (1 if star == 1 else -1)
    level = _source_levels(evidence, star)[table.source]
    part = (model - level) / amplitude - (shift if isfinite(shift) else 0.0)
    part = part[(why == 0) & np.isfinite(part)]
    return int((part > NEAR_QUADRATURE).sum()), int((part < -NEAR_QUADRATURE).sum())


def _source_levels(evidence: Evidence, star: int) -> Floats:
    """Systemic velocity as each source sees it."""
    sources = evidence.velocities.sources if evidence.velocities is not None else ()
    offsets = np.nan_to_num([evidence.value(f"offset{star}", name) for name in sources])
    return evidence.value(f"gamma{star}") + np.asarray(offsets, dtype=float)


CHECKS = (
    Check(
        "exposure time",
        "Does the model blur the eclipses as the exposures did?",
        exposure_time,
        0.1,
        "a tenth of the ingress: averaged over it, the corner of a ramp moves by one eightieth of its height (by definition); "
        "a quarter where only the spacing of the points is known (our choice)",
    ),
    Check(
        "points in ingress",
        "Are there enough points between the outer and inner contacts?",
        ingress_points,
        None,
        "ingress time to 5 %: n = 6 (noise/depth/0.05)^2 points a side, from the errors of a trapezoid "
        "(Carter et al. 2008, ApJ 689, 499), at least 4",
    ),
    Check(
        "coverage of eclipses",
        "Is the whole of each eclipse observed?",
        eclipse_coverage,
        0.8,
        "eight of ten equal parts of each eclipse hold a point (our choice)",
    ),
    Check(
        "coverage of velocities",
        "Are there velocities near both quadratures?",
        velocity_coverage,
        FEWEST_NEAR_QUADRATURE,
        "two velocities a star beyond 0.7 K on either side, so that one bad point can be seen (our choice)",
    ),
)
