"""`shadowscale solve` from outside: files, numbers, words, statuses."""

import csv
import hashlib
import json
import os

import jsonschema
import pytest

from commands import shadowscale
from shadowscale.session.store import schema as session_schema
from shadowscale.sheet.as_json import schema as sheet_schema

RESULTS = {
    "sheet.json",
    "sheet.csv",
    "sheet.tex",
    "sheet.ecsv",
    "light_curve.csv",
    "velocity_curve.csv",
    "session.json",
}


@pytest.fixture(scope="module")
def sheet(small):
    assert small.ran.status == 0, small.ran.err
    return json.loads((small.results / "sheet.json").read_text())


def test_all_promised_files_are_there_and_follow_their_schemas(small, sheet):
    assert {path.name for path in small.results.iterdir()} >= RESULTS
    assert not [path for path in small.results.iterdir() if path.name.startswith(".")]
    jsonschema.validate(sheet, sheet_schema())
    jsonschema.validate(json.loads((small.results / "session.json").read_text()), session_schema())


def test_masses_and_radii_are_those_that_were_simulated(small, sheet):
    """Truth lies within four sigma, and the sigmas are small: 0.1 % velocities, 0.4 % photometry.

    The radii's would be half as large if third light were known.
    """
    truth = json.loads((small.folder / "data" / "truth.json").read_text())["values"]
    for name, relative in (("M1", 0.02), ("M2", 0.02), ("R1", 0.05), ("R2", 0.06)):
        found = sheet["quantities"][name]
        assert found["how"] == "derived"
        assert abs(found["value"] - truth[name]) < 4 * max(found["minus"], found["plus"]), name
        assert max(found["minus"], found["plus"]) < relative * truth[name], name


def test_the_sheet_says_what_was_done(small, sheet):
    made = sheet["provenance"]
    assert made["command"].startswith("shadowscale solve data/photometry.csv --velocities")
    assert made["time_scale"] == "BJD_TDB"
    for item in made["inputs"]:
        content = (small.folder / "data" / item["name"]).read_bytes()
        assert item["sha256"] == hashlib.sha256(content).hexdigest()
        assert 0 < item["used"] <= item["rows"] == content.count(b"\n") - 1
    assert sheet["quantities"]["teff1"] == sheet["quantities"]["teff1"] | {
        "value": 6400.0,
        "unit": "K",
    }
    assert sheet["quantities"]["L1"]["how"] == "derived"
    assert {item["verdict"] for item in sheet["audit"]} <= {"pass", "warn", "fail"}


def test_every_line_of_the_inputs_is_in_the_curves(small):
    for result, source in (
        ("light_curve.csv", "photometry.csv"),
        ("velocity_curve.csv", "velocities.csv"),
    ):
        with (small.results / result).open(newline="") as stream:
            lines = [int(row["line"]) for row in csv.DictReader(stream)]
        count = (small.folder / "data" / source).read_text().count("\n")
        assert lines == list(range(2, count + 1))


def test_a_person_is_told_the_masses_and_where_the_files_are(small):
    assert small.ran.out.splitlines()[-1] == "results are in results"
    assert any(line.startswith("M1 ") and "solMass" in line for line in small.ran.out.splitlines())
    assert small.ran.err == ""  # no bar where there is no terminal


def test_the_session_of_the_results_solves_to_the_same_numbers(small, sheet, tmp_path):
    words = ("--out", tmp_path / "out", "--quiet", "--report", "no")
    ran = shadowscale("solve", small.results / "session.json", *words)
    assert (ran.status, ran.out, ran.err) == (0, "", "")
    again = json.loads((tmp_path / "out" / "sheet.json").read_text())
    for part in ("quantities", "bands", "correlations", "fit", "alternatives", "decisions"):
        assert again[part] == sheet[part], part


def test_nothing_is_overwritten_and_it_is_said_before_any_work(small, inputs):
    (inputs / "out").mkdir()
    (inputs / "out" / "sheet.csv").write_text("mine")
    words = ("solve", "photometry.csv", "--out", "out")
    ran = shadowscale(*words, folder=inputs)
    assert ran.status == 2
    assert "sheet.csv, which exists" in ran.err
    assert "--overwrite" in ran.err
    assert [path.name for path in (inputs / "out").iterdir()] == ["sheet.csv"]
    assert (inputs / "out" / "sheet.csv").read_text() == "mine"


def test_an_input_is_never_overwritten(inputs):
    os.rename(inputs / "photometry.csv", inputs / "light_curve.csv")
    before = (inputs / "light_curve.csv").read_bytes()
    ran = shadowscale("solve", "light_curve.csv", "--out", ".", "--overwrite", folder=inputs)
    assert ran.status == 2
    assert "a folder without the input files" in ran.err
    assert (inputs / "light_curve.csv").read_bytes() == before


def test_a_folder_that_is_a_file_is_refused(inputs):
    ran = shadowscale("solve", "photometry.csv", "--out", "velocities.csv/out", folder=inputs)
    assert ran.status == 2
    assert "velocities.csv is a file" in ran.err


BAD_INPUTS = [
    ("missing", None, "no such file"),
    ("empty", "", "empty.csv"),
    ("words", "this is\nnot a table\nat all\n", "words.csv"),
    ("header", "BJD,mag,mag_err\n", "header.csv"),
    ("short", "BJD,mag\n2459000.1,12.1\n2459000.2,12.2\n", "at least"),
    ("binary", "\x00\x01\x02\x03", "binary.csv"),
    ("nomag", "BJD,colour\n" + "2459000.1,red\n" * 30, "nomag.csv"),
]


@pytest.mark.parametrize(
    ("name", "text", "words"), BAD_INPUTS, ids=[item[0] for item in BAD_INPUTS]
)
def test_bad_photometry_is_status_3_with_the_file_and_what_was_expected(
    tmp_path, name, text, words
):
    if text is not None:
        (tmp_path / f"{name}.csv").write_text(text)
    ran = shadowscale("solve", f"{name}.csv", "--out", "out", "--json-errors", folder=tmp_path)
    assert ran.status == 3, ran.err
    error = json.loads(ran.err)
    assert words in error["message"]
    assert f"{name}.csv" in error["message"]
    assert all(problem["expected"] and problem["found"] for problem in error["problems"])
    assert "Traceback" not in ran.err
    assert not (tmp_path / "out").exists()


def test_a_flat_light_curve_has_no_solution(tmp_path):
    rows = [
        f"{2459000 + number / 50:.4f},{12 + 0.003 * ((number * 7919) % 13 - 6) / 6:.4f},0.003"
        for number in range(600)
    ]
    (tmp_path / "flat.csv").write_text("BJD,mag,mag_err\n" + "\n".join(rows))
    ran = shadowscale("solve", "flat.csv", "--out", "out", "--json-errors", folder=tmp_path)
    assert ran.status == 4, ran.err
    assert json.loads(ran.err)["reason"]
    assert not (tmp_path / "out").exists()


WRONG_USAGE = [
    ((), "INPUT: expected photometry files or one session file, found 'nothing'"),
    (("photometry.csv",), "--out: expected a folder for the results"),
    (("a.json", "photometry.csv", "--out", "o"), "nothing beside the session"),
    (
        ("s.json", "--period", "2", "--out", "o"),
        "--period: expected photometry files, not a session",
    ),
    (
        ("photometry.csv", "--band", "V", "--out", "o", "--free", "third_light[B]"),
        "third_light[V]",
    ),
    (("photometry.csv", "--out", "o", "--columns", "time"), "--columns: expected ROLE=NAME"),
    (("photometry.csv", "--out", "o", "--columns", "tmie=BJD_TDB"), "tmie"),
]


@pytest.mark.parametrize(("words", "told"), WRONG_USAGE, ids=[item[1][:30] for item in WRONG_USAGE])
def test_wrong_usage_is_status_2(inputs, words, told):
    ran = shadowscale("solve", *words, folder=inputs)
    assert ran.status == 2, ran.err
    assert told in ran.err
    assert "Traceback" not in ran.err
