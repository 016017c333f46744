"""Numbers in words: the table's rows, the plan's wishes, doubts, the comparison."""

from __future__ import annotations

from dataclasses import replace
from math import log

import pytest
from hypothesis import given
from hypothesis import strategies as st

from made_up import made_up_session
from shadowscale.fit.plan import Plan
from shadowscale.fit.solution import FITTED, Estimate
from shadowscale.jobs.compare_inputs import Compared, Number
from shadowscale.judge.finding import PASS, Finding
from shadowscale.quantities import QUANTITIES
from shadowscale.session.session import Session
from shadowscale.view.compared import NOTHING_BESIDE, SIGN, side_by_side
from shadowscale.view.doubts import counts, doubts
from shadowscale.view.geometry_words import geometry_lines
from shadowscale.view.looks import Look, look_of
from shadowscale.view.rows import HELD, quantity_rows, with_prior, with_state, with_value
from shadowscale.view.stars_card import CardLine, card_lines
from shadowscale.view.summary import summary
from shadowscale.view.wishes import (
    LAW_NAMES,
    asks_for_solution,
    for_refit,
    outdates,
    read_pair,
    third_light_wish,
    with_third_light,
    with_wavelength,
    written_pair,
)
from shadowscale.view.written import (
    duration_text,
    one_line,
    plain_value,
    read_number,
    symbol,
    time_zero,
    unit_sign,
    value_and_error,
)


@pytest.mark.parametrize(
    ("key", "estimate", "shown"),
    [
        ("M1", Estimate(1.23456, 0.0123, 0.0123, FITTED), ("1.235", "\N{PLUS-MINUS SIGN}0.012")),
        ("R1", Estimate(1.5, 0.01, 0.02, FITTED), ("1.500", "+0.020 \N{MINUS SIGN}0.010")),
        ("epoch", Estimate(2459000.3127, None, None, FITTED), ("2459000.31270", "")),
        (
            "ecosw",
            Estimate(-0.0021, 1e-4, 1e-4, FITTED),
            ("\N{MINUS SIGN}0.00210", "\N{PLUS-MINUS SIGN}0.00010"),
        ),
    ],
)
def test_values_have_the_digits_of_their_errors(
    key: str, estimate: Estimate, shown: tuple[str, str]
) -> None:
    assert shown == value_and_error(key, estimate)


def test_units_and_symbols_are_short() -> None:
    assert unit_sign("solMass") == "M\N{SUN}"
    assert unit_sign("km/s") == "km/s"
    assert symbol("limb_darkening1[V].2") == "u1.2 V"
    assert (
        one_line("M1", Estimate(1.23456, 0.0123, 0.0123, FITTED))
        == "1.235 \N{PLUS-MINUS SIGN}0.012 M\N{SUN}"
    )
    assert plain_value(QUANTITIES["M1"], float("nan")) == "\N{EM DASH}"


@given(st.floats(-1e6, 1e6).map(lambda value: round(value, 6)))
def test_typed_numbers_are_read_however_they_are_written(value: float) -> None:
    text = f"{value:.6f}"

    assert value == read_number(text)
    assert value == read_number(text.replace(".", ",").replace("-", "\N{MINUS SIGN}") + " d")


@pytest.mark.parametrize("text", ["", "  ", "about 3", "nan", "1e999"])
def test_what_is_no_number_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="expected a number, found"):
        read_number(text)


def test_pairs_are_read_back() -> None:
    assert (6350.0, 110.0) == read_pair("6350 +- 110") == read_pair(written_pair((6350.0, 110.0)))
    assert read_pair(" ") is None
    with pytest.raises(
        ValueError, match="expected a value and its sigma, such as 6350 110, found '6350'"
    ):
        read_pair("6350")
    with pytest.raises(ValueError, match="sigma must be positive, found -1"):
        read_pair("6350 -1")


def test_times_lose_whole_thousands_of_days() -> None:
    assert time_zero(2459865.27) == 2459000
    assert time_zero(1325.7) == 0
    assert duration_text(200.0) == "3 min 20 s"


def test_rows_cover_the_system_and_what_follows() -> None:
    session = made_up_session()
    rows = {row.key: row for row in quantity_rows(session)}

    assert set(session.system.values) <= set(rows)
    assert {"M1", "R2", "T14_1"} <= set(rows)
    assert all(
        row.effect for row in rows.values() if row.basic and not row.key.startswith("offset")
    )
    assert rows["M1"].bounds_text == ""
    assert rows["inclination"].bounds_text == "5 \N{HORIZONTAL ELLIPSIS} 90"


def test_a_value_set_by_hand_has_no_error_any_more() -> None:
    session = with_value(made_up_session(), "inclination", 88.0)
    row = next(row for row in quantity_rows(session) if row.key == "inclination")

    assert (row.value_text, row.error_text, row.value) == ("88.000", "", 88.0)


def test_values_outside_their_bounds_are_refused() -> None:
    with pytest.raises(ValueError, match=r"inclination of the orbit must lie in 5 .* 90, found 91"):
        with_value(made_up_session(), "inclination", 91.0)
    with pytest.raises(ValueError, match="there is no model yet"):
        with_value(made_up_session(solved=False), "inclination", 89.0)


def test_states_and_priors_reach_the_plan() -> None:
    session = with_state(made_up_session(), "K1", HELD)
    assert session.plan.fixed["K1"] == (98.4,)

    session = with_prior(session, "mass_ratio", 0.87, sigma=0.01)

    assert (
        session.plan.priors[-1].name, session.plan.priors[-1].values, session.plan.priors[-1].sigmas,
    ) == ("mass_ratio", (0.87,), (0.01,))  # fmt: skip


def test_what_asks_for_a_new_fit() -> None:
    before = made_up_session()

    assert not asks_for_solution(before, replace(before, view={"magnitudes": True}))
    assert not asks_for_solution(
        before, replace(before, plan=replace(before.plan, start={"inclination": 88.0}))
    )
    assert asks_for_solution(before, replace(before, plan=replace(before.plan, law="quadratic")))
    assert asks_for_solution(before, replace(before, velocities=None))


def test_contacts_ask_for_a_fit_but_outdate_none() -> None:
    before = made_up_session()
    first, *rest = before.markers.primary
    contacts = replace(before, markers=replace(before.markers, primary=(first - 1e-3, *rest)))
    excluded = replace(before, markers=replace(before.markers, excluded=((0.2, 0.3),)))

    assert [asks_for_solution(before, each) for each in (contacts, excluded)] == [True, True]
    assert [outdates(before, each) for each in (contacts, excluded)] == [False, True]
    plain = replace(before, markers=replace(before.markers, level=(), excluded=()))
    assert not outdates(plain, replace(plain, markers=None))


def test_a_refit_starts_where_the_work_stands() -> None:
    session = replace(made_up_session(), plan=Plan())

    plan = for_refit(session).plan

    assert (session.system.value("period"), session.system.value("epoch")) == (
        plan.period,
        plan.epoch,
    )


def test_third_light_and_wavelengths_by_band() -> None:
    plan = with_third_light(Plan(fixed={"third_light[V]": (0.0,)}), "V", held=None)
    assert third_light_wish(plan, "V") == "free"
    assert plan.fixed == {}
    assert third_light_wish(with_third_light(plan, "V", held=0.0), "V") == "none"
    known = with_third_light(plan, "V", held=0.12)
    assert third_light_wish(known, "V") == "held"
    assert known.fixed == {"third_light[V]": (0.12,)}
    assert third_light_wish(known, "I") == "free"
    assert with_wavelength(Plan(), "V", 551.0).wavelengths == {"V": 551.0}
    assert with_wavelength(Plan(wavelengths={"V": 551.0}), "V", 0.0).wavelengths == {}


def test_the_laws_on_offer_are_those_that_there_are() -> None:
    from shadowscale.light.laws import LAWS

    assert set(LAWS) == set(LAW_NAMES)


def test_doubts_gather_everything() -> None:
    session = made_up_session()
    headings = [doubt.heading for doubt in doubts(session) if doubt.heading]

    assert headings[0] == "Checks"
    assert {"What the data decided", "What the data cannot give", "Rows set aside"} <= set(headings)
    assert counts(session) == (0, 1)
    absent = Finding("absent: distance", None, None, PASS, "No value for the distance.", "x")
    twice = doubts(replace(session, audit=(*session.audit, absent)))
    assert [each for each in twice if each.name.startswith("absent")] == []
    assert doubts(replace(made_up_session(solved=False), photometry=None)) == ()


def test_kept_solutions_stand_beside_with_their_differences_in_sigmas() -> None:
    """0.2266 solar masses more, errors 0.009 on either side: 0.2266/(0.009 sqrt 2) sigmas."""
    session = made_up_session()
    kept = session.kept[0]
    first = kept.solution.estimates["M1"]
    far = {**kept.solution.estimates, "M1": replace(first, value=first.value + 0.2266)}
    other = replace(kept, solution=replace(kept.solution, estimates=far))

    found = side_by_side(replace(session, kept=(other,)))

    rows = {row.what: row for row in found.rows}
    assert found.names == ("present", "first try")
    assert rows["M1"].sigmas == (f"{SIGN}+{0.2266 / (0.009 * 2**0.5):.1f}",)
    assert rows["R1"].sigmas == ("0.0",)
    assert rows["AIC"].values == rows["BIC"].values == ("least", "least")
    assert "not independent" in found.words[0]


def test_criteria_count_the_free_quantities() -> None:
    """The same residuals with three quantities more: AIC grows by 6, BIC by 3 ln n (their definitions)."""
    session = made_up_session()
    kept = session.kept[0]
    fit = replace(kept.solution.fit, free=kept.solution.fit.free + 3)
    other = replace(kept, solution=replace(kept.solution, fit=fit))

    rows = {row.what: row for row in side_by_side(replace(session, kept=(other,))).rows}

    light = int((session.solution.light.why == 0).sum())
    speed = session.velocities
    count = light + int(speed.used1.sum() + speed.used2.sum())
    assert rows["AIC"].values == ("least", "least + 6.0")
    assert rows["BIC"].values == ("least", f"least + {3 * log(count):.1f}")


def test_a_solution_alone_and_one_of_another_file() -> None:
    session = replace(made_up_session(), kept=())

    alone = side_by_side(session)
    typed = side_by_side(session, (Compared("paper", {"M1": Number(1.28, 0.02, 0.02)}),))

    assert (alone.names, alone.words) == (("present",), (NOTHING_BESIDE,))
    assert {len(row.values) for row in alone.rows} == {1}
    assert [row.what for row in typed.rows] == ["points, free", "M1"]
    assert typed.rows[0].values[1] == "\N{EM DASH}"
    assert side_by_side(Session()).rows == ()


def test_the_card_shows_fractions_only_without_sizes() -> None:
    assert [line.what for line in card_lines(made_up_session())] == ["mass", "radius"]
    assert [line.what for line in card_lines(made_up_session(velocities=False))] == ["r = R/a"]
    assert card_lines(Session()) == ()


def _stars(line: CardLine) -> tuple[tuple[str, str], tuple[str, str]]:
    return line.star1, line.star2


def test_a_model_moved_by_hand_shows_its_own_numbers_without_errors() -> None:
    session = made_up_session()
    total = session.system.value("radius_sum")
    larger = with_value(session, "radius_sum", 1.1 * total)
    before = {line.what: line for line in card_lines(session)}
    after = {line.what: line for line in card_lines(larger)}

    assert after["mass"] == before["mass"]  # hangs on nothing that was moved
    for old, new in zip(_stars(before["radius"]), _stars(after["radius"]), strict=True):
        assert float(new[0]) == pytest.approx(1.1 * float(old[0]), rel=2e-3)  # as printed
        assert (bool(old[1]), new[1]) == (True, "")
    rows = {row.key: row for row in quantity_rows(larger)}
    assert rows["r1"].value == pytest.approx(1.1 * session.solution.estimates["r1"].value)
    assert (rows["r1"].error_text, rows["r1"].grade) == ("", "")
    assert rows["radius_ratio"].error_text
    assert [line.source for line in geometry_lines(larger)][-1] == "by hand"
    assert "moved by hand" in summary(larger)


def test_the_summary_says_what_there_is() -> None:
    assert "766 points, 12 free" in summary(made_up_session())
    assert "not solved" in summary(made_up_session(solved=False))
    assert summary(replace(made_up_session(solved=False), photometry=None)) == ""


@pytest.mark.parametrize("view", [{}, {"groups": 3, "hidden": None}, {"future": "thing"}])
def test_a_view_that_makes_no_sense_keeps_the_defaults(view: dict[str, object]) -> None:
    assert Look() == look_of(view)
