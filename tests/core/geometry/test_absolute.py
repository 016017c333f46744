"""Absolute dimensions: constants, textbooks, published systems."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from math import pi

import numpy as np
import pytest
from astropy import constants as si
from astropy import units as u
from hypothesis import given
from hypothesis import strategies as st

from shadowscale import constants
from shadowscale.geometry import absolute

NONE = float("nan")


@dataclass(frozen=True)
class Published:
    """A system as printed; errors are those printed, or the rounding of the inputs where none are."""

    period: float
    e: float
    i: float
    K: tuple[float, float]
    M: tuple[float, float]
    M_error: tuple[float, float]
    R: tuple[float, float]
    logg: tuple[float, float]
    logg_error: float
    a: float  # recomputed with the nominal constants, [solar radii]
    r: tuple[float, float]  # published R over Kepler's a, recomputed


# LL Aqr: Graczyk et al. 2016, A&A 594, A92. AR Aur: Southworth 2025, arXiv 2507.21781. AI Phe A: K
# Helminiak et al. 2009, rest Kirkby-Kent et al. 2016, A&A 591, A124; B: Maxted et al. 2020, MNRAS 498, 332.
# TZ For: Gallenne et al. 2016, A&A 586, A35. beta Aur: Behr et al. 2011, AJ 142, 6 and Southworth et al. 2007,
# A&A 467, 1215. zeta Phe: Southworth 2020, arXiv 2012.05559. 1 Per: Janik et al. 2003, A&A 408, 611.
# DI Her: Popper 1982 elements. TZ Men: Andersen et al. 1987. WW Aur: Southworth et al. 2005, MNRAS 363, 529.
# CM Dra: Morales et al. 2009, ApJ 691, 1400. YY Gem: Torres & Ribas 2002, ApJ 567, 1140. YZ Cas: Pavlovski et
# al. 2014, MNRAS 438, 590. GU Boo: Lopez-Morales & Ribas 2005, ApJ 631, 1120. Some K, e, i from memory.
# DI Her and TZ Men were reduced with an older mass constant, 0.227 % above the nominal one.
# fmt: off
SYSTEMS = {
    "LL Aqr": Published(20.178321, 0.31654, 89.548, (49.948, 57.736), (1.1949, 1.0337), (0.0007, 0.0007), (1.321, 1.002), (4.274, 4.451), 0.004, 40.7413, (0.03242, 0.02459)),
    "AR Aur": Published(4.134581, 0.0, 88.6, (108.36, 116.92), (2.5444, 2.3581), (0.0086, 0.0085), (1.8433, 1.7658), (4.3125, 4.3169), 0.001, 18.4160, (0.10009, 0.09588)),
    "AI Phe A": Published(24.592483, 0.1821, 88.502, (51.16, 49.11), (1.1973, 1.2473), (0.0037, 0.0039), (1.835, 2.912), (NONE, NONE), NONE, 47.9414, (0.03828, 0.06074)),
    "AI Phe B": Published(24.592483, 0.1872, 88.36, (51.16, 49.11), (1.1938, 1.2438), (0.0008, 0.0008), (1.8050, 2.9332), (4.0020, 3.5981), 0.0011, 47.8980, (0.03769, 0.06124)),
    "TZ For": Published(75.66647, 0.00002, 85.68, (38.90, 40.87), (2.057, 1.958), (0.001, 0.001), (8.28, 3.94), (2.91, NONE), 0.02, 119.6439, (0.06920, 0.03293)),
    "beta Aur 2011": Published(3.96004, 0.0, 76.0, (108.053, 110.911), (2.389, 2.327), (0.013, 0.013), (2.77, 2.63), (3.93, NONE), 0.006, 17.6636, (0.15681, 0.14889)),
    "beta Aur 2007": Published(3.96004673, 0.0018, 76.80, (107.46, 111.49), (2.376, 2.291), (0.027, 0.027), (2.762, 2.568), (3.932, 3.979), 0.005, 17.6029, (0.15691, 0.14589)),
    "zeta Phe": Published(1.6697739, 0.0116, 89.14, (131.4, 202.5), (3.908, 2.536), (0.057, 0.031), (2.835, 1.885), (4.1249, 4.2917), 0.001, 11.0206, (0.25721, 0.17102)),
    "1 Per": Published(25.935951, 0.3768, 88.048, (97.4, 91.2), (6.95, 7.42), (0.01, 0.01), (3.29, 3.86), (4.25, 4.14), 0.006, 89.6101, (0.03670, 0.04306)),
    "DI Her": Published(10.550164, 0.489, 89.3, (110.7, 126.6), (5.185, 4.534), (0.108, 0.060), (2.680, 2.477), (4.297, 4.307), 0.018, 43.1677, (0.06204, 0.05734)),
    "TZ Men": Published(8.569, 0.035, 88.73, (62.2, 102.8), (2.487, 1.504), (0.025, 0.010), (2.016, 1.432), (4.225, 4.303), 0.015, 27.9361, (0.07212, 0.05123)),
    "WW Aur": Published(2.52501936, 0.0, 87.55, (116.81, 126.49), (1.964, 1.814), (0.007, 0.007), (1.927, 1.841), (4.162, 4.167), 0.007, 12.1539, (0.15856, 0.15148)),
    "CM Dra": Published(1.268389985, 0.0054, 89.769, (72.23, 77.95), (0.2310, 0.2141), (0.0009, 0.0010), (0.2534, 0.2396), (4.994, 5.009), 0.009, 3.7651, (0.06731, 0.06364)),
    "YY Gem": Published(0.814282212, 0.0, 86.29, (121.18, 120.51), (0.5975, 0.6009), (0.0047, 0.0047), (0.6196, 0.6035), (4.630, 4.655), 0.051, 3.8981, (0.15896, 0.15484)),
    "YZ Cas": Published(4.4672235, 0.0, 88.332, (73.05, 124.78), (2.263, 1.325), (0.012, 0.007), (2.525, 1.331), (3.988, 4.311), 0.004, 17.4754, (0.14449, 0.07617)),
    "GU Boo": Published(0.488728, 0.0, 87.6, (142.65, 145.08), (0.610, 0.599), (0.007, 0.006), (0.623, 0.620), (4.634, 4.630), 0.028, 2.7819, (0.22397, 0.22289)),
}
# fmt: on


def computed_masses(system: Published) -> np.ndarray:
    return np.array(absolute.masses(system.period, *system.K, system.e, system.i))


@pytest.fixture(params=list(SYSTEMS.values()), ids=list(SYSTEMS))
def system(request: pytest.FixtureRequest) -> Published:
    return request.param


def test_published_masses(system: Published) -> None:
    assert np.all(np.abs(computed_masses(system) - system.M) <= system.M_error)


def test_swapped_velocities_would_be_seen(system: Published) -> None:
    swapped = computed_masses(replace(system, K=system.K[::-1]))
    order = np.sign(system.M[0] - system.M[1])
    assert np.sign(swapped[0] - swapped[1]) == -order


def test_axis_and_fractional_radii(system: Published) -> None:
    by_velocity = absolute.semi_major_axis_of_velocities(
        system.period, *system.K, system.e, system.i
    )
    by_masses = absolute.semi_major_axis(system.period, computed_masses(system).sum())
    assert by_velocity == pytest.approx(system.a, abs=6e-5)
    assert by_masses == pytest.approx(by_velocity, rel=1e-12)
    printed = absolute.semi_major_axis(system.period, sum(system.M))
    assert np.array(system.R) / printed == pytest.approx(system.r, abs=1.1e-5)


def test_published_gravities(system: Published) -> None:
    found = absolute.logg(system.M, system.R)
    for value, printed in zip(found, system.logg):
        if np.isfinite(printed):
            assert value == pytest.approx(printed, abs=system.logg_error)


def test_gravity_needs_no_mass(system: Published) -> None:
    a = absolute.semi_major_axis(system.period, computed_masses(system).sum())
    radii = np.array(system.R) / a
    found = absolute.logg_companion(
        system.period, np.array(system.K[::-1]), system.e, system.i, radii
    )
    assert found == pytest.approx(absolute.logg(computed_masses(system), system.R), abs=1e-10)


def test_density_needs_no_velocity(system: Published) -> None:
    masses = computed_masses(system)
    a = absolute.semi_major_axis(system.period, masses.sum())
    found = absolute.mean_densities(
        system.period, system.R[0] / a, system.R[1] / a, masses[1] / masses[0]
    )
    assert found == pytest.approx(absolute.mean_density(masses, system.R), rel=1e-10)


def test_masses_and_velocities_round_trip(system: Published) -> None:
    found = absolute.velocity_amplitudes(
        system.period, *computed_masses(system), system.e, system.i
    )
    assert found == pytest.approx(system.K, rel=1e-12)


def test_invisible_companion(system: Published) -> None:
    masses = computed_masses(system)
    found = absolute.companion_mass(system.period, system.K[0], system.e, system.i, masses[0])
    assert found == pytest.approx(masses[1], rel=1e-12)
    edge_on = absolute.companion_mass(system.period, system.K[0], system.e, 90.0, masses[0])
    assert edge_on <= found


def test_well_known_values_of_ll_aqr() -> None:
    # Computed from Graczyk et al. 2016 with the nominal constants.
    system = SYSTEMS["LL Aqr"]
    assert absolute.logg_companion(
        system.period, system.K[0], system.e, system.i, 0.02459
    ) == pytest.approx(4.45072, abs=2e-4)
    densities = absolute.mean_densities(
        system.period, 1.321 / 40.7413, 1.002 / 40.7413, 1.0337 / 1.1949
    )
    assert densities[0] == pytest.approx(730.757, rel=3e-5)
    light = absolute.luminosity([1.321], [6080.0])
    assert light[0] == pytest.approx(2.1484, abs=1e-4)  # published 2.15(7)
    assert absolute.bolometric_magnitude(light)[0] == pytest.approx(3.9097, abs=1e-4)


# Published combinations that contradict themselves: the difference must be seen, not smoothed.
def test_inconsistent_tables_are_seen() -> None:
    # TZ For B: log g 3.35 printed beside M = 1.958, R = 3.94.
    assert absolute.logg(1.958, 3.94) == pytest.approx(3.539, abs=5e-4)
    # GG Lup (Budding et al. 2015): a = 12.01 is in solar radii, not au.
    assert absolute.semi_major_axis(1.8495927, 4.16 + 2.64) == pytest.approx(12.013, abs=1e-3)
    # V380 Cyg: printed K give 11.07, 6.93 solar masses, not 11.80, 7.194.
    found = absolute.masses(12.425719, 94.5, 151.1, 0.234, 82.4)
    assert found == pytest.approx((11.07, 6.93), abs=6e-3)
    # WW Aur: K of Kitamura 1976 beside masses of Southworth et al. 2005, a per cent off either way.
    old = np.array(absolute.masses(2.52501936, 115.6, 127.7, 0.0, 87.55))
    assert old / (1.964, 1.814) - 1 == pytest.approx([0.010, -0.010], abs=2e-3)
    # CM Dra 2025: a = 3.6712 printed beside 0.2307 + 0.2136 solar masses, which want 3.7627.
    assert absolute.semi_major_axis(1.268389985, 0.2307 + 0.2136) == pytest.approx(3.7627, abs=1e-4)
    # YZ Cas: M1 = 2.308 beside M2 = 1.325 wants a = 17.547, not 17.47.
    assert absolute.semi_major_axis(4.4672235, 2.308 + 1.325) == pytest.approx(17.547, abs=1e-3)


@pytest.mark.parametrize(
    ("name", "masses"), [("DI Her", (5.1852, 4.5340)), ("TZ Men", (2.4878, 1.5053))]
)
def test_older_masses_come_from_an_older_constant(name: str, masses: tuple[float, float]) -> None:
    """1.0385e-7 in place of 1.036149e-7 (Batten et al. 1989, PDAO 17, 1) gives what was printed."""
    found = computed_masses(SYSTEMS[name]) * 1.0385e-7 / constants.MASS_FACTOR
    assert found == pytest.approx(masses, abs=1e-4)
    assert found == pytest.approx(SYSTEMS[name].M, abs=1.5e-3)


@pytest.mark.parametrize(
    ("period", "total", "a"),
    [
        # V1022 Cas; RR Lyn (Southworth 2021, arXiv 2109.10196); V505 Per (Tomasella et al. 2008).
        (12.1561594, 1.626 + 1.607, 32.898),
        (9.945074, 1.939 + 1.510, 29.404),
        (4.22, 1.2693 + 1.2514, 14.956),
        (0.3681414, 0.5428 + 0.4982, 2.1908),  # NSVS 01031772 (Lopez-Morales et al. 2006)
        (2.18706, 7.42 + 5.16, 16.491),  # V1388 Ori (Williams 2009)
        (1.9009382, 1.449 + 1.350, 9.101),  # V570 Per (Tomasella et al. 2008; P from memory)
        (1.9009382, 1.4569 + 1.3579, 9.118),  # the same (Yucel et al. 2025, arXiv 2511.14830)
        (0.859, 0.497 + 0.205, 3.380),  # THOR 42 (Murphy et al. 2020, arXiv 1911.05925)
        (20.178321, 1.1947 + 1.0334, 40.7386),  # LL Aqr (Miller et al. 2025, arXiv 2511.16519)
        (1.8495927, 4.16 + 2.64, 12.013),  # GG Lup (Budding et al. 2015)
    ],
)
def test_third_law(period: float, total: float, a: float) -> None:
    assert absolute.semi_major_axis(period, total) == pytest.approx(a, abs=6e-4)


@pytest.mark.parametrize(
    ("mass", "radius", "logg"),
    [  # computed from the published masses and radii by a separate program
        (1.2693, 1.287, 4.3225), (1.2514, 1.266, 4.3306),  # V505 Per (Tomasella et al. 2008)
        (1.449, 1.523, 4.2337), (1.350, 1.388, 4.2836),  # V570 Per (Tomasella et al. 2008)
        (1.4569, 1.543, 4.2248), (1.3579, 1.377, 4.2931),  # the same (Yucel et al. 2025)
        (0.5428, 0.5260, 4.7307), (0.4982, 0.5088, 4.7224),  # NSVS 01031772
        (7.42, 5.60, 3.8121), (5.16, 3.76, 4.0003),  # V1388 Ori
        (1.1947, 1.3180, 4.2755), (1.0334, 0.9927, 4.4587),  # LL Aqr (Miller et al. 2025)
        (12.95, 5.52, 4.067), (11.88, 5.09, 4.099),  # CW Cep (Lee & Hong 2021)
    ],
)  # fmt: skip
def test_gravities_of_more_pairs(mass: float, radius: float, logg: float) -> None:
    assert absolute.logg(mass, radius) == pytest.approx(logg, abs=6e-4)


YEAR = 365.25


def light_to_radii(speed: float, first: float, second: float) -> tuple[float, float]:
    """Smaller and larger radius [solar] from a speed [km/s] and contact intervals 1-2, 2-3 [d]."""
    size = speed * 86400e3 / constants.R_SUN
    return size * first / 2, size * (first + second) / 2


class TestTextbooks:
    """Worked examples, recomputed with the nominal constants."""

    def test_carroll_and_ostlie_examples(self) -> None:
        # Carroll & Ostlie, Modern Astrophysics, examples 7.3.1-7.3.2 (inputs from memory).
        shifts = np.array([0.072, 0.0068])
        K = shifts / 656.281 * constants.C_KM_S
        assert pytest.approx([32.890, 3.1063], abs=5e-4) == K
        masses = absolute.masses(8.6 * YEAR, *K)
        assert masses == pytest.approx((1.3100, 13.8704), abs=5e-4)
        radii = light_to_radii(K.sum(), 11.7 / 24, 164.0)
        assert radii == pytest.approx((1.0897, 367.66), rel=2e-4)
        primary, secondary = 10 ** (-0.4 * (9.6 - 6.3)), 10 ** (-0.4 * (6.6 - 6.3))
        assert ((1 - primary) / (1 - secondary)) ** 0.25 == pytest.approx(1.4092, abs=1e-4)

    def test_carroll_and_ostlie_problem(self) -> None:
        # Problem 7.6: 5.4 and 22.4 km/s, 6.31 yr; contacts 0.58 and 0.64 d (in part from memory).
        heavy, light = absolute.masses(6.31 * YEAR, 5.4, 22.4)
        assert (heavy, light) == pytest.approx((4.1341, 0.9966), abs=5e-4)
        assert light_to_radii(27.8, 0.58, 0.64) == pytest.approx((1.0012, 2.1060), abs=5e-4)

    def test_maoz(self) -> None:
        # Maoz, Astrophysics in a Nutshell, ch. 2: K = 100 and 200 km/s, P = 2 d, circular.
        masses = absolute.masses(2.0, 100.0, 200.0)
        assert masses == pytest.approx((3.73014, 1.86507), abs=5e-6)
        assert absolute.semi_major_axis_of_velocities(2.0, 100.0, 200.0) == pytest.approx(
            11.8594, abs=5e-5
        )
        assert np.array(masses) / (3 * pi / 16) == pytest.approx([6.3325, 3.1662], abs=1e-4)
        # Eclipsing: K = 20 and 5 km/s, P = 5 yr, 0.3 d and 1 d (in part from memory).
        light, heavy = absolute.masses(5 * YEAR, 20.0, 5.0)
        assert (heavy, light) == pytest.approx((2.3653, 0.5913), abs=5e-5)
        small, large = light_to_radii(25.0, 0.3, 1.0)
        assert (large, small) == pytest.approx((2.0181, 0.4657), abs=5e-5)

    def test_physics_olympiad(self) -> None:
        # International Physics Olympiad 2007, question "Pink": sodium extremes at 5895.9 A.
        K = (
            (5897.7 - 5894.1) / 2 / 5895.9 * constants.C_KM_S,
            (5899.0 - 5892.8) / 2 / 5895.9 * constants.C_KM_S,
        )
        assert pytest.approx((91.526, 157.628), abs=6e-3) == K
        masses = absolute.masses(3.0, *K)
        assert masses == pytest.approx((3.04165, 1.76612), abs=3e-4)
        assert absolute.semi_major_axis_of_velocities(3.0, *K) == pytest.approx(14.7741, abs=5e-4)

    def test_irodov(self) -> None:
        # Irodov 5.228: equal masses, maximum doublet splitting 1.2e-4 every 30 d, so P = 60 d.
        K = 1.2e-4 * constants.C_KM_S / 2
        masses = absolute.masses(60.0, K, K)
        kilograms = np.array(masses) * constants.GM_SUN / constants.G
        assert kilograms == pytest.approx([2.87776e29] * 2, rel=1e-5)
        a = absolute.semi_major_axis_of_velocities(60.0, K, K) * constants.R_SUN
        assert a == pytest.approx(2.96816e10, rel=1e-5)

    def test_young_and_freedman(self) -> None:
        # Young & Freedman 37: 4.567710e14 ... 4.568910e14 Hz, P = 11.0 d, equal masses.
        K = (4.568910 - 4.567710) / 2 / 4.568110 * constants.C_KM_S
        assert pytest.approx(39.376, abs=1e-3) == K
        assert absolute.masses(11.0, K, K)[0] == pytest.approx(0.2783, abs=1e-4)

    def test_zeilik_and_gregory(self) -> None:
        # Zeilik & Gregory, problem 12-6: 20 and 60 km/s, 1.5 yr.
        assert absolute.masses(1.5 * YEAR, 20.0, 60.0) == pytest.approx((21.7989, 7.2663), rel=2e-4)

    def test_simple_laws(self) -> None:
        # P = 20 yr, a = 4 au: 0.16 solar masses; P = 32 yr, a = 16 au: 4 (course notes).
        au = constants.AU / constants.R_SUN
        for years, axis, mass in ((20.0, 4.0, 0.16), (32.0, 16.0, 4.0)):
            assert absolute.semi_major_axis(years * YEAR, mass) / au == pytest.approx(
                axis, rel=1e-4
            )
        assert absolute.velocity_amplitudes(1.0, 3.0, 1.0)[0] * 3 == pytest.approx(
            absolute.velocity_amplitudes(1.0, 3.0, 1.0)[1]
        )


class TestConstants:
    """Against astropy, and digits recomputed with 30-digit arithmetic."""

    def test_nominal_values(self) -> None:
        assert si.GM_sun.value == constants.GM_SUN  # IAU 2015 Resolution B3
        assert si.R_sun.value == constants.R_SUN
        assert si.L_sun.value == constants.L_SUN
        assert si.L_bol0.value == constants.L_BOL_ZERO
        for ours, theirs in (
            (constants.G, si.G),
            (constants.C, si.c),
            (constants.H_PLANCK, si.h),
            (constants.K_BOLTZMANN, si.k_B),
            (constants.SIGMA_SB, si.sigma_sb),
            (constants.AU, si.au),
            (constants.PC, si.pc),
        ):
            assert ours == pytest.approx(theirs.si.value, rel=1e-10)

    def test_derived_factors(self) -> None:
        assert pytest.approx(1.03614906659389e-7, rel=1e-13) == constants.MASS_FACTOR
        assert pytest.approx(1.97656850411668e-2, rel=1e-13) == constants.AXIS_FACTOR
        assert pytest.approx(4.2082783458296, rel=1e-13) == constants.KEPLER_FACTOR
        assert pytest.approx(50.5927316922, rel=1e-11) == constants.SPIN_FACTOR
        assert np.log10(constants.GRAVITY_FACTOR) == pytest.approx(0.86166612587922, abs=1e-13)
        assert pytest.approx(4.4380676273031, abs=1e-13) == constants.LOGG_SUN
        assert pytest.approx(1409.7798, abs=1e-4) == constants.DENSITY_SUN
        assert pytest.approx(4.73999593392, abs=1e-11) == constants.MBOL_SUN

    def test_whole_chain_in_units(self) -> None:
        # The same formulas with astropy's units instead of our factors.
        P, K1, K2, e, i = 7.5 * u.day, 80.0 * u.km / u.s, 95.0 * u.km / u.s, 0.3, 87.0 * u.deg
        a = P / (2 * np.pi) * np.sqrt(1 - e**2) * (K1 + K2) / np.sin(i)
        mass1 = (
            P / (2 * np.pi) * (1 - e**2) ** 1.5 * (K1 + K2) ** 2 * K2 / np.sin(i) ** 3 / si.GM_sun
        )
        masses = absolute.masses(7.5, 80.0, 95.0, 0.3, 87.0)
        found = absolute.semi_major_axis(7.5, sum(masses))
        assert found == pytest.approx((a.to(u.m) / si.R_sun).decompose().value, rel=1e-10)
        assert masses[0] == pytest.approx(mass1.decompose().value, rel=1e-10)
        spin = (2 * np.pi * 1.7 * si.R_sun / P * np.sin(i)).to(u.km / u.s).value
        assert absolute.synchronous_velocity(1.7, 7.5, 87.0) == pytest.approx(spin, rel=1e-10)
        light = 4 * np.pi * (1.7 * si.R_sun) ** 2 * si.sigma_sb * (6300 * u.K) ** 4 / si.L_sun
        assert absolute.luminosity(1.7, 6300.0) == pytest.approx(light.decompose().value, rel=1e-10)
        gravity = (si.GM_sun * 1.3 / (1.7 * si.R_sun) ** 2).cgs.value
        assert absolute.logg(1.3, 1.7) == pytest.approx(np.log10(gravity), abs=1e-10)

    def test_masses_do_not_know_the_solar_radius(self) -> None:
        # M sin^3 i = 1.036149e-7 (Torres, Andersen & Gimenez 2010, A&ARv 18, 67) holds no radius.
        assert absolute.masses(1.0, 1.0, 0.0)[1] == pytest.approx(1.036149e-7, rel=1e-6)


def test_distance_of_a_pair_of_suns() -> None:
    # Two Suns at 100 pc with BC = -0.08: m = 4.74 + 0.08 - 2.5 log 2 + 5 + A, by definition.
    magnitude = 4.74 + 0.08 - 2.5 * np.log10(2) + 5 + 0.31
    found = absolute.distance(magnitude, (4.74, 4.74), (-0.08, -0.08), 0.31)
    assert found == pytest.approx(100.0, rel=1e-12)


def test_distance_of_a_bright_and_a_faint_star() -> None:
    near = absolute.distance(10.0, (3.0, 9.0), (0.0, 0.0), 0.0)
    alone = 10 ** (1 + 7 / 5)
    assert alone < near < 1.01 * alone


@given(
    mass=st.floats(0.05, 50), other=st.floats(1e-4, 50), e=st.floats(0, 0.9), i=st.floats(20, 90)
)
def test_companion_mass_inverts_velocities(mass: float, other: float, e: float, i: float) -> None:
    K, _ = absolute.velocity_amplitudes(5.0, mass, other, e, i)
    assert absolute.companion_mass(5.0, K, e, i, mass) == pytest.approx(other, rel=1e-11)


def test_samples_pass_through() -> None:
    K = np.array([49.9, 50.0, 50.1])
    masses = absolute.masses(20.0, K, 57.7, np.array([0.3, 0.31, 0.32]), 89.5)
    assert masses[0].shape == (3,)
    assert absolute.companion_mass(20.0, K, 0.3, 89.5, 1.2).shape == (3,)
    assert np.isnan(absolute.companion_mass(20.0, np.nan, 0.3, 89.5, 1.2))


@pytest.mark.parametrize(
    ("name", "sigma", "errors"),
    [  # sigma of K1, K2, e, i as printed; errors of M1, M2 (printed, with a digit more recomputed)
        ("LL Aqr", (0.013, 0.014, 0.00007, 0.026), (0.0007, 0.0006)),
        ("AR Aur", (0.18, 0.17, 0.0, 0.0072), (0.0086, 0.0085)),
        ("beta Aur 2011", (0.072, 0.071, 0.0, 0.4), (0.0129, 0.0126)),
        ("zeta Phe", (0.7, 1.3, 0.0024, 0.11), (0.058, 0.031)),
        # dominated by sigma_e
        ("AI Phe A", (0.03, 0.02, 0.0051, 0.039), (0.00365, 0.00392)),
    ],
)
def test_published_errors_of_masses(
    name: str, sigma: tuple[float, ...], errors: tuple[float, float]
) -> None:
    """Numerical derivatives of `masses` against the errors that the papers print.

    Source of the form: Torres, Andersen & Gimenez 2010, A&ARv 18, 67.
    """
    system = SYSTEMS[name]
    centre = np.array([*system.K, system.e, system.i])
    variance = np.zeros(2)
    for step in np.diag(np.array(sigma) * 1e-3):
        shifted = np.array(absolute.masses(system.period, *(centre + step)))
        variance += ((shifted - computed_masses(system)) / 1e-3) ** 2
    digit = 10.0 ** np.floor(np.log10(min(errors)) - 1)
    assert np.sqrt(variance) == pytest.approx(errors, abs=max(0.06 * min(errors), digit / 2))


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: absolute.masses(1.0, 1.0, 1.0, 1.0), "eccentricity: expected 0 <= e < 1"),
        (lambda: absolute.masses(1.0, 1.0, 1.0, 0.0, 0.0), "inclination: expected 0 < i"),
        (lambda: absolute.companion_mass(1.0, 1.0, 0.0, 90.0, -1.0), "expected a positive mass"),
        (lambda: absolute.companion_mass(1.0, -1.0, 0.0, 90.0, 1.0), "no negative amplitude"),
    ],
)
def test_refuses(call: Callable[[], object], words: str) -> None:
    with pytest.raises(ValueError, match=words):
        call()
