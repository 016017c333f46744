"""The loss of light over phase against the hidden fraction of every single point."""

from __future__ import annotations

from math import acos, cos, degrees, pi, sin

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from pair_light import BAND, LIMB, PAIRS, dense_times, direct_light, pair
from shadowscale.constants import DAY
from shadowscale.fit.band_model import BandModel, constants_of
from shadowscale.fit.model import model_light
from shadowscale.geometry.contacts import contact_phases
from shadowscale.light import _grid
from shadowscale.orbit.longitude import secondary_phase


def crowded_times(system, count=60):
    """Times that come close to every contact and fill every piece between them."""
    model = BandModel.at(system, system.values, BAND)
    number = int(model.pieces[_grid.COUNTS, 0])
    steps = np.concatenate([10.0 ** np.linspace(-9, 0, count), np.linspace(0, 2, count)])
    phases = [
        end
        for middle, half, *_ in model.pieces[:number]
        for end in (middle - half + half * steps, middle + half - half * steps)
    ]
    return system.value("epoch") + system.value("period") * np.sort(np.concatenate(phases))


@pytest.mark.parametrize("law", LIMB)
@pytest.mark.parametrize("name", PAIRS)
def test_light_is_that_of_every_single_point(name, law):
    system = pair(name, law)
    times = dense_times(system)

    np.testing.assert_allclose(
        model_light(system, BAND, times), direct_light(system, times), rtol=0, atol=1e-8
    )


@pytest.mark.parametrize("name", PAIRS)
def test_eclipses_are_those_of_the_exact_contacts(name):
    system = pair(name)
    values = [system.value(key) for key in ("radius_sum", "radius_ratio", "inclination")]
    contacts = contact_phases(*values, system.value("ecosw"), system.value("esinw"))
    model = BandModel.at(system, system.values, BAND)

    for number, expected in enumerate((contacts.primary, contacts.secondary)):
        found = model.eclipse(number)
        widths = [expected.duration, expected.inner_duration]
        np.testing.assert_allclose([*found[:2]], widths, rtol=0, atol=1e-14)
        time = system.value("epoch") + system.value("period") * expected.middle
        if np.isfinite(time):
            light = direct_light(system, np.array([time]))[0]
            assert found.depth == pytest.approx(1.0 - light, abs=1e-8)
        else:
            assert np.isnan(found.depth)


@pytest.mark.parametrize("name", PAIRS)
def test_light_close_to_the_contacts(name):
    system = pair(name, "power-2", epoch=0.0)
    times = crowded_times(system)

    np.testing.assert_allclose(
        model_light(system, BAND, times), direct_light(system, times), rtol=0, atol=1.2e-8
    )


@given(
    ratio=st.floats(-3.0, 3.0).map(lambda power: 2.0**power),
    radius_sum=st.floats(-2.3, -0.25).map(lambda power: 10.0**power),
    impact=st.floats(0.0, 1.02),
    eccentricity=st.floats(0.0, 0.9),
    omega=st.floats(0.0, 2 * pi),
    law=st.sampled_from(list(LIMB)),
)
@settings(max_examples=80, deadline=None)
def test_light_of_random_pairs(ratio, radius_sum, impact, eccentricity, omega, law):
    assume(radius_sum < 0.95 * (1 - eccentricity))
    system = pair(
        "total", law, epoch=0.0, radius_ratio=ratio, radius_sum=radius_sum,
        inclination=degrees(acos(radius_sum * impact)), ecosw=eccentricity * cos(omega),
        esinw=eccentricity * sin(omega),
    )  # fmt: skip
    times = np.concatenate([np.linspace(-0.5, 0.5, 200) * system.value("period")])
    if BandModel.at(system, system.values, BAND).pieces[_grid.COUNTS, 0] > 0:
        times = np.sort(np.concatenate([times, crowded_times(system, 30)]))

    np.testing.assert_allclose(
        model_light(system, BAND, times), direct_light(system, times), rtol=0, atol=1.5e-8
    )


@pytest.mark.parametrize("size", [1 - 1e-3, 1 - 1e-6, 1 - 1e-10, 1 + 1e-8, 1 + 1e-5, 1.02])
@pytest.mark.parametrize("inclination", [90.0, 89.99, 88.0])
def test_light_of_nearly_equal_stars(size, inclination):
    system = pair("total", "power-2", radius_ratio=size, inclination=inclination, epoch=0.0)
    times = crowded_times(system)

    np.testing.assert_allclose(
        model_light(system, BAND, times), direct_light(system, times), rtol=0, atol=1.2e-8
    )


@pytest.mark.parametrize("name", ["total", "eccentric", "very eccentric"])
def test_stars_are_seen_where_their_light_left_them(name):
    system = pair(name, velocities=True, light_time=True, K1=20.0, K2=260.0)
    times = dense_times(system)
    model = BandModel.at(system, system.values, BAND)
    eccentricity = np.hypot(system.value("ecosw"), system.value("esinw"))
    sine = sin(np.radians(system.value("inclination")))
    # (a2 - a1)/(c P) with a = P K sqrt(1 - e^2)/(2 pi sin i); c in km/s.
    light_time = np.sqrt(1 - eccentricity**2) * 240.0 / (2 * pi * 299792.458 * sine)

    expected = direct_light(system, times, light_time=light_time)

    np.testing.assert_allclose(model.light(times), expected, rtol=0, atol=1e-8)
    assert np.abs(expected - direct_light(system, times)).max() > 1e-4


@pytest.mark.parametrize(
    "name", ["total", "partial", "eccentric", "one eclipse", "larger companion"]
)
@pytest.mark.parametrize("exposure", [1.0, 1800.0, 3 * 3600.0])
def test_exposures_are_averaged(name, exposure):
    """Against the mean of 3000 points of the midpoint rule."""
    system = pair(name, exposure=exposure)
    middles = system.value("epoch") + np.array([-0.06, -0.04, -0.02, -0.003, 0.0, 0.03, 0.3, 0.5])
    middles = np.concatenate([middles, system.value("epoch") + np.linspace(0.4, 0.6, 9) * 2.4])
    parts = (np.arange(3000) + 0.5) / 3000 - 0.5

    found = model_light(system, BAND, middles)

    expected = [direct_light(system, t + parts * exposure / DAY).mean() for t in middles]
    np.testing.assert_allclose(found, expected, rtol=0, atol=3e-8)


@pytest.mark.parametrize("turns", [0.62, 1.0, 2.3])
def test_exposures_longer_than_between_eclipses(turns):
    system = pair("total", exposure=turns * 2.4371926 * DAY)
    middles = system.value("epoch") + np.linspace(-3.0, 4.0, 11)
    parts = (np.arange(20000) + 0.5) / 20000 - 0.5

    found = model_light(system, BAND, middles)

    expected = [direct_light(system, t + parts * turns * 2.4371926).mean() for t in middles]
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-6)


def test_a_short_exposure_is_an_instant():
    times = dense_times(pair("partial"))

    found = model_light(pair("partial", exposure=1e-3), BAND, times)

    np.testing.assert_allclose(found, model_light(pair("partial"), BAND, times), rtol=0, atol=2e-8)


@pytest.mark.parametrize("name", PAIRS)
def test_eclipses_are_cut_at_their_contacts(name):
    system = pair(name)
    values = system.values
    told = contact_phases(
        values["radius_sum"], values["radius_ratio"], values["inclination"], values["ecosw"],
        values["esinw"],
    )  # fmt: skip

    pieces = BandModel.at(system, values, BAND).pieces

    for eclipse, contacts in enumerate((told.primary, told.secondary)):
        first, last = pieces[_grid.SPANS + eclipse, :2]
        if np.isfinite(contacts.first):
            turn = np.round(contacts.middle - (first + last) / 2)
            np.testing.assert_allclose(
                [first + turn, last + turn], [contacts.first, contacts.fourth], rtol=0, atol=1e-12
            )
        else:
            assert last < first


def test_both_eclipses_close_together_near_periastron():
    """Eclipses a tenth of a cycle apart: neither may be looked for in the place of the other."""
    system = pair(
        "total", radius_sum=0.2875, radius_ratio=0.9998, inclination=76.5,
        ecosw=0.69947 * cos(3.21), esinw=0.69947 * sin(3.21),
    )  # fmt: skip
    times = dense_times(system)

    np.testing.assert_allclose(
        model_light(system, BAND, times), direct_light(system, times), rtol=0, atol=1e-8
    )


@pytest.mark.parametrize(("ecosw", "esinw"), [(0.0, 0.0), (0.3, -0.2), (-0.5, 0.6), (0.0, 0.7)])
def test_secondary_phase_is_that_of_the_orbit(ecosw, esinw):
    assert _grid.secondary_phase(ecosw, esinw) == pytest.approx(
        secondary_phase(ecosw, esinw), abs=1e-14
    )


def test_no_eclipses_no_pieces():
    system = pair("total", inclination=60.0)

    pieces = np.empty((_grid.PIECES_SIZE, 5))
    cells = _grid.lay_pieces(constants_of(system.values), 0.0, 0.27, 0.78, 0.0, 0.0, False, pieces)

    assert cells == 2  # those behind eclipses that do not exist
    times = dense_times(system)
    np.testing.assert_array_equal(model_light(system, BAND, times), np.ones(times.size))
    averaged = model_light(pair("total", inclination=60.0, exposure=1800.0), BAND, times)
    np.testing.assert_array_equal(averaged, np.ones(times.size))
