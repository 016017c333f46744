"""Solutions side by side: sigmas, criteria on shared rows, and everything that can be compared."""

import json
from dataclasses import replace
from math import hypot, log

import numpy as np
import pytest
from scipy.stats import norm

from commands import shadowscale
from made_up import made_up_session
from shadowscale.errors import SessionError, TableError
from shadowscale.fit.solution import FITTED, Estimate
from shadowscale.jobs.compare import compare, compare_files, comparison_document, comparison_table
from shadowscale.jobs.compare_inputs import Compared, read_compared
from shadowscale.jobs.results import sheet_of
from shadowscale.jobs.typed_table import Number
from shadowscale.sheet import as_csv, as_json


def column(name="a", **changes):
    session = made_up_session()
    solution = replace(session.solution, **changes)
    numbers = {
        key: Number(item.value, item.minus, item.plus) for key, item in solution.estimates.items()
    }
    fit = {"points": solution.fit.points, "free": solution.fit.free, "chi2": solution.fit.chi2}
    return Compared(
        name, numbers, fit, ("digest",), solution.system.law, solution,
        session.photometry, session.velocities,
    )  # fmt: skip


def lines(comparison):
    return {line.key: line for line in comparison.lines}


def typed(path, text):
    path.write_text(text)
    return path


def test_differences_use_the_errors_that_face_each_other():
    first = Compared("a", {"M1": Number(1.0, 0.03, 0.04)})
    second = Compared("b", {"M1": Number(1.2, 0.09, 0.5)})
    forth = lines(compare([first, second]))["M1"].differences[0]
    assert forth.value == pytest.approx(0.2)
    assert forth.sigmas == pytest.approx(0.2 / hypot(0.04, 0.09))
    back = lines(compare([second, first]))["M1"].differences[0]
    assert back.sigmas == pytest.approx(-forth.sigmas)


def test_a_held_number_has_no_sigmas_of_its_own():
    held, free = (
        Compared("a", {"ecosw": Number(0.0)}),
        Compared("b", {"ecosw": Number(0.01, 0.002, 0.002)}),
    )
    assert lines(compare([held, free]))["ecosw"].differences[0].sigmas == pytest.approx(5.0)
    assert lines(compare([held, held]))["ecosw"].differences[0].sigmas is None


def test_epochs_are_compared_in_the_same_cycle():
    first = Compared("a", {"period": Number(2.0, 1e-5, 1e-5), "epoch": Number(100.0, 1e-3, 1e-3)})
    second = Compared(
        "b", {"period": Number(2.0, 1e-5, 1e-5), "epoch": Number(300.001, 1e-3, 1e-3)}
    )
    comparison = compare([first, second])
    moved = lines(comparison)["epoch"].numbers[1]
    assert moved.value == pytest.approx(100.001)
    assert moved.plus == pytest.approx(hypot(1e-3, 100 * 1e-5))
    assert any("whole cycles" in words for words in comparison.words)


def test_criteria_follow_from_the_likelihood():
    """-2 ln L from scipy's normal distribution, on the rows both solutions use."""
    one = column()
    narrow = replace(one.solution.fit, error_scale={"V": 0.9}, free=one.solution.fit.free + 1)
    other = column("b", fit=narrow)
    comparison = compare([one, other])
    light, table = one.solution.light, one.photometry
    used = light.why == 0
    error = table.flux_error[used]
    total = {}
    for name, scale in (("one", 1.01), ("other", 0.9)):
        total[name] = -2 * norm.logpdf(table.flux[used], light.model[used], scale * error).sum()
        speed, result = one.velocities, one.solution.velocity
        for star in (1, 2):
            rows = getattr(result, f"why{star}") == 0
            value, sigma = (getattr(speed, f"rv{star}{end}")[rows] for end in ("", "_error"))
            jitter = [
                one.solution.fit.jitter.get(f"{source}, star {star}", 0.0)
                for source in speed.sources
            ]
            sigma = np.hypot(sigma, np.array(jitter)[speed.source[rows]])
            model = getattr(result, f"model{star}")[rows]
            total[name] += -2 * norm.logpdf(value, model, sigma).sum()
    first, second = comparison.fits
    assert first.deviance == pytest.approx(total["one"])
    assert second.deviance == pytest.approx(total["other"])
    assert second.aic == pytest.approx(total["other"] + 2 * second.free)
    assert second.bic == pytest.approx(total["other"] + second.free * log(second.points))
    assert second.free == first.free + 1


def test_criteria_are_of_rows_that_all_solutions_use():
    one = column()
    why = one.solution.light.why.copy()
    why[20:40] = 1
    other = column("b", light=replace(one.solution.light, why=why))
    alone, both = compare([one, one]).fits[0], compare([one, other]).fits
    assert both[0] == both[1]
    assert both[0].points == alone.points - 20


def test_other_data_have_no_common_criteria():
    one = column()
    comparison = compare([one, replace(one, name="b", data=("another",))])
    assert comparison.fits == ()
    assert any("same data" in words for words in comparison.words)
    assert not any("independent" in words for words in comparison.words)


def test_coefficients_of_different_laws_are_not_compared():
    one = column()
    other = replace(one, name="b", law="quadratic")
    assert not any(key.startswith("limb") for key in lines(compare([one, other])))
    assert any(key.startswith("limb") for key in lines(compare([one, one])))


def test_one_solution_alone_is_refused():
    with pytest.raises(ValueError, match="two or more solutions, found 1"):
        compare([column()])


def test_sheets_read_back_as_the_solution(tmp_path):
    session = made_up_session(("V", "I"))
    sheet = sheet_of(session)
    (tmp_path / "sheet.json").write_text(as_json(sheet))
    (tmp_path / "sheet.csv").write_text(as_csv(sheet))
    for name in ("sheet.json", "sheet.csv"):
        (read,) = read_compared(tmp_path / name)
        assert read.name == tmp_path.name
        expected = {
            key: Number(item.value, item.minus, item.plus)
            for key, item in session.solution.estimates.items()
        }
        assert dict(read.numbers) == expected


def test_a_typed_table_is_read_with_its_units(tmp_path):
    text = "# from a paper\nquantity,value,error,unit\nM1,1.28,0.01\nR1,1077000,7000,km\n"
    (read,) = read_compared(typed(tmp_path / "paper.csv", text + "third_light[V],0.1,0.02,\n"))
    assert read.name == "paper"
    assert read.numbers["M1"] == Number(1.28, 0.01, 0.01)
    # 695700 km, IAU 2015 B3
    assert read.numbers["R1"].value == pytest.approx(1077000 / 695700, rel=1e-9)
    assert read.numbers["R1"].plus == pytest.approx(7000 / 695700, rel=1e-9)
    assert read.numbers["third_light[V]"].value == 0.1
    (bare,) = read_compared(typed(tmp_path / "bare.csv", "M1,1.28,0.01\nM2,1.1,\n"))
    assert bare.numbers["M2"] == Number(1.1)


@pytest.mark.parametrize(
    "text",
    [
        "M1,1.28,0.01\noffset1[long camera],-0.5,0.2,0.3\n",
        "M1 1.28 0.01\noffset1[long camera]  -0.5  0.2 0.3\n",
        "M1 = 1.28 \N{PLUS-MINUS SIGN} 0.01\n\noffset1[long camera] = -0.5 0.2 0.3 km/s\n",
        "M1 1.28 +/- 0.01 solMass\noffset1[long camera]\t-500\t200\t300\tm/s\n",
        "M1;1.28;0.01\noffset1[long camera];-0.5;0.2;0.3\n",
        "name,value,minus,plus\nM1,1.28,0.01,0.01\noffset1[long camera],-0.5,0.2,0.3\n",
    ],
)
def test_a_table_may_be_typed_as_people_do(tmp_path, text):
    (read,) = read_compared(typed(tmp_path / "paper.txt", text))
    assert read.numbers["M1"] == Number(1.28, 0.01, 0.01)
    offset = read.numbers["offset1[long camera]"]
    assert (offset.value, offset.minus, offset.plus) == pytest.approx((-0.5, 0.2, 0.3))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("M9,1,2\n", r"t.csv, line 1: expected the name of a quantity.*'M9'"),
        (
            "quantity,value,error\nM1,heavy,1\n",
            r"line 2, column 'value': expected a number, found 'heavy'",
        ),
        ("M1,1,-0.1\n", r"line 1, column 'minus': expected a number, found '-0.1'"),
        ("M1,,1\n", r"line 1, column 'value': expected a number, found nothing"),
        ("M1,1,0.1,km\n", r"column 'unit': expected a unit like solMass, found 'km'"),
        ("M1,1,0.1,stone weight\n", r"column 'unit': expected a unit like solMass"),
        ("# nothing\n", "expected rows of quantity, value, error"),
    ],
)
def test_what_is_wrong_in_a_typed_table_is_named(tmp_path, text, words):
    with pytest.raises(TableError, match=words):
        read_compared(typed(tmp_path / "t.csv", text))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{", "found no JSON"),
        ("[1]", "found other JSON"),
        ('{"quantities": {}}', "expected a sheet.json, found trouble at 'fit'"),
    ],
)
def test_what_is_no_solution_is_refused(tmp_path, text, words):
    with pytest.raises(SessionError, match=words):
        read_compared(typed(tmp_path / "t.json", text))
    with pytest.raises(SessionError, match="No such file"):
        read_compared(tmp_path / "missing.json")


def test_files_of_one_name_are_told_apart(tmp_path):
    one = typed(tmp_path / "paper.csv", "M1,1.28,0.01\n")
    comparison = compare_files([one, one])
    assert [each.name for each in comparison.columns] == ["paper 1", "paper 2"]


def test_the_document_and_the_table_say_the_same():
    changed = {**column().solution.estimates, "M1": Estimate(1.30, 0.01, 0.01, FITTED)}
    comparison = compare([column(), column("b", estimates=changed)])
    document = comparison_document(comparison)
    json.dumps(document, allow_nan=False)
    table = comparison_table(comparison)
    (row,) = [cells for cells in table.rows if cells[0] == "M1"]
    assert row[3] == "1.300 \N{PLUS-MINUS SIGN} 0.010"
    difference = document["quantities"]["M1"]["differences"][0]
    assert row[5] == f"{difference['sigmas']:.2f}"
    assert document["same_rows"][0]["bic"] == comparison.fits[0].bic
    assert all(len(cells) == len(table.columns) for cells in table.rows)


def test_the_command_compares_and_refuses(tmp_path):
    typed(tmp_path / "a.csv", "M1,1.28,0.03\n")
    typed(tmp_path / "b.csv", "M1,1.38,0.04\n")
    done = shadowscale("compare", "a.csv", "b.csv", folder=tmp_path)
    assert done.status == 0, done.err
    assert done.out.splitlines()[1].split()[-1] == "2.00"
    done = shadowscale("compare", "a.csv", "b.csv", "--json", folder=tmp_path)
    sigmas = json.loads(done.out)["quantities"]["M1"]["differences"][0]["sigmas"]
    assert sigmas == pytest.approx(2.0)
    alone = shadowscale("compare", "a.csv", folder=tmp_path)
    assert alone.status == 2
    assert "two or more solved sessions" in alone.err
