"""Writing results, refusing to overwrite, and comparing a replay; from an invented solution."""

import csv
import json
import os
from dataclasses import replace
from io import StringIO
from pathlib import Path

import jsonschema
import numpy as np
import pytest

from made_up import made_up_session
from shadowscale.errors import (
    NoSolutionError,
    NotDetachedError,
    ShadowscaleError,
    UsageError,
)
from shadowscale.fit.solution import DERIVED, Estimate
from shadowscale.jobs.replay import Difference, Replay, changed_versions, differences
from shadowscale.jobs.results import check_targets, result_files, sheet_of, write_results
from shadowscale.jobs.solve import IN_WINDOW, NOT_FOR_LEVEL, refuse_fatal, tables_to_solve
from shadowscale.jobs.words import summary
from shadowscale.judge.finding import FAIL, WARN, Finding
from shadowscale.session import Markers, Session, Source
from shadowscale.sheet import as_csv, as_json
from shadowscale.sheet.as_json import schema
from shadowscale.versions import library_versions


@pytest.fixture(scope="module")
def session():
    return made_up_session()


def test_all_files_are_written_and_named(session, tmp_path):
    folder = tmp_path / "new" / "folder"
    written = write_results(session, folder)
    assert {str(path.relative_to(folder)) for path in written} == set(result_files(session))
    assert all(path.stat().st_size > 100 for path in written)
    assert json.loads(written[0].read_text())["provenance"]["command"] == session.command
    stored = json.loads((tmp_path / "new" / "folder" / "session.json").read_text())
    assert stored["markers"]["primary"] == list(session.markers.primary)


def test_a_second_time_needs_overwrite(session, tmp_path):
    write_results(session, tmp_path, report=False)
    (tmp_path / "sheet.csv").write_text("mine")
    with pytest.raises(UsageError, match=r"a free place, or --overwrite"):
        write_results(session, tmp_path, report=False)
    assert (tmp_path / "sheet.csv").read_text() == "mine"
    write_results(session, tmp_path, overwrite=True, report=False)
    assert (tmp_path / "sheet.csv").read_text() != "mine"


@pytest.mark.parametrize("name", ["light_curve.csv", "sheet.json"])
def test_an_input_is_never_a_target_by_whatever_path(session, tmp_path, name):
    (tmp_path / name).write_text("data")
    link = tmp_path / "link"
    link.symlink_to(tmp_path)
    mine = replace(session, photometry_sources=(Source(str(link / name)),))
    with pytest.raises(UsageError, match="a folder without the input files"):
        check_targets(mine, tmp_path, result_files(mine), overwrite=True)
    table = replace(session.plan, limb_table=str(tmp_path / name))
    with pytest.raises(UsageError, match="a folder without the input files"):
        check_targets(replace(session, plan=table), tmp_path, [name], overwrite=True)


def test_a_file_where_a_folder_should_be(session, tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(UsageError, match="file is a file"):
        check_targets(session, tmp_path / "file" / "deep", ["sheet.csv"], overwrite=True)
    (tmp_path / "sheet.csv").mkdir()
    with pytest.raises(UsageError, match="which exists"):
        check_targets(session, tmp_path, ["sheet.csv"], overwrite=True)


def test_a_full_disk_is_a_sentence_and_leaves_nothing_half(session, tmp_path, monkeypatch):
    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("shadowscale.session.atomic.os.fsync", full)
    with pytest.raises(UsageError, match=r"No space left on device.*|a folder that can be written"):
        write_results(session, tmp_path / "out", report=False)
    assert list((tmp_path / "out").iterdir()) == []


def test_a_session_that_is_not_solved_has_no_sheet():
    with pytest.raises(ValueError, match="not solved"):
        sheet_of(made_up_session(solved=False))
    with pytest.raises(ValueError, match="not solved"):
        summary(Session(), Path("out"))


def test_the_summary_shows_masses_doubts_and_the_folder(session):
    lines = summary(session, Path("out")).splitlines()
    assert "M1           1.2734 \N{PLUS-MINUS SIGN} 0.0090 solMass" in lines
    assert "warn: radii exchanged fit only a little worse" in lines
    assert "also possible: radii exchanged" in lines
    assert lines[-1] == "results are in out"


def test_the_summary_says_which_rows_were_of_no_use_and_what_was_guessed(session):
    *_, note, rows, _ = summary(session, Path("out")).splitlines()
    assert note == "note: errors of band V are taken as given"
    told = "1 quality flag 1; 1 outlier of the fit; 1 no measurement; 2 unreadable"
    files = "each with its line in light_curve.csv or velocity_curve.csv"
    assert rows == f"rows set aside: {told} ({files})"


def test_a_fatal_finding_forbids_the_sheet():
    mild = Finding("residuals", 1.0, 2.0, FAIL, "residuals are correlated", "x")
    refuse_fatal((mild,))
    fatal = Finding("period", 1.0, 2.0, FAIL, "twice the period fits better", "x", fatal=True)
    with pytest.raises(NoSolutionError, match=r"twice the period fits better \(period = 1\)"):
        refuse_fatal((mild, fatal))
    close = Finding("fill-out", 0.99, 0.9, FAIL, "star 1 fills its lobe", "x", fatal=True)
    with pytest.raises(NotDetachedError, match="star 1 fills its lobe"):
        refuse_fatal((close,))
    doubt = Finding("period", 2.7, 3.0, WARN, "the true period is twice as long", "x")
    with pytest.raises(NotDetachedError, match=r"fills its lobe the true period is twice as long"):
        refuse_fatal((close, doubt))


def test_windows_that_the_observer_excluded_take_no_part(session):
    markers = replace(session.markers, excluded=((0.20, 0.25), (-0.01, 0.02), (0.97, 0.98)))
    table = tables_to_solve(replace(session, markers=markers))
    phase = np.mod((table.time - session.plan.epoch) / session.plan.period, 1.0)
    inside = ((phase > 0.20) & (phase < 0.25)) | (phase < 0.02) | (phase > 0.99)
    inside |= (phase > 0.97) & (phase < 0.98)
    why = table.reasons.index(IN_WINDOW)
    assert inside.any()
    assert np.array_equal((table.why == why), inside & session.photometry.used)
    assert tables_to_solve(replace(session, markers=Markers((0, 0, 0, 0)))) is session.photometry
    with pytest.raises(UsageError, match="at least one file of photometry"):
        tables_to_solve(Session())


def test_with_stretches_for_the_level_only_they_and_the_windows_take_part(session):
    markers = replace(
        session.markers,
        primary_window=(-0.08, 0.08),
        secondary_window=(0.42, 0.58),
        level=((0.15, 0.25), (-0.2, -0.15)),
        excluded=((0.2, 0.21),),
    )
    table = tables_to_solve(replace(session, markers=markers))
    phase = np.mod((table.time - session.plan.epoch) / session.plan.period, 1.0)
    counted = (phase <= 0.08) | (phase >= 0.92) | ((phase >= 0.42) & (phase <= 0.58))
    counted |= ((phase >= 0.15) & (phase <= 0.25)) | ((phase >= 0.8) & (phase <= 0.85))
    cut = (phase >= 0.2) & (phase <= 0.21)
    assert np.array_equal(table.used, session.photometry.used & counted & ~cut)
    beside = table.reasons.index(NOT_FOR_LEVEL)
    assert np.array_equal(table.why == beside, session.photometry.used & ~counted)


def test_only_numbers_that_differ_are_told_the_largest_first(session):
    saved = session.solution
    assert differences(saved, saved) == ()
    changed = dict(saved.estimates)
    for name, factor in (("M1", 1 + 1e-5), ("M2", 1 + 1e-10), ("R1", 1.1)):
        old = changed[name]
        changed[name] = Estimate(old.value * factor, old.minus, old.plus, DERIVED)
    del changed["R2"]
    found = differences(saved, replace(saved, estimates=changed))
    assert [item.name for item in found] == ["R2", "R2 minus", "R2 plus", "R1", "M1"]
    assert str(found[0]).startswith("R2: was ")
    assert str(found[0]).endswith("is none")


def test_a_replay_says_which_versions_changed(session):
    now = library_versions()
    then = {**now, "numpy": "1.26.4"}
    saved = session.solution
    found = Replay(session, (), changed_versions(then))
    assert found.same
    assert (
        found.words()
        == f"the same numbers\nother versions than then: numpy 1.26.4, now {now['numpy']}"
    )
    other = replace(saved, estimates={**saved.estimates, "M1": Estimate(9.0, None, None, DERIVED)})
    differs = Replay(session, differences(saved, other), changed_versions(now))
    assert differs.words().startswith("3 numbers differ from the saved ones:\n  M1 minus")
    assert differs.words().endswith("or the session was edited")
    assert changed_versions({}) == {}


def test_a_session_keeps_the_versions_that_solved_it(session, tmp_path):
    old = replace(session, versions={"numpy": "1.26.4"})
    write_results(old, tmp_path, report=False)
    for name, place in (("session.json", ()), ("sheet.json", ("provenance",))):
        document = json.loads((tmp_path / name).read_text())
        for each in place:
            document = document[each]
        assert document["versions"] == {"numpy": "1.26.4"}
    write_results(session, tmp_path, report=False, overwrite=True)
    document = json.loads((tmp_path / "session.json").read_text())
    assert document["versions"] == library_versions()


def test_the_sheet_says_what_was_wished_of_it(session, tmp_path):
    table = tmp_path / "private" / "table.txt"
    plan = replace(session.plan, extinction=(0.1, 0.02), limb_table=str(table))
    document = json.loads(as_json(sheet_of(replace(session, plan=plan))))
    jsonschema.validate(document, schema())
    wishes = document["provenance"]["plan"]
    assert wishes["extinction"] == [0.1, 0.02]
    assert wishes["limb_table"] == "table.txt"
    assert wishes["priors"][0]["name"] == plan.priors[0].name
    spread = csv.DictReader(StringIO(as_csv(sheet_of(replace(session, plan=plan)))))
    told = {row["name"]: row["value"] for row in spread if row["section"] == "provenance"}
    assert json.loads(told["plan.extinction"]) == [0.1, 0.02]


def test_trouble_with_the_report_costs_nothing_else(session, tmp_path, monkeypatch):
    def broken(*_):
        raise RuntimeError("no fonts")

    monkeypatch.setattr("shadowscale.sheet.figures.make_figure", broken)
    with pytest.raises(ShadowscaleError, match=r"no fonts\); all other results are in"):
        write_results(session, tmp_path)
    written = {path.name for path in tmp_path.iterdir()}
    assert written == set(result_files(session, report=False))


def test_a_file_name_that_is_no_text_spoils_nothing(session, tmp_path):
    name = os.fsdecode(b"/n\xe9.csv")
    odd = replace(session, name=name, command=f"shadowscale solve {name}")
    write_results(odd, tmp_path)
    assert json.loads((tmp_path / "session.json").read_text())["command"] == odd.command
    assert json.loads((tmp_path / "sheet.json").read_text())["provenance"]["command"] == odd.command
    assert (tmp_path / "report.pdf").stat().st_size > 10_000


def test_a_difference_is_relative_to_the_larger():
    assert Difference("x", 1.0, 2.0).relative == 0.5
    assert Difference("x", 0.0, 0.0).relative == 0.0
    assert Difference("x", None, 1.0).relative == float("inf")
