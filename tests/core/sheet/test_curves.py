"""Every row of the inputs in the curves, used or with the reason why not."""

import csv
from dataclasses import replace
from io import StringIO

import numpy as np
import pytest

from made_up import made_up_session
from shadowscale.sheet import light_curve, velocity_curve
from shadowscale.sheet.file_names import file_names


@pytest.fixture(scope="module")
def session():
    return made_up_session(("V", "I"))


def rows_of(text):
    return list(csv.DictReader(StringIO(text)))


def test_every_line_of_the_photometry_is_there_once_and_in_order(session):
    rows = rows_of(light_curve(session.solution, session.photometry))
    table = session.photometry
    lines = [int(row["line"]) for row in rows]
    expected = sorted([*table.line.tolist(), *(row.line for row in table.unreadable)])
    assert lines == expected


def test_numbers_are_exact_and_residuals_are_observed_minus_model(session):
    table, result = session.photometry, session.solution.light
    rows = rows_of(light_curve(session.solution, table))
    by_line = {int(row["line"]): row for row in rows}
    for number in (0, 100, 777):
        row = by_line[int(table.line[number])]
        assert float(row["time"]) == table.time[number]
        assert float(row["observed"]) == table.flux[number]
        assert float(row["value"]) == table.value[number]
        assert float(row["model"]) == result.model[number]
        assert float(row["residual"]) == table.flux[number] - result.model[number]
        assert row["band"] == table.bands[table.band[number]]


def test_rows_that_take_no_part_say_why(session):
    rows = rows_of(light_curve(session.solution, session.photometry))
    reasons = {row["why"]: row for row in rows if row["used"] == "0"}
    assert set(reasons) == {
        "quality flag 1",
        "outlier of the fit",
        "unreadable: expected a number in column 'mag'",
        "unreadable: expected 3 cells, found 1",
    }
    assert reasons["unreadable: expected 3 cells, found 1"]["observed"] == ""
    assert all(row["why"] == "" for row in rows if row["used"] == "1")


def test_velocities_of_both_stars_stand_in_one_row(session):
    table = session.velocities
    rows = rows_of(velocity_curve(session.solution, table))
    assert len(rows) == table.time.size
    missing = rows[3]
    assert (missing["used1"], missing["used2"], missing["why2"]) == ("1", "0", "no measurement")
    assert (missing["rv2"], missing["residual2"]) == ("", "")
    assert missing["model2"] != ""
    assert float(rows[5]["residual1"]) == table.rv1[5] - session.solution.velocity.model1[5]
    assert {row["source"] for row in rows} == {"north", "south"}


def test_there_is_no_velocity_curve_without_velocities(session):
    bare = replace(session.solution, velocity=None)
    with pytest.raises(ValueError, match="the solution has no velocities"):
        velocity_curve(bare, session.velocities)


def test_rows_of_several_files_keep_the_files_order(session):
    table = session.photometry
    first = table.files[0]
    two = replace(
        table,
        files=(replace(first, path="z.csv"), replace(first, path="a.csv")),
        file=np.arange(table.time.size) % 2,
        unreadable=(),
    )
    rows = rows_of(light_curve(session.solution, two))
    names = [row["file"] for row in rows]
    assert names == sorted(names, key=["z.csv", "a.csv"].index)


@pytest.mark.parametrize(
    ("paths", "names"),
    [
        (["/home/me/pair/nights.csv"], ["nights.csv"]),
        (["/a/one/n.csv", "/a/two/n.csv", "/a/v.csv"], ["one/n.csv", "two/n.csv", "v.csv"]),
        (["x/one/n.csv", "y/one/n.csv"], ["x/one/n.csv", "y/one/n.csv"]),
        (["n.csv", "b/n.csv"], ["n.csv", "b/n.csv"]),
        (["C:\\data\\n.csv"], ["n.csv"]),
        ([], []),
    ],
)
def test_files_are_named_without_the_folders_of_their_owner(paths, names):
    assert list(file_names(paths).values()) == names
