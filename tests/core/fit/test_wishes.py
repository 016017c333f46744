"""What the user holds, frees or knows beforehand, and what is told where it cannot be."""

from __future__ import annotations

from math import hypot
from pathlib import Path

import numpy as np
import pytest

from fit_examples import (
    EPOCH,
    PERIOD,
    QUADRATIC,
    Solved,
    ephemeris,
    invented,
    observed,
    observed_velocities,
    ordinary,
    sigma_of,
    solved,
)
from shadowscale.errors import UsageError
from shadowscale.fit.derived import derived_value
from shadowscale.fit.plan import Plan, Prior
from shadowscale.fit.solve import solve


def _prior(name: str, value: float, sigma: float) -> Prior:
    return Prior(name, (value,), (sigma,))


def _again(*, velocities: bool = False, **wishes: object) -> Solved:
    """The ordinary pair solved with other wishes."""
    known = ordinary()
    rv = known.velocities if velocities else None
    return solved(known.truth, ephemeris(**wishes), photometry=known.photometry, velocities=rv)


# ---------------------------------------------------------------- held


def test_held_values_stay_and_have_no_error() -> None:
    found = _again(fixed={"radius_ratio": (0.79,), "third_light": (0.01,)}).solution

    for name, value in (("radius_ratio", 0.79), ("third_light[V]", 0.01)):
        estimate = found.estimates[name]
        assert estimate.value == value
        assert (estimate.minus, estimate.plus, estimate.how) == (None, None, "fixed")
        assert name not in found.system.free


def test_a_name_without_a_band_means_every_band() -> None:
    truth = invented(bands={"V": 0.62, "I": 0.74}, third=0.1)
    photometry = observed(truth, count=400)
    both = solved(truth, ephemeris(fixed={"third_light": (0.1,)}), photometry=photometry).solution
    wishes = {"third_light[V]": (0.1,), "third_light": (0.12,)}
    one = solved(truth, ephemeris(fixed=wishes), photometry=photometry).solution

    assert [both.system.value("third_light", band) for band in "VI"] == [0.1, 0.1]
    assert [one.system.value("third_light", band) for band in "VI"] == [0.1, 0.12]


def test_a_held_epoch_may_be_any_cycle() -> None:
    early = EPOCH - 100 * PERIOD
    found = solved(
        invented(), Plan(period=PERIOD, fixed={"epoch": (early,)}), photometry=ordinary().photometry
    )

    assert found.solution.estimates["epoch"].value == early
    assert abs(found.pull("radius_ratio")) < 3


def test_held_limb_darkening() -> None:
    found = _again(fixed={"limb_darkening1[V]": (0.62, 0.55), "limb_darkening2": (0.68, 0.60)})
    system = found.solution.system

    assert system.limb_darkening(1, "V") == (0.62, 0.55)
    assert system.limb_darkening(2, "V") == (0.68, 0.60)
    assert not [name for name in system.free if name.startswith("limb")]
    assert abs(found.pull("radius_sum")) < 3


def test_all_geometry_held_leaves_the_light_ratio() -> None:
    truth = ordinary().truth
    names = ("radius_sum", "radius_ratio", "inclination")
    found = _again(fixed={name: (truth.values[name],) for name in names}, orbit="circular")

    assert abs(found.pull("surface_brightness_ratio[V]")) < 3
    assert "r1" in found.solution.estimates
    assert found.solution.estimates["r1"].minus is None


# ---------------------------------------------------------------- tied


def test_one_systemic_velocity() -> None:
    apart = ordinary().solution.estimates
    found = _again(velocities=True, ties={"gamma2": "gamma1"})
    estimates = found.solution.estimates
    one, two = estimates["gamma1"], estimates["gamma2"]

    assert (two.value, two.minus, two.plus) == (one.value, one.minus, one.plus)
    assert (one.how, two.how) == ("fitted", "derived")
    assert sigma_of(one) < 0.9 * min(sigma_of(apart[name]) for name in ("gamma1", "gamma2"))
    assert abs(found.pull("gamma1")) < 3
    assert "gamma2" not in found.solution.system.free


def test_tied_limb_darkening_and_third_light() -> None:
    truth = invented(bands={"V": 0.62, "I": 0.74}, third=0.1)
    plan = ephemeris(
        ties={"limb_darkening2": "limb_darkening1", "third_light[I]": "third_light[V]"}
    )
    found = solved(truth, plan, photometry=observed(truth, count=400)).solution
    system = found.system

    for band in "VI":
        assert system.limb_darkening(2, band) == system.limb_darkening(1, band)
    assert system.value("third_light", "I") == system.value("third_light", "V")
    assert found.estimates["limb_darkening2[V].1"].how == "derived"
    assert not [name for name in system.free if name.startswith("limb_darkening2")]


@pytest.mark.parametrize(
    ("wishes", "words"),
    [
        ({"ties": {"gamma2": "K1"}}, "same kind"),
        ({"ties": {"gamma1": "gamma1"}}, "another quantity"),
        ({"ties": {"third_light": "third_light[V]"}}, "another quantity"),
        ({"ties": {"gamma1": "gamma2", "gamma2": "gamma1"}}, "not tied itself"),
        ({"ties": {"gamma2": "gamma1"}, "fixed": {"gamma2": (3.0,)}}, "do not name"),
        ({"ties": {"gamma2": "gamma1"}, "priors": (_prior("gamma2", 3, 1),)}, "do not name"),
        ({"ties": {"third_light[V]": "third_light[I]"}}, "third_light"),
        ({"ties": {"ellipsoidal2": "ellipsoidal1"}}, "these data can give"),
    ],
)
def test_ties_that_cannot_be(wishes: dict[str, object], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        _again(velocities=True, **wishes)


# ---------------------------------------------------------------- free


def test_third_light_free_by_name() -> None:
    found = _again(free=("third_light",))
    estimate = found.solution.estimates["third_light[V]"]

    assert estimate.how == "fitted"
    assert abs(found.pull("third_light[V]")) < 3.5


def test_free_limb_darkening_has_no_prior() -> None:
    """Without the prior the errors of the coefficients are larger, and the truth is still inside."""
    free, tied = _again(free=("limb_darkening1", "limb_darkening2")), _again()
    name = "limb_darkening1[V].1"

    assert sigma_of(free.solution.estimates[name]) > 1.1 * sigma_of(tied.solution.estimates[name])
    assert abs(free.pull(name)) < 3
    assert free.solution.estimates[name].prior is None


# ---------------------------------------------------------------- priors


def test_a_prior_narrows_its_quantity_as_weights_add() -> None:
    """1/sigma^2 of a Gaussian prior adds to that of the data (standard)."""
    without = _again(orbit="circular")
    data = sigma_of(without.solution.estimates["radius_sum"])
    value = without.solution.estimates["radius_sum"].value + data
    found = _again(orbit="circular", priors=(_prior("radius_sum", value, data),)).solution
    estimate = found.estimates["radius_sum"]

    assert estimate.prior == (value, data)
    assert sigma_of(estimate) == pytest.approx(data / np.sqrt(2), rel=0.02)
    assert estimate.value == pytest.approx(value - data / 2, abs=0.03 * data)


def test_a_prior_on_inclination_adds_its_weight() -> None:
    without = _again(orbit="circular").solution.estimates["inclination"]
    data = sigma_of(without)
    found = _again(orbit="circular", priors=(_prior("inclination", without.value, data),))

    assert sigma_of(found.solution.estimates["inclination"]) == pytest.approx(
        data / np.sqrt(2), rel=0.03
    )


def test_a_wide_prior_at_90_degrees_does_not_decide() -> None:
    """Regression: the slope of i to cos^2 i is infinite at 90 degrees, which locked the fit there."""
    truth = invented(inclination=90.0)
    photometry = observed(truth)
    without = solved(truth, ephemeris(), photometry=photometry).solution.estimates["inclination"]
    plan = ephemeris(priors=(_prior("inclination", 90.0, 1.0),))
    found = solved(truth, plan, photometry=photometry).solution.estimates["inclination"]

    assert found.value == pytest.approx(without.value, abs=0.5 * sigma_of(without))
    assert sigma_of(found) == pytest.approx(sigma_of(without), rel=0.4)


def test_a_prior_on_the_light_ratio_decides_a_partial_eclipse() -> None:
    truth = invented(inclination=82.5, radius_ratio=0.8, bands={"V": 0.9})
    photometry = observed(truth, sigma=2e-3)
    known = derived_value(truth, "light_ratio[V]")
    without = solved(truth, photometry=photometry)
    plan = ephemeris(priors=(_prior("light_ratio[V]", known, 0.01),))
    found = solved(truth, plan, photometry=photometry)
    ratio = found.solution.estimates["radius_ratio"]

    assert sigma_of(ratio) < 0.3 * sigma_of(without.solution.estimates["radius_ratio"])
    assert abs(found.pull("radius_ratio")) < 3
    assert found.solution.estimates["light_ratio[V]"].prior == (known, 0.01)
    assert sigma_of(found.solution.estimates["light_ratio[V]"]) < 0.0101


@pytest.mark.parametrize("name", ["M1", "R1", "mass_ratio", "logg2"])
def test_priors_on_derived_quantities(name: str) -> None:
    """A prior as wide as the data's own error at the same value: the error falls by root two."""
    own = ordinary().solution.estimates[name]
    found = _again(velocities=True, priors=(_prior(name, own.value, sigma_of(own)),)).solution

    assert sigma_of(found.estimates[name]) == pytest.approx(sigma_of(own) / np.sqrt(2), rel=0.03)
    assert found.estimates[name].value == pytest.approx(own.value, abs=0.1 * sigma_of(own))


def test_a_prior_on_third_light_acts_without_more_words() -> None:
    """Regression: third light stayed at zero, and its prior was ignored, unless it was freed as well."""
    truth = invented(inclination=83.0, third=0.05)
    plan = ephemeris(priors=(_prior("third_light[V]", 0.05, 0.005),))
    found = solved(truth, plan, photometry=observed(truth, sigma=5e-3))
    estimate = found.solution.estimates["third_light[V]"]

    assert estimate.how == "fitted"
    assert estimate.value == pytest.approx(0.05, abs=0.015)
    assert sigma_of(estimate) < 0.0051


def test_a_prior_on_the_epoch_may_be_of_any_cycle() -> None:
    early = EPOCH - 100 * PERIOD
    plan = Plan(period=PERIOD, priors=(_prior("epoch", early, 5e-4),))
    found = solved(invented(), plan, photometry=ordinary().photometry).solution
    cycles = (found.estimates["epoch"].value - early) / PERIOD

    assert cycles == pytest.approx(round(cycles), abs=1e-3)
    assert found.estimates["radius_ratio"].value == pytest.approx(0.78, abs=0.003)


def test_a_prior_on_limb_darkening_stands_on_the_coefficients() -> None:
    prior = Prior("limb_darkening1[V]", (0.62, 0.55), (0.01, 0.02))
    found = _again(priors=(prior,)).solution.estimates

    assert found["limb_darkening1[V].1"].prior == (0.62, 0.01)
    assert found["limb_darkening1[V].2"].prior == (0.55, 0.02)
    assert sigma_of(found["limb_darkening1[V].1"]) <= 0.0101
    assert sigma_of(found["limb_darkening1[V].2"]) <= 0.0201
    assert found["limb_darkening1[V].1"].value == pytest.approx(0.62, abs=0.02)


# ---------------------------------------------------------------- published limb darkening

# Claret & Bloemen 2011, A&A 529, A75 (ATLAS, least squares, V), quadratic law.
CLARET = """Teff logg band a b
4500 4.5 V 0.7872 0.0100
5750 4.5 V 0.4650 0.2565
6500 4.5 V 0.3493 0.3154
4500 4.0 V 0.7872 0.0100
5750 4.0 V 0.4650 0.2565
6500 4.0 V 0.3493 0.3154
10000 4.0 V 0.2276 0.3267
10000 4.5 V 0.2276 0.3267
"""


def test_coefficients_from_a_table(tmp_path: Path) -> None:
    """Starts at the table's row for the temperatures, ends near it, with a narrower prior than grey's."""
    path = tmp_path / "claret.txt"
    path.write_text(CLARET, encoding="utf-8")
    truth = invented(law="quadratic", limb=((0.4650, 0.2565), (0.7872, 0.0100)), bands={"V": 0.2})
    photometry, velocities = observed(truth), observed_velocities(truth)
    plan = ephemeris(
        law="quadratic", limb_table=str(path), teff1=(5750.0, 50.0), teff2=(4500.0, 60.0)
    )
    found = solved(truth, plan, photometry=photometry, velocities=velocities)
    grey = solved(
        truth, ephemeris(law="quadratic", teff1=(5750.0, 50.0), teff2=(4500.0, 60.0)),
        photometry=photometry, velocities=velocities,
    )  # fmt: skip
    words = next(each.words for each in found.solution.decisions if each.what == "limb darkening")

    assert "published table at 5750 K" in words
    assert "published table at 4500 K" in words
    for name in ("radius_sum", "radius_ratio", "inclination", "limb_darkening1[V].1"):
        assert abs(found.pull(name)) < 3
    name = "limb_darkening2[V].1"
    assert sigma_of(found.solution.estimates[name]) < sigma_of(grey.solution.estimates[name])


def test_a_table_follows_the_fitted_gravity(tmp_path: Path) -> None:
    """The coefficients are looked up again at the fitted log g: here they depend on it strongly."""
    rows = ["Teff logg u"]
    rows += [
        f"{teff} {logg} {0.2 + 0.4 * (logg - 3)}" for teff in (4000, 8000) for logg in (3.0, 5.0)
    ]
    path = tmp_path / "made_up.txt"
    path.write_text("\n".join(rows) + "\n", encoding="utf-8")
    known = ordinary()
    plan = ephemeris(law="linear", limb_table=str(path), teff1=(6500.0, 50.0), teff2=(5800.0, 50.0))
    found = solved(known.truth, plan, photometry=known.photometry, velocities=known.velocities)
    words = next(each.words for each in found.solution.decisions if each.what == "limb darkening")

    assert f"log g {found.solution.estimates['logg1'].value:.2f}" in words
    assert f"log g {found.solution.estimates['logg2'].value:.2f}" in words


def test_a_table_read_at_a_guessed_temperature_is_trusted_less(tmp_path: Path) -> None:
    """Nobody said how hot the stars are: the prior takes in coefficients of other temperatures."""
    path = tmp_path / "made_up.txt"
    path.write_text(
        "Teff logg u\n4000 3 0.8\n4000 5 0.8\n9000 3 0.5\n9000 5 0.5\n", encoding="utf-8"
    )
    table = {"law": "linear", "limb_table": str(path)}
    known, truth = ephemeris(**table, teff1=(6500.0, 50.0)), ordinary().truth
    photometry = observed(truth, count=300, sigma=4e-3)
    told, guessed = (
        solved(truth, plan, photometry=photometry).solution.estimates
        for plan in (known, ephemeris(**table))
    )
    name = "limb_darkening1[V].1"
    assert sigma_of(guessed[name]) > 1.2 * sigma_of(told[name])


# ---------------------------------------------------------------- orbit


def test_a_circular_orbit_as_asked() -> None:
    found = _again(orbit="circular").solution

    assert found.system.values["ecosw"] == found.system.values["esinw"] == 0.0
    assert not {"ecosw", "esinw"} & set(found.system.free)
    assert "omega" not in found.estimates
    assert "no periastron" in found.absent["omega"]


def test_an_eccentric_orbit_as_asked() -> None:
    found = _again(orbit="eccentric")

    assert {"ecosw", "esinw"} <= set(found.solution.system.free)
    assert hypot(found.pull("ecosw"), found.pull("esinw")) < 3.5


def test_a_start_given_by_the_user_leads_to_the_same_end() -> None:
    given = _again(start={"radius_ratio": 1.25, "inclination": 86.0}).solution.estimates
    own = _again().solution.estimates

    for name in ("radius_ratio", "inclination", "radius_sum"):
        assert given[name].value == pytest.approx(own[name].value, abs=0.02 * sigma_of(own[name]))


# ---------------------------------------------------------------- wrong wishes


@pytest.mark.parametrize(
    ("wishes", "words"),
    [
        ({"free": ("radius_ration",)}, r"--free: .*found 'radius_ration'"),
        ({"free": ("M1",)}, r"--free: expected a quantity that the model is written in.*'M1'"),
        ({"fixed": {"third_light[B]": (0.0,)}}, r"--fix: expected one of third_light\[V\].*'third_light\[B\]'"),
        ({"priors": (_prior("weight", 1.0, 0.1),)}, r"--prior: .*found 'weight'"),
        ({"fixed": {"limb_darkening1": (0.5,)}}, r"expected 2 coefficients \(c, alpha\), found '0.5'"),
        ({"fixed": {"eccentricity": (0.0,)}}, r"--fix: .*'eccentricity'"),
        ({"priors": (_prior("R1", 1.5, 0.1),)}, r"--prior: expected a quantity that these data can give \(velocities are missing\), found 'R1'"),
        ({"fixed": {"K1": (100.0,)}}, r"--fix: expected a quantity that these data can give \(velocities are missing\), found 'K1'"),
        ({"free": ("gamma2",)}, r"--free: expected a quantity that these data can give \(velocities are missing\), found 'gamma2'"),
        ({"fixed": {"third_light": (0.1, 0.2)}}, r"third_light"),
        ({"fixed": {"radius_ratio": (-1.0,)}}, r"radius_ratio"),
        ({"priors": (_prior("radius_ratio", 0.8, 0.0),)}, r"radius_ratio"),
        ({"fixed": {"limb_darkening1[V].1": (0.3,)}}, r"limb_darkening1"),
        ({"priors": (_prior("limb_darkening1[V].2", 0.3, 0.1),)}, r"limb_darkening1"),
        ({"law": "cubic"}, r"cubic"),
        ({"orbit": "round"}, r"round"),
        ({"levels": "week"}, r"week"),
        ({"effects": {"tides": "predicted"}}, r"tides"),
        ({"effects": {"reflection": "on"}}, r"on"),
        ({"light_time": "on"}, r"on"),
    ],
    ids=lambda item: "-".join(map(str, item.values())) if isinstance(item, dict) else "",
)  # fmt: skip
def test_wrong_wishes_are_told(wishes: dict[str, object], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        solve(ordinary().photometry, None, ephemeris(**wishes))


def test_number_of_coefficients_is_that_of_the_law() -> None:
    plan = ephemeris(law="linear", fixed={"limb_darkening1": QUADRATIC[0]})
    with pytest.raises(UsageError, match=r"limb_darkening1\[V\]: expected 1 coefficients \(u\)"):
        solve(ordinary().photometry, None, plan)
