"""The checks on pairs that were simulated, read from files and really solved."""

from __future__ import annotations

from dataclasses import replace

import pytest

from made_up_judge import Case
from shadowscale.judge.audit import CHECKS
from shadowscale.judge.finding import FAIL, PASS, WARN
from solved_pairs import solved

# check: the pair that it must not let through, the verdicts allowed then.
FAULTS: dict[str, tuple[str, tuple[str, ...]]] = {
    "fill-out": ("contact", (FAIL,)),
    "oblateness": ("contact", (FAIL,)),
    "ellipsoidal variation": ("contact", (WARN,)),
    "ratio of radii": ("grazing", (WARN, FAIL)),
    "mirror solution": ("grazing", (WARN,)),
    "order of densities": ("larger companion", (WARN,)),
    "outliers": ("held circular", (FAIL,)),
    "place of eclipses": ("held circular", (WARN,)),
    "eccentricity": ("needlessly eccentric", (WARN,)),
    "limb darkening and radii": ("needlessly eccentric", (WARN,)),
    "period": ("equal", (WARN,)),
    "size of the errors": ("restless", (FAIL,)),
    "neighbouring residuals": ("restless", (WARN,)),
    "slow noise": ("restless", (WARN,)),
    "levels of the nights": ("cloudy", (WARN,)),
    "third light and inclination": ("blended", (WARN,)),
    "third light": ("too deep", (FAIL,)),
    "edge of range": ("edge on", (WARN,)),
    "masses": ("tiny and heavy", (FAIL,)),
    "radii": ("tiny and heavy", (WARN,)),
    "gravities and densities": ("tiny and heavy", (FAIL,)),
    "exposure time": ("sparse", (WARN,)),
    "points in ingress": ("sparse", (WARN,)),
    "points per quantity": ("sparse", (WARN,)),
    "coverage of eclipses": ("half seen", (WARN,)),
    "coverage of velocities": ("half seen", (FAIL,)),
    "limb darkening": ("black limb", (FAIL,)),
}
# A solver that works gives no case of these; the made-up ones stand for them.
NOT_FROM_A_FIT = {"convergence", "finite errors", "absent", "other solutions", "time scale"}


def test_every_check_has_its_fault() -> None:
    assert set(CHECKS) == set(FAULTS) | NOT_FROM_A_FIT


def test_nothing_is_said_against_a_good_solution() -> None:
    complaints = [finding.words for finding in solved("good").findings() if finding.verdict != PASS]

    assert not complaints


@pytest.mark.parametrize("name", FAULTS)
def test_fault_is_found(name: str) -> None:
    pair, verdicts = FAULTS[name]

    finding = solved(pair).finding(name)

    assert finding.verdict in verdicts, finding.words


@pytest.mark.parametrize("name", sorted({pair for pair, _ in FAULTS.values()} - {"contact"}))
def test_only_contact_is_refused(name: str) -> None:
    assert not [finding.words for finding in solved(name).findings() if finding.fatal]


def test_contact_is_refused_in_plain_words() -> None:
    fatal = [finding for finding in solved("contact").findings() if finding.fatal]

    assert [finding.check for finding in fatal] == ["fill-out"]
    assert "no radii can be quoted as measured" in fatal[0].words


def test_mixed_clocks_are_found() -> None:
    good = solved("good")
    assert good.velocities is not None
    mixed = Case(good.solution, good.photometry, replace(good.velocities, time_scale="HJD_UTC"))

    assert mixed.finding("time scale").verdict == WARN


def test_depth_and_kind_of_what_is_fitted() -> None:
    """The pair without fault has r2 < r1 and is nearly edge-on: annular, then total."""
    windows = solved("good").evidence.windows

    assert [window.kind for window in windows] == ["annular", "total"]
