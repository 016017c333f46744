"""From files to the table of velocities."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import read_velocities
from shadowscale.errors import ColumnError, TableError, UnitError
from table_files import START, written

HEADER = "BJD_TDB,rv1,rv1_err,rv2,rv2_err"
RV1 = np.array([10.5, -40.25, 55.0, 0.5])
RV2 = np.array([-20.5, 60.75, -75.0, 5.25])


def lines(scale: float = 1.0, tail: str = "") -> list[str]:
    return [
        f"{START + k},{a * scale:.2f},{0.2 * scale:g},{b * scale:.2f},{0.4 * scale:g}{tail}"
        for k, (a, b) in enumerate(zip(RV1, RV2))
    ]


def test_both_stars(tmp_path: Path) -> None:
    table = read_velocities(written(tmp_path, "a.csv", [HEADER, *lines()]))
    np.testing.assert_array_equal(table.rv1, RV1)
    np.testing.assert_array_equal(table.rv2, RV2)
    np.testing.assert_array_equal(table.rv1_error, 0.2)
    np.testing.assert_array_equal(table.rv2_error, 0.4)
    np.testing.assert_array_equal(table.time, START + np.arange(4))
    assert table.time_scale == "BJD_TDB"
    assert table.sources == ("a",)
    assert not table.errors_from_scatter
    assert np.all(table.used1 & table.used2)


@pytest.mark.parametrize("empty", ["", "-", "nan", "--", "NaN", "..."])
def test_an_empty_cell_is_a_star_not_measured(empty: str, tmp_path: Path) -> None:
    more = [f"{START + 9},{empty},{empty},7.5,0.5", f"{START + 10},7.5,0.5,{empty},{empty}"]
    table = read_velocities(written(tmp_path, "a.csv", [HEADER, *lines(), *more]))
    np.testing.assert_array_equal(table.used1, [1, 1, 1, 1, 0, 1])
    np.testing.assert_array_equal(table.used2, [1, 1, 1, 1, 1, 0])
    assert table.reasons[table.why1[4]] == "no measurement"
    assert np.isnan(table.rv1[4])
    assert np.isnan(table.rv1_error[4])
    assert table.files[0].used == 6
    back = table.restored(1, np.ones(6, dtype=bool))
    assert not back.used1[4]


def test_cells_may_be_missing_at_the_end(tmp_path: Path) -> None:
    table = read_velocities(written(tmp_path, "a.csv", [HEADER, *lines(), f"{START + 9},7.5,0.5"]))
    np.testing.assert_array_equal(table.used2, [1, 1, 1, 1, 0])
    assert table.unreadable == ()


def test_one_lined(tmp_path: Path) -> None:
    text = ["HJD rv err", *(f"{START + k} {v} 0.1" for k, v in enumerate(RV1))]
    table = read_velocities(written(tmp_path, "a.txt", text))
    assert np.all(table.used1)
    assert not np.any(table.used2)
    assert np.all(np.isnan(table.rv2))


def test_without_errors_all_have_the_same(tmp_path: Path) -> None:
    text = ["HJD,rv1,rv2", *(f"{START + k},{a},{b}" for k, (a, b) in enumerate(zip(RV1, RV2)))]
    table = read_velocities(written(tmp_path, "a.csv", text))
    assert table.errors_from_scatter
    np.testing.assert_array_equal(table.rv1_error, 1.0)
    assert any("no errors; all velocities are given 1 km/s" in note for note in table.notes)


@pytest.mark.parametrize(
    "header",
    [
        "BJD,rv1 [m/s],rv1_err [m/s],rv2 [m/s],rv2_err [m/s]",
        "BJD,rv1_ms,e_rv1_ms,rv2_ms,e_rv2_ms",
        "BJD,rv1 (m s-1),rv1_err,rv2 (m s-1),rv2_err",
    ],
)
def test_metres_per_second_become_kilometres(header: str, tmp_path: Path) -> None:
    table = read_velocities(written(tmp_path, "a.csv", [header, *lines(1000.0)]))
    np.testing.assert_allclose(table.rv1, RV1)
    np.testing.assert_allclose(table.rv1_error, 0.2)
    np.testing.assert_allclose(table.rv2, RV2)


def test_speeds_beyond_any_star_are_metres_per_second(tmp_path: Path) -> None:
    table = read_velocities(written(tmp_path, "a.csv", [HEADER, *lines(1000.0)]))
    np.testing.assert_allclose(table.rv1, RV1)
    np.testing.assert_allclose(table.rv2, RV2)
    assert any("too fast for km/s and taken as m/s" in note for note in table.notes)


def test_both_stars_have_the_same_unit(tmp_path: Path) -> None:
    text = [HEADER, *(f"{START + k},{9000 + 10 * k},50,{200 + k},50" for k in range(5))]
    table = read_velocities(written(tmp_path, "a.csv", text))
    assert table.rv1[0] == pytest.approx(9.0)
    assert table.rv2[0] == pytest.approx(0.2)


def test_the_user_says_the_unit(tmp_path: Path) -> None:
    path = written(tmp_path, "a.csv", [HEADER, *lines()])
    table = read_velocities(path, columns={"unit": "m/s"})
    np.testing.assert_allclose(table.rv1, RV1 / 1000)
    with pytest.raises(UnitError, match="expected km/s or m/s, found miles"):
        read_velocities(path, columns={"unit": "miles"})


def test_a_unit_that_is_none_of_velocity(tmp_path: Path) -> None:
    text = ["BJD,rv1 [mag],rv2", *(f"{START + k},1.{k},2" for k in range(5))]
    with pytest.raises(UnitError, match=r"column 'rv1 \[mag\]': expected km/s or m/s, found mag"):
        read_velocities(written(tmp_path, "a.csv", text))


def test_sources_from_a_column(tmp_path: Path) -> None:
    text = [HEADER + ",source", *lines(tail=",north"), *(line for line in lines(tail=",south"))]
    text[5:] = [line.replace(str(START)[:4], "2460") for line in text[5:]]
    table = read_velocities(written(tmp_path, "a.csv", text))
    assert table.sources == ("north", "south")
    np.testing.assert_array_equal(table.source, [0] * 4 + [1] * 4)


def test_sources_from_the_files(tmp_path: Path) -> None:
    first = written(tmp_path, "north.csv", [HEADER, *lines()])
    second = written(
        tmp_path, "south.csv", [HEADER, *(line.replace("2459", "2460") for line in lines())]
    )
    table = read_velocities([second, first])
    assert table.sources == ("south", "north")
    np.testing.assert_array_equal(table.source, [1] * 4 + [0] * 4)
    np.testing.assert_array_equal(table.file, [1] * 4 + [0] * 4)


@pytest.mark.parametrize(
    ("cells", "reason"),
    [
        ("7.5,0,7.5,0.5", "the error is missing, zero or negative"),
        ("inf,0.5,7.5,0.5", "the velocity is not finite"),
    ],
)
def test_velocities_set_aside_say_why(cells: str, reason: str, tmp_path: Path) -> None:
    table = read_velocities(written(tmp_path, "a.csv", [HEADER, *lines(), f"{START + 9},{cells}"]))
    assert table.reasons[table.why1[4]] == reason
    assert table.used2[4]


def test_words_among_numbers_are_unreadable(tmp_path: Path) -> None:
    table = read_velocities(
        written(tmp_path, "a.csv", [HEADER, *lines(), f"{START + 9},blend,0.5,7.5,0.5"])
    )
    (bad,) = table.unreadable
    assert (bad.line, bad.reason) == (6, "column 'rv1': expected a number, found 'blend'")


def test_too_few_velocities(tmp_path: Path) -> None:
    text = [HEADER, f"{START},10,0.5,,", "x,1,2,3,4"]
    with pytest.raises(
        TableError, match="at least 3 velocities that can be used, found 1 in 2 rows"
    ):
        read_velocities(written(tmp_path, "a.csv", text))


def test_photometry_is_no_table_of_velocities(tmp_path: Path) -> None:
    text = ["BJD,mag,err", *(f"{START + k},11.2,0.01" for k in range(5))]
    with pytest.raises(ColumnError, match="a radial velocity"):
        read_velocities(written(tmp_path, "a.csv", text))


def test_stars_are_1_and_2(tmp_path: Path) -> None:
    table = read_velocities(written(tmp_path, "a.csv", [HEADER, *lines()]))
    first = np.arange(4) == 0
    assert not table.excluded(2, first, "blend").used2[0]
    assert table.excluded(2, first, "blend").used1[0]
    with pytest.raises(ValueError, match="star: expected 1 or 2, found 3"):
        table.excluded(3, first, "blend")


def test_what_takes_no_part_is_listed_but_not_an_empty_cell(tmp_path: Path) -> None:
    lines = ["BJD,rv1,rv1_err,rv2,rv2_err"]
    lines += [f"{2459000 + k},{10.0 * (-1) ** k},0.5,{-12.0 * (-1) ** k},0.5" for k in range(8)]
    lines[3] = "2459002,10.0,0.5,,"
    lines[5] = "2459004,10.0,0,-12.0,0.5"
    path = written(tmp_path, "v.csv", lines)
    (note,) = [note for note in read_velocities(path).notes if "set aside" in note]
    reason = "the error is missing, zero or negative"
    assert note == f"{path}: 1 velocity of star 1 set aside ({reason}; line 6)"
