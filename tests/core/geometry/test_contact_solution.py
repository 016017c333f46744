"""The classical solution: contacts and depths to radii, inclination and light."""

from __future__ import annotations

from dataclasses import replace
from math import acos, cos, degrees, isfinite, log, nan, pi, radians, sin

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from derivatives import check_derivatives
from eclipse_timings import timings
from shadowscale.geometry.contact_equations import UNKNOWNS, contact_equations
from shadowscale.geometry.contacts import (
    ContactSolution,
    EclipseTiming,
    contact_phases,
    contact_solution,
    starting_points,
)
from shadowscale.quantities import QUANTITIES

# radius_sum, radius_ratio, inclination, e, omega, J: total and annular pairs, star 2 smaller or larger.
FLAT = [
    (0.15, 0.5, 89.0, 0.0, 0.0, 0.3),
    (0.15, 2.0, 89.0, 0.0, 0.0, 0.3),
    (0.14, 0.75, 89.0, 0.2, 30.0, 0.8),
    (0.10, 1.6, 89.5, 0.19, 110.0, 0.5),
    (0.25, 3.0, 88.0, 0.1, 90.0, 0.4),
    (0.08, 0.4, 89.7, 0.6, 200.0, 0.6),
    (0.12, 0.1, 89.5, 0.3, 20.0, 0.2),
    (0.30, 0.3, 85.0, 0.0, 0.0, 0.2),
]
PARTIAL = [
    (0.20, 0.8, 85.0, 0.0, 0.0, 0.7),
    (0.1193, 0.92, 89.3, 0.489, 330.2, 0.9),
    (0.10, 1.0, 88.0, 0.0, 0.0, 1.0),
    (0.10, 0.9, 88.5, 0.57, 52.0, 0.8),
    (0.25, 1.3, 82.0, 0.05, 300.0, 0.4),
]


def truth(case: tuple[float, ...]) -> dict[str, float]:
    total, k, i, e, omega, brightness = case
    return {
        "radius_sum": total,
        "radius_ratio": k,
        "inclination": i,
        "ecosw": e * cos(radians(omega)),
        "esinw": e * sin(radians(omega)),
        "surface_brightness_ratio": brightness,
        "r1": total / (1 + k),
        "r2": total * k / (1 + k),
        "light_ratio": brightness * k * k,
    }


def eclipses(case: tuple[float, ...], **more: object) -> tuple[EclipseTiming, EclipseTiming | None]:
    true = truth(case)
    first, second = timings(
        true["radius_sum"],
        true["radius_ratio"],
        true["inclination"],
        ecosw=true["ecosw"],
        esinw=true["esinw"],
        brightness=true["surface_brightness_ratio"],
        **more,
    )
    assert first is not None
    return first, second


def nearest(solution: ContactSolution, ratio: float) -> dict[str, float]:
    """The solution or the other one whose ratio of the radii is nearest."""
    return dict(
        min((solution.values, *solution.others), key=lambda v: abs(log(v["radius_ratio"] / ratio)))
    )


@pytest.mark.parametrize("case", FLAT)
def test_total_and_annular_pairs_are_found_exactly(case: tuple[float, ...]) -> None:
    solution = contact_solution(*eclipses(case), period=3.0)
    found = nearest(solution, case[1])
    for name, value in truth(case).items():
        tolerance = 0.02 if name == "inclination" else 2e-5 + 1e-3 * abs(value)
        assert found[name] == pytest.approx(value, abs=tolerance), name


@pytest.mark.parametrize("case", PARTIAL)
def test_partial_pairs(case: tuple[float, ...]) -> None:
    solution = contact_solution(*eclipses(case), period=3.0)
    true = truth(case)
    assert any("weakly determined" in note for note in solution.notes)
    assert solution.others
    # The ratio is not measured, the sum and the orbit nearly are.
    assert solution.errors["radius_ratio"] > 0.05
    assert solution.values["radius_sum"] == pytest.approx(true["radius_sum"], rel=0.04)
    assert solution.values["ecosw"] == pytest.approx(true["ecosw"], abs=2e-3)
    assert solution.values["esinw"] == pytest.approx(true["esinw"], abs=0.02)
    assert abs(solution.values["radius_ratio"] - case[1]) < 3 * solution.errors["radius_ratio"]
    ratios = [
        solution.values["radius_ratio"],
        *(other["radius_ratio"] for other in solution.others),
    ]
    assert min(ratios) < 1 < max(ratios)


def test_partial_mirror() -> None:
    # Unequal depths put k off 1: the other solution is 1/k with radii that make the same eclipses.
    solution = contact_solution(*eclipses((0.25, 1.3, 82.0, 0.05, 300.0, 0.4)), period=3.0)
    mirror = solution.others[0]
    assert mirror["radius_ratio"] == pytest.approx(1 / solution.values["radius_ratio"], rel=0.05)


@pytest.mark.parametrize("case", [*FLAT, *PARTIAL])
def test_solutions_make_the_eclipses_they_came_from(case: tuple[float, ...]) -> None:
    first, second = eclipses(case)
    solution = contact_solution(first, second, period=3.0)
    for values in (solution.values, *solution.others):
        again = contact_phases(
            *(values[n] for n in ("radius_sum", "radius_ratio", "inclination", "ecosw", "esinw"))
        )
        assert again.primary.duration == pytest.approx(first.duration, rel=0.01)
        assert again.secondary.duration == pytest.approx(second.duration, rel=0.01)
        between = (again.secondary.middle - again.primary.middle) % 1.0
        assert between == pytest.approx(second.middle - first.middle, abs=2e-4)


def test_both_kinds_of_total_eclipse_are_told() -> None:
    # One circular total and annular pair has a twin with the roles of the stars changed.
    solution = contact_solution(*eclipses(FLAT[0]), period=3.0)
    assert any("k and 1/k both fit" in note for note in solution.notes)
    ratios = [solution.values["radius_ratio"], solution.others[0]["radius_ratio"]]
    assert min(ratios) < 1 < max(ratios)


def test_light_left_in_the_total_eclipse_is_the_front_star_s() -> None:
    # Physics Olympiad 2007: levels 0.90 while star 2 is hidden, 0.63 while it is in front; L2/L1 = 1/9,
    # k^2 = 0.411 for uniform discs, less with the centre brighter than the limb.
    first, second = eclipses((0.15, 0.6, 89.5, 0.0, 0.0, 0.3))
    solution = contact_solution(first, second, period=3.0, light_below1=0.63, light_below2=0.90)
    found = nearest(solution, 0.6)
    assert found["light_ratio"] == pytest.approx(1 / 9, rel=0.02)
    assert 0.411 / 1.25 < found["radius_ratio"] ** 2 < 0.411
    assert solution.values["depth1"] == pytest.approx(0.37)


@pytest.mark.parametrize("case", [FLAT[2], FLAT[4], FLAT[5]])
def test_errors_are_the_scatter(case: tuple[float, ...]) -> None:
    generator = np.random.default_rng(20)
    names = ("radius_sum", "radius_ratio", "ecosw", "esinw", "r1", "light_ratio")
    draws, errors = [], []
    for _ in range(40):
        solution = contact_solution(*eclipses(case, noise=generator), period=3.0)
        draws.append([nearest(solution, case[1])[name] for name in names])
        errors.append([solution.errors[name] for name in names])
    pulls = (np.array(draws) - [truth(case)[name] for name in names]) / np.array(errors)
    # Depths carry 3 % for the limb darkening, which these draws do not vary: pulls may be small.
    assert np.all(pulls.std(axis=0) < 1.35)
    assert np.all(np.abs(pulls.mean(axis=0)) < 0.5)
    assert pulls.std(axis=0)[2] > 0.7  # e cos w comes from the times alone


def test_covariance_belongs_to_the_names() -> None:
    solution = contact_solution(*eclipses(FLAT[2]), period=3.0)
    assert set(solution.names) == set(solution.values) == set(solution.errors)
    assert np.sqrt(np.diag(solution.covariance)) == pytest.approx(
        [solution.errors[name] for name in solution.names]
    )
    assert np.linalg.eigvalsh(solution.covariance).min() > -1e-12
    assert all(name in QUANTITIES for name in solution.names)
    # r1 + r2 is the sum, in the errors as well.
    row = np.array([(n in ("r1", "r2")) - (n == "radius_sum") for n in solution.names], float)
    assert row @ solution.covariance @ row == pytest.approx(0.0, abs=1e-12)


def test_durations_are_those_measured_in_days() -> None:
    first, second = eclipses(FLAT[3])
    solution = contact_solution(first, second, period=4.5)
    assert solution.values["T14_1"] == pytest.approx(4.5 * first.duration)
    assert solution.values["T23_2"] == pytest.approx(
        4.5 * (second.duration - second.ingress - second.egress)
    )
    assert solution.errors["T14_1"] == pytest.approx(4.5 * 4e-5, rel=1e-3)
    assert "T23_1" not in contact_solution(*eclipses(PARTIAL[0]), period=4.5).values


def test_circular_formula() -> None:
    # (r1+r2)^2 = 1 - cos^2(pi T14/P) sin^2 i and the same for |r1-r2| with T23.
    first, second = eclipses(FLAT[1])
    values = contact_solution(first, second, period=1.0).values
    sin2i = sin(radians(values["inclination"])) ** 2
    outer = 1 - cos(pi * values["T14_1"]) ** 2 * sin2i
    inner = 1 - cos(pi * values["T23_1"]) ** 2 * sin2i
    assert values["radius_sum"] ** 2 == pytest.approx(outer, rel=1e-5)
    assert (values["r1"] - values["r2"]) ** 2 == pytest.approx(inner, rel=1e-4)


@pytest.mark.parametrize("ratio", [0.75, 1.4])
def test_third_light_is_named(ratio: float) -> None:
    # In an eccentric orbit four durations fix both radii: depths that contradict them are diluted.
    case = (0.14, ratio, 89.7, 0.26, 49.0, 0.8)
    solution = contact_solution(*eclipses(case, third_light=0.45), period=2.0)
    assert any("third light of about 0.4" in note for note in solution.notes)
    assert nearest(solution, ratio)["radius_ratio"] == pytest.approx(ratio, rel=0.01)
    plain = contact_solution(*eclipses(case), period=2.0)
    assert not any("third light" in note for note in plain.notes)


@pytest.mark.parametrize("flat", [True, False])
def test_one_eclipse_alone(flat: bool) -> None:
    first, _ = eclipses(FLAT[0] if flat else PARTIAL[0])
    solution = contact_solution(first, None, period=3.0)
    assert any("Only one eclipse" in note for note in solution.notes)
    assert "ecosw" not in solution.values
    assert "T14_2" not in solution.values
    assert ("light_ratio" in solution.values) == flat
    true = truth(FLAT[0] if flat else PARTIAL[0])
    assert solution.values["radius_sum"] == pytest.approx(true["radius_sum"], rel=0.25)
    assert solution.errors["radius_ratio"] > 0.03 * solution.values["radius_ratio"]


def test_equal_errors_of_nothing_are_no_trouble() -> None:
    first, second = eclipses(FLAT[0])
    bare = [replace(eclipse, covariance=np.zeros((5, 5))) for eclipse in (first, second)]
    solution = contact_solution(*bare, period=3.0)
    assert nearest(solution, 0.5)["radius_ratio"] == pytest.approx(0.5, rel=1e-3)


@settings(deadline=None, max_examples=80)
@given(
    durations=st.tuples(st.floats(0.005, 0.2), st.floats(0.005, 0.2)),
    parts=st.lists(st.floats(0.01, 0.6), min_size=4, max_size=4),
    depths=st.tuples(st.floats(0.0, 1.1), st.floats(0.0, 1.1)),
    phase=st.floats(0.1, 0.9),
    flat=st.tuples(st.booleans(), st.booleans()),
    alone=st.booleans(),
)
def test_markers_anywhere_give_an_answer(
    durations: tuple[float, float],
    parts: list[float],
    depths: tuple[float, float],
    phase: float,
    flat: tuple[bool, bool],
    alone: bool,
) -> None:
    made = [
        EclipseTiming(
            middle, duration, parts[2 * n] * duration, parts[2 * n + 1] * duration, depth, is_flat,
            np.diag([1e-4, 2e-4, 2e-4, 2e-4, 5e-3]) ** 2,
        )
        for n, (middle, duration, depth, is_flat) in enumerate(
            zip((0.0, phase), durations, depths, flat)
        )
    ]  # fmt: skip
    second = None if alone else made[1]
    solution = contact_solution(made[0], second, period=2.0)
    for values in (
        solution.values,
        *solution.others,
        *starting_points(made[0], second, period=2.0),
    ):
        for name, value in values.items():
            assert isfinite(value), name
            if name in QUANTITIES and name != "light_ratio":
                assert QUANTITIES[name].lower <= value <= QUANTITIES[name].upper
        assert 0 <= values["inclination"] <= 90
    assert all(error >= 0 and isfinite(error) for error in solution.errors.values())
    assert solution.notes


@pytest.mark.parametrize("case", [*FLAT, *PARTIAL])
def test_some_start_is_near(case: tuple[float, ...]) -> None:
    generator = np.random.default_rng(3)
    first, second = eclipses(case, noise=generator)
    true = truth(case)

    def near(point: dict[str, float]) -> bool:
        return (
            abs(log(point["radius_ratio"] / true["radius_ratio"])) < 0.3
            and abs(point["radius_sum"] / true["radius_sum"] - 1) < 0.06
            and abs(point["inclination"] - true["inclination"]) < 1.5
            and abs(point["ecosw"] - true["ecosw"]) < 0.01
            and abs(point["esinw"] - true["esinw"]) < 0.04
            and abs(log(point["surface_brightness_ratio"] / true["surface_brightness_ratio"])) < 1.1
        )

    points = starting_points(first, second, period=3.0)
    assert any(near(point) for point in points)
    assert 3 <= len(points) <= 8
    assert min(p["radius_ratio"] for p in points) < 1 < max(p["radius_ratio"] for p in points)


@settings(deadline=None, max_examples=40)
@given(
    total=st.floats(0.05, 0.3),
    k=st.floats(0.4, 0.9),
    e=st.floats(0.0, 0.6),
    omega=st.floats(0.0, 360.0),
    grazing=st.floats(0.0, 0.9),
)
def test_totals_of_any_orbit(
    total: float, k: float, e: float, omega: float, grazing: float
) -> None:
    inner = total * (1 - k) / (1 + k)
    case = (total, k, degrees(acos(grazing * inner * (1 - e))), e, omega, 0.6)
    assume(total < 0.5 * (1 - e))
    first, second = eclipses(case)
    assume(first.flat and second is not None and second.flat)
    solution = contact_solution(first, second, period=1.0)
    found = nearest(solution, k)
    assert found["radius_sum"] == pytest.approx(total, rel=0.01)
    assert found["radius_ratio"] == pytest.approx(k, rel=0.03)
    assert found["esinw"] == pytest.approx(truth(case)["esinw"], abs=0.01)


@pytest.mark.parametrize("case", [FLAT[2], FLAT[1], PARTIAL[3]])
def test_equations_and_their_derivatives(case: tuple[float, ...]) -> None:
    equations = contact_equations(eclipses(case))
    true = truth(case)
    at = np.array(
        [
            0.0,
            true["ecosw"],
            true["esinw"],
            cos(radians(case[2])) ** 2,
            case[0],
            log(case[1]),
            log(case[5]),
            0.0,
        ]
    )
    assert at.size == UNKNOWNS
    assert equations.evaluate(at)[0] == pytest.approx(0.0, abs=3e-6)
    moved = at + np.array([1e-4, 0.01, -0.01, 2e-4, 0.001, 0.03, 0.1, 0.05])
    check_derivatives(
        lambda x: equations.evaluate(x)[0],
        equations.evaluate(moved)[1],
        moved,
        step=2e-5,
        tolerance=2e-4,
    )


def spoiled(**changes: float) -> EclipseTiming:
    return replace(eclipses(FLAT[0])[0], **changes)


@pytest.mark.parametrize(
    ("first", "second", "period", "words"),
    [
        (spoiled(), None, 0.0, "period: expected a positive number"),
        (spoiled(middle=nan), None, 1.0, "primary: expected finite numbers"),
        (spoiled(duration=-0.1), None, 1.0, "primary: expected a duration of 0...0.5"),
        (spoiled(duration=0.7), None, 1.0, "primary: expected a duration of 0...0.5"),
        (spoiled(ingress=-0.01), None, 1.0, "primary: expected ingress and egress not negative"),
        (spoiled(covariance=np.eye(3)), None, 1.0, r"primary: expected a \(5, 5\) covariance"),
        (spoiled(), spoiled(), 1.0, "secondary: expected another eclipse"),
        (spoiled(), spoiled(middle=0.5, depth=nan), 1.0, "secondary: expected finite numbers"),
    ],
)
def test_nonsense_is_refused(
    first: EclipseTiming, second: EclipseTiming | None, period: float, words: str
) -> None:
    with pytest.raises(ValueError, match=words):
        contact_solution(first, second, period=period)
    with pytest.raises(ValueError, match=words):
        starting_points(first, second, period=period)
