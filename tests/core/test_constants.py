"""Constants against the standards, and against astropy's copy of them."""

from __future__ import annotations

from math import log10, pi

import numpy as np
import pytest
from astropy import constants as cds
from astropy import units as u
from astropy.constants import iau2015

from shadowscale import constants


def test_nominal_solar_values() -> None:
    """IAU 2015 Resolutions B2 and B3 (Prsa et al. 2016, AJ 152, 41): exact."""
    assert constants.GM_SUN == 1.3271244e20
    assert constants.R_SUN == 6.957e8
    assert constants.L_SUN == 3.828e26
    assert constants.TEFF_SUN == 5772.0
    assert constants.L_BOL_ZERO == 3.0128e28


@pytest.mark.parametrize(
    ("ours", "theirs"),
    [
        (constants.GM_SUN, iau2015.GM_sun.si.value),
        (constants.R_SUN, iau2015.R_sun.si.value),
        (constants.L_SUN, iau2015.L_sun.si.value),
        (constants.L_BOL_ZERO, iau2015.L_bol0.si.value),
        (constants.AU, iau2015.au.si.value),
        (constants.PC, iau2015.pc.si.value),
        (constants.G, cds.G.si.value),
        (constants.C, cds.c.si.value),
        (constants.H_PLANCK, cds.h.si.value),
        (constants.K_BOLTZMANN, cds.k_B.si.value),
        (constants.SIGMA_SB, cds.sigma_sb.si.value),
    ],
)
def test_physical_constants(ours: float, theirs: float) -> None:
    """Source: astropy.constants (IAU 2015 and CODATA 2018)."""
    assert ours == pytest.approx(theirs, rel=1e-9)


@pytest.mark.parametrize(
    ("found", "expected"),
    [
        (constants.MASS_FACTOR, 1.03614906659389e-7),
        (constants.AXIS_FACTOR, 1.97656850411668e-2),
        (constants.KEPLER_FACTOR, 4.2082783458296),
        (constants.SPIN_FACTOR, 50.5927316922),
        (constants.LOGG_SUN, 4.4380676273031),
        (constants.MBOL_SUN, 4.73999593392),
        (log10(constants.GRAVITY_FACTOR), 0.86166612587922),
        (constants.DENSITY_SUN, 1409.7798),
    ],
    ids=["mass", "axis", "Kepler", "spin", "log g", "Mbol", "gravity", "density"],
)
def test_derived_constants(found: float, expected: float) -> None:
    """Evaluated apart with 30 digits from the nominal values; the first also printed as 1.036149e-7 in
    Torres, Andersen & Gimenez 2010, A&ARv 18, 67."""
    assert found == pytest.approx(expected, rel=3e-8 if expected > 1000 else 2e-12)


def test_the_often_printed_axis_constant_is_of_another_sun() -> None:
    """1.976682e-2 belongs to a solar radius of 6.9566e8 m, 5.7e-5 off the nominal one."""
    axis = constants.AXIS_FACTOR

    assert axis * constants.R_SUN / 6.9566e8 == pytest.approx(1.976682e-2, rel=2e-7)
    assert abs(axis / 1.976682e-2 - 1) == pytest.approx(5.74e-5, rel=1e-2)


def test_the_sun_radiates_its_temperature() -> None:
    """L = 4 pi R^2 sigma T^4 with the nominal values gives 5772.003 K (evaluated apart)."""
    teff = (constants.L_SUN / (4 * pi * constants.R_SUN**2 * constants.SIGMA_SB)) ** 0.25

    assert teff == pytest.approx(5772.003, abs=0.001)


def test_factors_by_units() -> None:
    """The same by astropy's units: 1 km/s, 1 d."""
    period, speed = 1.0 * u.day, 1.0 * u.km / u.s
    length = (period * speed / (2 * np.pi)).to_value(iau2015.R_sun)
    share = period * speed**3 / (2 * np.pi) / iau2015.GM_sun
    axis, mass = constants.AXIS_FACTOR, constants.MASS_FACTOR

    assert axis == pytest.approx(length, rel=1e-12)
    assert mass == pytest.approx(share.to_value(u.dimensionless_unscaled), rel=1e-12)
