"""Contacts of a known orbit."""

from __future__ import annotations

from math import acos, asin, cos, degrees, inf, isnan, nan, pi, radians, sin, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from shadowscale.geometry.contacts import ContactPhases, contact_phases
from shadowscale.orbit.elements import Orbit
from shadowscale.orbit.sky import minimum_phases, sky_separation

# e, omega, i, r1, r2; T14 and T23 of primary and secondary in cycles: computed by Kepler's equation
# and root finding on the separation. The last row is LL Aqr (Graczyk et al. 2016, A&A 594, A92).
DURATIONS = [
    (0.0, 0.0, 90.0, 0.10, 0.05, 0.04792737, 0.04792737, 0.01592213, 0.01592213),
    (0.0, 0.0, 88.0, 0.10, 0.05, 0.04663111, 0.04663111, 0.01140659, 0.01140659),
    (0.0, 0.0, 85.0, 0.15, 0.12, 0.08257673, 0.08257673, nan, nan),
    (0.2, 30.0, 89.0, 0.08, 0.06, 0.03961708, 0.04824390, 0.00367567, 0.00253397),
    (0.2, 120.0, 89.0, 0.08, 0.06, 0.03718140, 0.05241482, 0.00372288, nan),
    (0.489, 330.2, 89.3, 0.0620, 0.0573, 0.04366566, 0.02673480, nan, nan),
    (0.1, 45.0, 87.0, 0.12, 0.10, 0.06410907, 0.07317065, nan, nan),
    (0.31654, 155.50, 89.548, 0.03242, 0.02459, 0.0151356, 0.0196220, 0.001250149, nan),
]


def phases(
    e: float, omega: float, i: float, r1: float, r2: float, light_time: float = 0.0
) -> ContactPhases:
    k, h = e * cos(radians(omega)), e * sin(radians(omega))
    return contact_phases(r1 + r2, r2 / r1, i, k, h, light_time=light_time)


@pytest.mark.parametrize("row", DURATIONS)
def test_durations(row: tuple[float, ...]) -> None:
    found = phases(*row[:5])
    durations = (
        found.primary.duration,
        found.secondary.duration,
        found.primary.inner_duration,
        found.secondary.inner_duration,
    )
    tolerance = 6e-8 if row[0] == 0.31654 else 6e-9
    assert durations == pytest.approx(row[5:], abs=tolerance, nan_ok=True)


# First and fourth contact of the primary from conjunction: computed as above.
@pytest.mark.parametrize(
    ("case", "first", "fourth"),
    [
        ((0.31654, 155.50, 89.548, 0.03242, 0.02459), -0.00756596, 0.00756964),
        ((0.2, 30.0, 89.0, 0.08, 0.06), -0.01981747, 0.01979961),
        ((0.1, 45.0, 87.0, 0.12, 0.10), -0.03208644, 0.03202263),
    ],
)
def test_contacts_are_not_symmetric_about_conjunction(
    case: tuple[float, ...], first: float, fourth: float
) -> None:
    found = phases(*case).primary
    assert (found.first, found.fourth) == pytest.approx((first, fourth), abs=6e-9)


@given(
    total=st.floats(0.01, 0.5),
    k=st.floats(0.1, 5.0),
    grazing=st.floats(0.0, 0.99),
)
def test_circular_orbits_are_exact(total: float, k: float, grazing: float) -> None:
    # T/P = asin{sqrt(s^2 - cos^2 i)/sin i}/pi, exact for circular orbits.
    i = degrees(acos(grazing * total))
    inner = total * abs(1 - k) / (1 + k)
    found = contact_phases(total, k, i)
    cos_i = cos(radians(i))
    for limit, duration in (
        (total, found.primary.duration),
        (inner, found.primary.inner_duration),
    ):
        if limit > cos_i * (1 + 1e-9):
            sine = sqrt(limit**2 - cos_i**2) / sin(radians(i))
            assert duration == pytest.approx(asin(sine) / pi, abs=1e-11)
    assert found.secondary.duration == pytest.approx(found.primary.duration, abs=1e-12)
    assert found.secondary.middle == pytest.approx(0.5, abs=1e-12)


@settings(deadline=None)
@given(
    e=st.floats(0.0, 0.7),
    omega=st.floats(0.0, 360.0),
    total=st.floats(0.02, 0.25),
    k=st.floats(0.2, 4.0),
    grazing=st.floats(0.0, 0.9),
    light_time=st.sampled_from([0.0, 2e-5, -1e-4]),
)
def test_discs_touch_at_the_contacts(
    e: float, omega: float, total: float, k: float, grazing: float, light_time: float
) -> None:
    i = degrees(acos(grazing * total))
    h, c = e * sin(radians(omega)), e * cos(radians(omega))
    found = contact_phases(total, k, i, c, h, light_time=light_time)
    orbit = Orbit(inclination=i, ecosw=c, esinw=h, light_time=light_time)
    inner = total * abs(1 - k) / (1 + k)
    for eclipse, middle in zip((found.primary, found.secondary), minimum_phases(orbit)):
        if isnan(eclipse.first):
            assert sky_separation([middle], orbit)[0] >= min(total, 1 - e) * (1 - 1e-9)
            continue
        touching = sky_separation([eclipse.first, eclipse.fourth], orbit)
        # Light time is taken to first order where a place is asked at an observed time.
        assert touching == pytest.approx([total, total], abs=3e-9 + light_time**2)
        assert sky_separation([eclipse.middle], orbit)[0] == pytest.approx(
            eclipse.separation, abs=1e-8
        )
        if not isnan(eclipse.second):
            assert eclipse.first < eclipse.second < eclipse.third < eclipse.fourth
            touching = sky_separation([eclipse.second, eclipse.third], orbit)
            assert touching == pytest.approx([inner, inner], abs=1e-8)


@given(
    e=st.floats(0.0, 0.6),
    omega=st.floats(0.0, 360.0),
    total=st.floats(0.05, 0.3),
    k=st.floats(0.2, 4.0),
)
def test_stars_renamed(e: float, omega: float, total: float, k: float) -> None:
    i = degrees(acos(total / 3))
    c, h = e * cos(radians(omega)), e * sin(radians(omega))
    one, other = contact_phases(total, k, i, c, h), contact_phases(total, 1 / k, i, -c, -h)
    assert one.primary.duration == pytest.approx(other.secondary.duration, abs=1e-12, nan_ok=True)
    assert one.primary.inner_duration == pytest.approx(
        other.secondary.inner_duration, abs=1e-9, nan_ok=True
    )


def test_longer_radii_make_longer_eclipses() -> None:
    durations = [
        contact_phases(total, 0.6, 87.0, 0.1, 0.1).primary.duration for total in (0.08, 0.1, 0.2)
    ]
    assert durations == sorted(durations)


# Probability of an eclipse, r1+r2 = 0.15, e = 0.3, over random inclinations: numerical integration;
# the rule (r1+r2)(1 +- e sin w)/(1-e^2) gives 0.207661, 0.122010.
@pytest.mark.parametrize(
    ("omega", "expected"), [(60.0, (0.207726, 0.122048)), (0.0, (0.165043, 0.165043))]
)
def test_eclipse_probability(omega: float, expected: tuple[float, float]) -> None:
    def eclipsed(cos_i: float, star: int) -> bool:
        found = phases(0.3, omega, degrees(acos(cos_i)), 0.1, 0.05)
        return not isnan((found.primary, found.secondary)[star].first)

    for star in (0, 1):
        low, high = 0.05, 0.4
        for _ in range(40):
            middle = (low + high) / 2
            low, high = (middle, high) if eclipsed(middle, star) else (low, middle)
        assert low == pytest.approx(expected[star], abs=2e-6)


def test_rule_of_thumb_for_central_eclipses() -> None:
    # Common practice: smaller diameter = relative speed x (first to second contact), larger one x (first
    # to third). The relative speed of a circular orbit is 2 pi a a cycle; curvature is left out.
    found = phases(0.0, 0.0, 90.0, 0.02, 0.008).primary
    assert 2 * pi * (found.second - found.first) / 2 == pytest.approx(0.008, rel=1e-3)
    assert 2 * pi * (found.third - found.first) / 2 == pytest.approx(0.02, rel=1e-3)


def test_light_time_moves_the_secondary_alone() -> None:
    still, seen = (phases(0.0, 0.0, 88.0, 0.1, 0.05, light) for light in (0.0, 1e-4))
    assert seen.secondary.middle - still.secondary.middle == pytest.approx(
        2e-4 * sin(radians(88.0)), rel=1e-6
    )
    assert seen.primary.middle == pytest.approx(0.0, abs=1e-12)


def test_equal_stars_have_no_inner_contacts() -> None:
    found = contact_phases(0.2, 1.0, 90.0).primary
    assert isnan(found.second)
    assert found.separation == pytest.approx(0.0, abs=1e-15)


def test_nothing_where_nothing_happens() -> None:
    found = contact_phases(0.1, 0.5, 60.0)
    assert isnan(found.primary.first)
    assert isnan(found.primary.middle)
    assert found.primary.separation == pytest.approx(0.5)
    # A very eccentric orbit seen from aside has an eclipse at one conjunction only.
    one = contact_phases(0.1, 0.5, 83.0, 0.0, 0.6)
    assert one.primary.duration > 0
    assert isnan(one.secondary.duration)


def test_touching_stars_have_no_contact() -> None:
    assert isnan(contact_phases(0.95, 1.0, 90.0, 0.5, 0.0).primary.duration)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ((0.0, 1.0, 90.0), "radius_sum: expected a positive number"),
        ((nan, 1.0, 90.0), "radius_sum: expected a positive number"),
        ((0.1, -1.0, 90.0), "radius_ratio: expected a positive number"),
        ((0.1, inf, 90.0), "radius_ratio: expected a positive number"),
        ((0.1, 1.0, 91.0), "inclination_deg: expected 0...90"),
        ((0.1, 1.0, 90.0, 0.8, 0.8), "expected an eccentricity below 1"),
    ],
)
def test_refuses(arguments: tuple[float, ...], words: str) -> None:
    with pytest.raises(ValueError, match=words):
        contact_phases(*arguments)


def test_phases_increase_through_both_eclipses() -> None:
    found = phases(0.3, 200.0, 89.0, 0.1, 0.05)
    numbers = [
        value
        for eclipse in (found.primary, found.secondary)
        for value in (eclipse.first, eclipse.second, eclipse.third, eclipse.fourth)
    ]
    assert np.all(np.diff([value for value in numbers if not isnan(value)]) > 0)
