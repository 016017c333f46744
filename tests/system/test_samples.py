"""The sample sessions: as described, small, solvable, and true."""

import csv
import json
from io import StringIO

import pytest

from commands import shadowscale
from shadowscale.jobs.simulate import simulate
from shadowscale.jobs.spec import read_spec
from shadowscale.session import open_session

NAMES = ("heron", "lantern", "wren")
PRINTED = {"photometry.csv": 2e-5, "velocities.csv": 2e-3}  # two units of the last digit
EXPECTED = {
    "heron": ("M1", "M2", "R1", "R2", "inclination", "K1", "K2"),
    "lantern": ("M1", "M2", "R1", "R2", "eccentricity", "omega", "K1", "K2"),
    "wren": ("K1", "M2", "R1", "R2", "logg2", "r1", "r2"),
}


@pytest.fixture(params=NAMES)
def name(request):
    return request.param


def test_the_folder_holds_these_samples_and_their_descriptions(root):
    folder = root / "sample_sessions"
    found = {path.parent.name for path in folder.glob("*/session.json")}
    assert found == set(NAMES) == {path.stem for path in (folder / "making").glob("*.toml")}
    assert all(path.stat().st_size < 2_000_000 for path in folder.rglob("*") if path.is_file())
    text = (folder / "README.md").read_text()
    assert all(f"`{each}`" in text for each in NAMES)


def test_a_sample_opens_with_its_own_files_unsolved(root, name):
    session = open_session(root / "sample_sessions" / name / "session.json", same_files=True)
    assert session.notes == ()
    assert session.solution is None
    assert session.velocities is not None
    assert session.photometry.used.sum() > 1000


def test_the_description_makes_these_files(root, name):
    """To the last digit printed but one, whatever machine made them."""
    folder = root / "sample_sessions"
    texts = simulate(read_spec(folder / "making" / f"{name}.toml")).texts
    for file, tolerance in PRINTED.items():
        made, stored = (
            list(csv.reader(StringIO(text)))
            for text in (texts[file], (folder / name / file).read_text())
        )
        assert made[0] == stored[0]
        assert len(made) == len(stored)
        for one, other in zip(made[1:], stored[1:]):
            assert _numbers(one) == pytest.approx(_numbers(other), abs=tolerance)
            assert _words(one) == _words(other)
    truth = json.loads(texts["truth.json"])["values"]
    stored_truth = json.loads((folder / name / "truth.json").read_text())["values"]
    assert truth == pytest.approx(stored_truth, rel=1e-6, abs=1e-9)


def test_a_sample_solves_to_its_truth(root, name, tmp_path):
    """Each main quantity within four of its own sigmas of what was simulated."""
    folder = root / "sample_sessions" / name
    ran = shadowscale("solve", folder / "session.json", "--out", tmp_path / "out", "--report", "no")
    assert ran.status == 0, ran.err
    sheet = json.loads((tmp_path / "out" / "sheet.json").read_text())
    truth = json.loads((folder / "truth.json").read_text())["values"]
    for quantity in EXPECTED[name]:
        found = sheet["quantities"][quantity]
        sigma = max(found["minus"], found["plus"])
        assert abs(found["value"] - truth[quantity]) < 4 * sigma, quantity
    assert not [item for item in sheet["audit"] if item["verdict"] == "fail"]
    if name == "wren":
        assert "K2" not in sheet["quantities"]
        assert "absent: K2" in {item["check"] for item in sheet["audit"]}


def _numbers(row):
    return [float(cell) for cell in row if _is_number(cell)]


def _words(row):
    return [cell for cell in row if not _is_number(cell)]


def _is_number(cell):
    return cell.replace(".", "").replace("-", "").isdigit()
