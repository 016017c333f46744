"""The audit as a whole: order, words for silence, and no fall over odd input."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from made_up_judge import Case, good_case, set_aside, with_fit, with_solution, with_system
from shadowscale.data.photometry import Photometry
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import DERIVED, Alternative, Estimate, LightResult
from shadowscale.judge.audit import CHECKS, SEVERITY, audit
from shadowscale.judge.finding import FAIL, PASS, WARN

GOOD = good_case(nights=12)
LIGHT_ONLY = good_case(("V", "I"), velocities=False, nights=6)

ODD = st.sampled_from([np.nan, np.inf, -np.inf, 0.0, -1.0, 1e-300, 1e300, 0.5, 1.0, 90.0, 1e6])
KEYS = sorted({*GOOD.solution.system.values, *GOOD.solution.estimates, "light_ratio[V]"})


def test_names_are_said_once() -> None:
    names = [finding.check for finding in GOOD.findings()]

    assert len(names) == len(set(names))
    assert {name for name in CHECKS if name != "absent"} <= set(names)


def test_worst_comes_first_and_the_rest_in_the_register_s_order() -> None:
    case = with_system(with_fit(GOOD, converged=False), effects={})
    findings = case.findings()
    passed = [finding.check for finding in findings if finding.verdict == PASS]
    register = [name for name in CHECKS if name in passed]

    assert [SEVERITY[finding.verdict] for finding in findings] == sorted(
        SEVERITY[finding.verdict] for finding in findings
    )
    assert findings[0].check == "convergence"
    assert register == [name for name in passed if name in CHECKS]


def test_the_same_twice() -> None:
    assert GOOD.findings() == GOOD.findings()


def test_a_good_solution_has_no_complaint() -> None:
    complaints = [finding.words for finding in good_case().findings() if finding.verdict != PASS]

    assert not complaints


def test_without_velocities_the_silent_say_why() -> None:
    findings = {finding.check: finding for finding in LIGHT_ONLY.findings()}

    for name in ("masses", "radii", "order of densities", "coverage of velocities"):
        assert findings[name].verdict == PASS
        assert findings[name].value is None
        assert findings[name].words.startswith("Not judged: ")


def test_every_absent_quantity_has_its_line() -> None:
    absent = {"M1": "no velocities of star 2", "third_light[V]": "held", "distance": "no magnitude"}
    findings = with_solution(GOOD, absent=absent).findings()
    lines = {finding.check: finding for finding in findings if finding.check.startswith("absent")}

    assert set(lines) == {f"absent: {name}" for name in absent}
    assert lines["absent: M1"].verdict == WARN
    assert lines["absent: distance"].verdict == PASS
    assert "mass of star 1" in lines["absent: M1"].words


def test_an_empty_table_is_judged() -> None:
    case = set_aside(GOOD, np.ones(GOOD.photometry.time.size, dtype=bool))

    assert any(finding.verdict == FAIL for finding in case.findings())


def _sound(case: Case) -> None:
    findings = audit(case.solution, case.photometry, case.velocities)
    for finding in findings:
        assert finding.verdict in SEVERITY
        assert finding.words
        assert finding.value is None or np.isfinite(finding.value)
        assert finding.limit is None or np.isfinite(finding.limit)


@given(
    st.dictionaries(st.sampled_from(KEYS), ODD, max_size=6),
    st.dictionaries(st.sampled_from(KEYS), ODD, max_size=6),
    st.sets(st.sampled_from(KEYS), max_size=8),
    st.booleans(),
)
@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.too_slow])
def test_odd_values_and_errors(
    values: dict[str, float], errors: dict[str, float], missing: set[str], velocities: bool
) -> None:
    case = GOOD if velocities else LIGHT_ONLY
    system_values = {
        key: value
        for key, value in (dict(case.solution.system.values) | values).items()
        if key not in missing
    }
    estimates = dict(case.solution.estimates)
    for key, value in values.items():
        estimates[key] = Estimate(value, 0.1, 0.1, DERIVED)
    for key, error in errors.items():
        old = estimates.get(key, Estimate(1.0, None, None, DERIVED))
        estimates[key] = replace(old, minus=error, plus=error)
    estimates = {key: value for key, value in estimates.items() if key not in missing}
    system = replace(case.solution.system, values=system_values)
    case = with_solution(case, estimates=estimates, system=system)

    _sound(case)


@given(
    st.sampled_from(["time", "flux", "flux_error", "model", "level", "phase"]),
    ODD,
    st.sampled_from([1, 2, 7, 10**6]),
    st.booleans(),
)
@settings(max_examples=80, deadline=None)
def test_odd_rows(column: str, value: float, every: int, velocities: bool) -> None:
    case = GOOD if velocities else LIGHT_ONLY
    where = np.arange(case.photometry.time.size) % every == 0
    if column in {field.name for field in fields(LightResult)}:
        light = case.solution.light
        changed = np.where(where, value, getattr(light, column))
        case = with_solution(case, light=replace(light, **{column: changed}))
    else:
        changed = np.where(where, value, getattr(case.photometry, column))
        case = replace(case, photometry=replace(case.photometry, **{column: changed}))

    _sound(case)


@given(
    ODD,
    st.integers(0, 3),
    st.sampled_from(["unknown", "", "BJD_TDB", "?", "JD", "HJD_UTC"]),
    st.sampled_from(["power-2", "no such law", "four-parameter"]),
)
@settings(max_examples=80, deadline=None)
def test_odd_fits(number: float, shape: int, scale: str, law: str) -> None:
    size = len(GOOD.solution.system.free)
    covariance = [
        np.full((size, size), number),
        np.zeros((0, 0)),
        np.eye(size - 1),
        np.diag(np.full(size, number)),
    ][shape]
    case = with_solution(
        GOOD,
        covariance=covariance,
        estimates={},
        alternatives=(
            Alternative("odd", {"radius_ratio": number}, number),
            Alternative("empty", {}, number),
        ),
        correlation_names=(),
        correlations=np.empty((0, 0)),
    )
    case = with_system(case, law=law)
    case = with_fit(
        case, raw_reduced_chi2={"V": number, "north, star 1": number}, error_scale={"V": number}
    )
    case = replace(case, photometry=replace(case.photometry, time_scale=scale))

    _sound(case)


def test_no_rows_at_all() -> None:
    photometry, light = GOOD.photometry, GOOD.solution.light
    nothing = np.zeros(photometry.time.size, dtype=bool)
    columns = ("time", "flux", "flux_error", "band", "night", "file", "line", "value", "why")
    empty = replace(
        photometry,
        **{name: getattr(photometry, name)[nothing] for name in (*columns, "value_error")},
    )
    light = replace(
        light,
        **{name: getattr(light, name)[nothing] for name in ("model", "level", "phase", "why")},
    )
    case = Case(with_solution(GOOD, light=light).solution, empty, None)

    _sound(case)
    assert isinstance(case.photometry, Photometry)


def test_velocities_of_one_star() -> None:
    table = GOOD.velocities
    assert isinstance(table, Velocities)
    result = GOOD.solution.velocity
    assert result is not None
    gone = np.full(table.time.size, np.nan)
    none = np.ones(table.time.size, dtype=np.int64)
    table = replace(table, rv2=gone, rv2_error=gone, why2=none)
    case = with_solution(
        replace(GOOD, velocities=table), velocity=replace(result, model2=gone, why2=none)
    )

    _sound(case)
    assert "star 2" not in case.finding("coverage of velocities").words
