"""The audit: every registered check put to a solution."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import Solution
from shadowscale.judge.check import Check
from shadowscale.judge.checks import (
    clock,
    coverage,
    eclipses,
    fit,
    light,
    orbit,
    period,
    residuals,
    shape,
    stars,
)
from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import FAIL, PASS, WARN, Finding

FAMILIES = (fit, shape, eclipses, period, orbit, clock, stars, light, residuals, coverage)
SEVERITY = {FAIL: 0, WARN: 1, PASS: 2}

CHECKS: Mapping[str, Check] = MappingProxyType(
    {check.name: check for family in FAMILIES for check in family.CHECKS}
)


def audit(
    solution: Solution, photometry: Photometry, velocities: Velocities | None
) -> tuple[Finding, ...]:
    """Put every check to a solution.

    Parameters
    ----------
    solution : Solution
    photometry : Photometry
        The table that was solved, row for row.
    velocities : Velocities or None
        The same for the velocities.

    Returns
    -------
    tuple of Finding
        Failures first, then warnings, then passes; each in the order of `CHECKS`. A check that cannot
        speak says why. Where one is `fatal` the sheet must not be handed out.
    """
    evidence = Evidence(solution, photometry, velocities)
    # What cannot be computed becomes NaN, and the check says in words that it does not know.
    with np.errstate(all="ignore"):
        findings = [
            finding for check in CHECKS.values() for finding in check.function(evidence, check)
        ]
    return tuple(sorted(findings, key=lambda finding: SEVERITY[finding.verdict]))
