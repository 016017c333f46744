"""Every entry of every register keeps the register's promises."""

from __future__ import annotations

import re

import numpy as np
import pytest
from astropy import units as u

from fit_examples import invented, ordinary
from shadowscale.fit.derived import BAND_FUNCTIONS, FUNCTIONS, absent_words, derived_values
from shadowscale.fit.plan import EFFECTS, Plan
from shadowscale.light.laws import LAWS
from shadowscale.quantities import BAND, QUANTITIES, SOURCE, SYSTEM, parse_key

# What scripts rely on, in the order in which it is promised.
PROMISE = """
period epoch radius_sum radius_ratio r1 r2 inclination impact1 impact2 ecosw esinw eccentricity omega
K1 K2 gamma1 gamma2 mass_ratio a M1 M2 R1 R2 logg1 logg2 density1 density2 vsync1 vsync2 teff1 teff2 L1 L2
Mbol1 Mbol2 distance T14_1 T23_1 T14_2 T23_2 depth1 depth2
"""
PROMISED = PROMISE.split()
PROMISED_OF_BANDS = ["light_ratio", "surface_brightness_ratio", "third_light"]
# Later additions; a new quantity is added here by hand.
ADDED = [
    "offset1", "offset2", "limb_darkening1", "limb_darkening2", "mean_surface_brightness_ratio",
    *(f"{effect}{star}" for effect in EFFECTS for star in (1, 2)),
]  # fmt: skip
GIVEN_OR_SEEN = (
    "teff1",
    "teff2",
    "depth1",
    "depth2",
)  # no formula: inputs, and the model's own light


def test_names_are_the_promised_ones_and_no_others() -> None:
    assert set(QUANTITIES) == {*PROMISED, *PROMISED_OF_BANDS, *ADDED}


def test_promised_names_are_of_the_system() -> None:
    assert {name for name in PROMISED if QUANTITIES[name].scope != SYSTEM} == set()
    assert {QUANTITIES[name].scope for name in PROMISED_OF_BANDS} == {BAND}


@pytest.mark.parametrize("name", QUANTITIES)
def test_every_quantity(name: str) -> None:
    quantity = QUANTITIES[name]

    assert quantity.name == name
    assert quantity.symbol
    assert quantity.tex
    assert quantity.meaning
    assert quantity.meaning == quantity.meaning.strip()
    assert not quantity.meaning.endswith(".")
    assert quantity.scope in (SYSTEM, BAND, SOURCE)
    assert quantity.lower < quantity.upper
    assert 0 < quantity.step < np.inf
    assert re.fullmatch(r"[A-Za-z][A-Za-z0-9_]*", name)


@pytest.mark.parametrize("name", QUANTITIES)
def test_every_unit_is_read_by_astropy(name: str) -> None:
    unit = QUANTITIES[name].unit

    assert u.Unit(unit).to_string() is not None
    if not unit:
        assert u.Unit(unit) == u.dimensionless_unscaled


@pytest.mark.parametrize(
    ("name", "unit"),
    [
        ("period", u.day), ("inclination", u.deg), ("K1", u.km / u.s), ("M1", u.solMass),
        ("R2", u.solRad), ("a", u.solRad), ("L1", u.solLum), ("teff1", u.K), ("distance", u.pc),
        ("Mbol1", u.mag), ("density1", u.kg / u.m**3), ("T14_1", u.day), ("omega", u.deg),
    ],
)  # fmt: skip
def test_units_are_those_of_the_trade(name: str, unit: object) -> None:
    assert u.Unit(QUANTITIES[name].unit) == unit


@pytest.mark.parametrize("name", [name for name, quantity in QUANTITIES.items() if quantity.basic])
def test_every_basic_quantity_says_what_it_does(name: str) -> None:
    """One plain sentence, for whoever moves it."""
    effect = QUANTITIES[name].effect

    assert effect, f"{name} has no words for its effect"
    assert effect.endswith(".")
    assert effect[0].isupper()


@pytest.mark.parametrize(
    "name", [name for name, quantity in QUANTITIES.items() if not quantity.basic]
)
def test_every_derived_quantity_names_its_source(name: str) -> None:
    assert QUANTITIES[name].source or name in GIVEN_OR_SEEN


def test_every_derived_quantity_has_its_function() -> None:
    """Seen both ways: nothing in the register that cannot be computed, nothing computed beside it."""
    derived = {name for name, quantity in QUANTITIES.items() if not quantity.basic}

    assert set(FUNCTIONS) | set(BAND_FUNCTIONS) == derived
    assert {QUANTITIES[name].scope for name in BAND_FUNCTIONS} == {BAND}


def test_basic_values_of_systems_are_of_the_register() -> None:
    effects = {f"{effect}{star}": 0.001 for effect in EFFECTS for star in (1, 2)}
    for name in invented(effects=effects).values:
        assert QUANTITIES[parse_key(name).name].basic


def test_what_is_not_given_has_words() -> None:
    """Every quantity of the system is in the solution, or among the absent with a reason; never in both."""
    for system in (invented(), invented(velocities=False), invented(inclination=75.0)):
        words = absent_words(system, Plan())
        values = derived_values(system)
        missing = {name for name, value in values.items() if not np.isfinite(value)}
        missing |= {
            name for name, quantity in QUANTITIES.items()
            if quantity.basic and quantity.scope == SYSTEM and name not in system.values
        }  # fmt: skip
        assert missing == set(words)
        for reason in words.values():
            assert len(reason) > 10
            assert not reason.endswith(".")


def test_a_solution_gives_all_or_says_why() -> None:
    solution = ordinary().solution
    given = {parse_key(name).name for name in solution.estimates}
    missing = set(solution.absent)
    expected = {*PROMISED, *PROMISED_OF_BANDS}

    assert given | missing >= expected
    assert not given & missing


def test_estimates_come_in_the_registers_order() -> None:
    order = list(QUANTITIES)
    places = [order.index(parse_key(name).name) for name in ordinary().solution.estimates]

    assert places == sorted(places)


@pytest.mark.parametrize("name", LAWS)
def test_every_law(name: str) -> None:
    """Its own name, coefficients and bounds of one length, a round trip of its sampling coordinates."""
    law = LAWS[name]
    count = len(law.coefficients)
    middle = np.array([(low + high) / 2 for low, high in law.sampling_bounds])

    assert law.name == name
    assert len(law.sampling_names) == len(law.sampling_bounds) == count
    np.testing.assert_allclose(law.to_sampling(law.from_sampling(middle)), middle, atol=1e-12)


def test_laws_have_codes_of_their_own() -> None:
    assert len({law.code for law in LAWS.values()}) == len(LAWS) == 6
