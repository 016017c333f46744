"""The solver's coordinates: there and back, inside their bounds."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from derivatives import central_difference
from fit_examples import invented
from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.fit.vector import Vector, band_keys
from shadowscale.light.laws import LAWS
from shadowscale.quantities import QUANTITIES, parse_key

BANDS = {"V": 0.6, "I": 0.8}


def _all_free(law: str) -> System:
    """A system of two bands with every basic quantity free."""
    count = len(LAWS[law].coefficients)
    effects = {f"{effect}{star}": 0.001 for effect in EFFECTS for star in (1, 2)}
    system = invented(law=law, limb=((0.3,) * count, (0.4,) * count), bands=BANDS, effects=effects)
    return replace(system, free=tuple(system.values))


@pytest.mark.parametrize("law", LAWS)
@settings(max_examples=25, deadline=None)
@given(data=st.data())
def test_there_and_back(law: str, data: st.DataObject) -> None:
    """x to values and back to x, anywhere well inside the bounds."""
    vector = Vector(_all_free(law))
    lower, upper = vector.bounds
    lower, upper = np.maximum(lower, -1e4), np.minimum(upper, 1e4)
    share = data.draw(
        st.lists(st.floats(0.02, 0.98), min_size=lower.size, max_size=lower.size), label="shares"
    )
    x = lower + np.array(share) * (upper - lower)
    values = vector.unpack(x)

    assert set(values) == set(vector.system.values)
    np.testing.assert_allclose(vector.pack(values), x, rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize("law", LAWS)
def test_values_are_kept(law: str) -> None:
    system = _all_free(law)
    vector = Vector(system)
    found = vector.unpack(vector.pack(system.values))

    for name, value in system.values.items():
        assert found[name] == pytest.approx(value, rel=1e-12, abs=1e-12), name


def test_what_is_not_free_is_not_moved() -> None:
    system = replace(invented(), free=("radius_ratio", "inclination"))
    vector = Vector(system)
    found = vector.unpack(np.array([0.9, 0.01]))

    assert found["radius_ratio"] == 0.9
    # cos^2 i = 0.01: arccos 0.1
    assert found["inclination"] == pytest.approx(84.26082952, abs=1e-8)
    assert {n for n in found if found[n] != system.values[n]} == {"radius_ratio", "inclination"}


def test_values_outside_are_moved_to_the_bounds() -> None:
    system = replace(invented(), free=("radius_sum", "K1", "limb_darkening1[V].1"))
    vector = Vector(system)
    wild = {**system.values, "radius_sum": 3.0, "K1": -5.0}
    lower, upper = vector.bounds
    x = vector.pack(wild)

    assert x[0] == upper[0] == QUANTITIES["radius_sum"].upper
    assert x[1] == lower[1] == 0.0


def test_bounds_are_those_of_the_register() -> None:
    vector = Vector(_all_free("power-2"))
    lower, upper = vector.bounds
    for number, name in enumerate(vector.names):
        if name == "inclination" or name.startswith("limb"):
            continue
        quantity = QUANTITIES[parse_key(name).name]
        assert (lower[number], upper[number]) == (quantity.lower, quantity.upper)


@pytest.mark.parametrize("law", LAWS)
def test_derivative_of_coefficients(law: str) -> None:
    """Against differences."""
    vector = Vector(_all_free(law))
    lower, upper = vector.bounds
    blocks = [position for block in vector.limb_blocks for position in block]
    x = vector.pack(vector.system.values)
    x[blocks] = lower[blocks] + 0.4 * (upper - lower)[blocks]
    claimed = vector.limb_jacobian(x)

    def coefficients(point: np.ndarray) -> np.ndarray:
        values = vector.unpack(point)
        return np.array([values[vector.names[position]] for position in blocks])

    for position in blocks:
        measured = central_difference(coefficients, x, position, step=1e-4)
        np.testing.assert_allclose(claimed[blocks, position], measured, rtol=1e-7, atol=1e-9)


def test_local_quantities_of_a_band() -> None:
    """The kernel's order: ten shared ones, limb darkening of both stars, six effects."""
    system = _all_free("quadratic")
    keys = band_keys(system, "I")

    assert keys[:2] == ["period", "epoch"]
    assert keys[7] is None
    assert keys[8:10] == ["surface_brightness_ratio[I]", "third_light[I]"]
    assert keys[10:14] == [f"limb_darkening{star}[I].{n}" for star in (1, 2) for n in (1, 2)]
    assert keys[14:] == [f"{effect}{star}[I]" for effect in EFFECTS for star in (1, 2)]


def test_an_orbit_seen_edge_on_is_at_its_bound() -> None:
    """cos^2 of 90 degrees in floating point is 4e-33, a place from which no step could leave."""
    vector = Vector(replace(invented(inclination=90.0), free=("inclination",)))

    assert vector.pack(vector.system.values)[0] == vector.bounds[0][0] == 0.0
