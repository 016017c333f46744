"""The other commands from outside."""

import json
import random
import shutil

import pytest

from commands import shadowscale

NO_REPORT = ("--report", "no")  # saves seconds where no test looks at it


def test_replay_gives_the_same_numbers(small, tmp_path):
    ran = shadowscale(
        "replay", small.results / "session.json", "--out", tmp_path / "again", *NO_REPORT
    )
    assert (ran.status, ran.out, ran.err) == (0, "the same numbers\n", "")
    one, again = (
        json.loads((folder / "sheet.json").read_text())
        for folder in (small.results, tmp_path / "again")
    )
    for part in ("quantities", "bands", "sources", "correlations", "fit", "contact_solution"):
        assert one[part] == again[part], part


def test_replay_says_what_differs(small, tmp_path):
    shutil.copytree(small.folder, tmp_path / "copy")
    path = tmp_path / "copy" / "results" / "session.json"
    document = json.loads(path.read_text())
    document["solution"]["estimates"]["M1"]["value"] *= 1 + 1e-6
    document["solution"]["estimates"]["M2"]["value"] *= 1 + 1e-11
    path.write_text(json.dumps(document))
    ran = shadowscale("replay", path, "--out", tmp_path / "again", *NO_REPORT)
    assert ran.status == 0
    assert "1 numbers differ" in ran.out
    assert "M1: was " in ran.out
    assert "M2" not in ran.out


def test_replay_refuses_files_that_changed(small, tmp_path):
    shutil.copytree(small.folder, tmp_path / "copy")
    light = tmp_path / "copy" / "data" / "photometry.csv"
    light.write_text(light.read_text() + "\n")
    ran = shadowscale(
        "replay", tmp_path / "copy" / "results" / "session.json", "--out", tmp_path / "o"
    )
    assert ran.status == 3
    assert "the file that the session was saved with" in ran.err
    solved = shadowscale(
        "solve", tmp_path / "copy" / "results" / "session.json", "--out", tmp_path / "s", *NO_REPORT
    )
    assert solved.status == 0
    assert "photometry.csv changed since the session was saved" in solved.err


def test_replay_needs_a_solution(inputs):
    document = {"schema": 1, "photometry_sources": [{"path": "photometry.csv"}]}
    (inputs / "s.json").write_text(json.dumps(document))
    ran = shadowscale("replay", "s.json", "--out", "o", folder=inputs)
    assert ran.status == 3
    assert "expected a solved session" in ran.err


def test_period_finds_what_was_simulated(small):
    words = ("data/photometry.csv", "--band", "V")
    ran = shadowscale("period", *words, "--json", folder=small.folder)
    assert ran.status == 0, ran.err
    document = json.loads(ran.out)
    error = max(document["period_error"], 1e-5)
    assert abs(document["period"] - 1.8763) < 5 * error
    cycles = (document["epoch"] - 2459100.42) / 1.8763
    assert abs(cycles - round(cycles)) < 0.01
    assert document["rows"][0]["period"] == document["period"]
    table = shadowscale("period", *words, folder=small.folder)
    assert table.out.splitlines()[0].split()[:2] == ["rank", "period"]


def test_minima_are_timed_and_compared(small):
    words = ("data/photometry.csv", "--band", "V", "--period", "1.8763", "--epoch", "2459100.42")
    ran = shadowscale("minima", *words, "--json", folder=small.folder)
    assert ran.status == 0, ran.err
    document = json.loads(ran.out)
    timed = [row for row in document["rows"] if row["error"] is not None]
    assert len(timed) >= 2
    for row in timed:
        assert abs(row["o_minus_c"]) < 5 * row["error"], row
    table = shadowscale("minima", *words, folder=small.folder)
    assert table.out.startswith("time [d]") or "time [d]" in table.out.splitlines()[0]
    assert "as given" in table.out


def test_simulate_repeats_itself_and_overwrites_nothing(small, tmp_path):
    words = ("simulate", small.folder / "spec.toml", "--out", tmp_path / "d")
    ran = shadowscale(*words)
    assert ran.status == 0
    assert [line.rsplit("/", 1)[1] for line in ran.out.splitlines()] == [
        "photometry.csv",
        "velocities.csv",
        "truth.json",
    ]
    for name in ("photometry.csv", "velocities.csv", "truth.json"):
        assert (tmp_path / "d" / name).read_bytes() == (small.folder / "data" / name).read_bytes()
    again = shadowscale(*words)
    assert again.status == 2
    assert "which exists" in again.err


@pytest.mark.parametrize(
    "words", [("nosuchfile.csv",), ("--perod",), ("solve", "--help"), ("--version",)]
)
def test_the_door_never_opens_a_window_by_mistake(words, tmp_path):
    ran = shadowscale(*words, folder=tmp_path)
    assert ran.status == (0 if words[-1] in ("--help", "--version") else 2)
    assert "Traceback" not in ran.err


@pytest.mark.parametrize("seed", range(6))
def test_damaged_files_give_a_sentence_and_never_a_traceback(small, tmp_path, seed):
    """Bytes of good inputs changed at random; every end is one of the documented statuses."""
    rng = random.Random(seed)
    name = ("photometry.csv", "velocities.csv", "session.json")[seed % 3]
    shutil.copytree(small.folder, tmp_path / "copy")
    folder = tmp_path / "copy" / ("results" if name == "session.json" else "data")
    data = bytearray((folder / name).read_bytes())
    for _ in range(rng.choice([1, 5, 60])):
        data[rng.randrange(len(data))] = rng.randrange(256)
    (folder / name).write_bytes(bytes(data[: rng.randrange(len(data) // 2, len(data))]))
    if name == "session.json":
        words = ["replay", "results/session.json"]
    else:
        words = ["minima" if name == "photometry.csv" else "solve", "data/photometry.csv"]
        words += ["--velocities", "data/velocities.csv"] if name == "velocities.csv" else []
    out = [] if words[0] == "minima" else ["--out", "o", *NO_REPORT]
    ran = shadowscale(*words, *out, folder=tmp_path / "copy")
    print(f"seed {seed}: {name}, status {ran.status}: {ran.err[:200]}")
    assert ran.status in (0, 2, 3, 4)
    assert "Traceback" not in ran.err
    assert "trouble inside" not in ran.err
