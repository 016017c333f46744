"""Sessions as files."""

import json
import os
from dataclasses import replace
from pathlib import Path

import jsonschema
import pytest

from made_up import made_up_session
from same import assert_same
from shadowscale.errors import SessionError
from shadowscale.session import Exclusion, Session, Source, open_session, save_session, store
from shadowscale.session.store import from_document, schema

LIGHT = "BJD_TDB,mag,mag_err\n" + "\n".join(
    f"{2459000 + number / 10:.2f},{12 + number / 1000:.3f},0.005" for number in range(30)
)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    (tmp_path / "nights.csv").write_text(LIGHT)
    (tmp_path / "velocities.csv").write_text("BJD_TDB,rv1,rv1_err\n2459000.1,10.0,0.5\n")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def saved(session, path):
    save_session(session, path)
    return json.loads(path.read_text())


def test_every_number_comes_back_bit_for_bit(folder):
    session = replace(made_up_session(("V", "I")), versions={"numpy": "2.4.6"})
    document = saved(session, folder / "session.json")
    jsonschema.validate(document, schema())
    opened = from_document(document, Path("session.json"))
    assert_same(replace(session, photometry=None, velocities=None), opened)


def test_a_session_opens_with_its_tables_and_exclusions(folder):
    session = Session(
        photometry_sources=(Source("nights.csv", band="V"),),
        exclusions=(Exclusion("light", "nights.csv", (3, 4), "clouds"),),
    )
    save_session(session, folder / "session.json")
    opened = open_session(Path("session.json"))
    assert opened.photometry.bands == ("V",)
    assert opened.photometry.line[~opened.photometry.used].tolist() == [3, 4]
    assert set(opened.photometry.reasons) >= {"used", "clouds"}
    assert len(opened.photometry_sources[0].sha256) == 64


def test_a_folder_that_moved_still_opens(folder):
    session = Session(photometry_sources=(Source(str(folder / "nights.csv")),))
    (folder / "work").mkdir()
    document = saved(session, folder / "work" / "session.json")
    assert document["photometry_sources"][0]["path"] == "../nights.csv"
    moved = folder.parent / (folder.name + "-moved")
    os.rename(folder, moved)
    opened = open_session(moved / "work" / "session.json")
    assert opened.photometry.time.size == 30


def test_a_link_on_the_way_leads_to_the_right_file(folder):
    (folder / "far" / "deep").mkdir(parents=True)
    (folder / "far" / "nights.csv").write_text(LIGHT.replace("0.005", "0.007"))
    (folder / "near").symlink_to(folder / "far" / "deep")
    document = {"schema": 1, "photometry_sources": [{"path": "../nights.csv"}]}
    (folder / "near" / "session.json").write_text(json.dumps(document))
    opened = open_session(folder / "near" / "session.json")
    assert opened.photometry.value_error[0] == 0.007
    session = Session(photometry_sources=(Source("nights.csv"),))
    assert saved(session, folder / "near" / "other.json")["photometry_sources"][0]["path"] == (
        "../../nights.csv"
    )
    assert open_session(folder / "near" / "other.json").photometry.value_error[0] == 0.005


def test_a_file_beside_the_session_is_found_by_its_name(folder):
    document = {"schema": 1, "photometry_sources": [{"path": "elsewhere/nights.csv"}]}
    (folder / "session.json").write_text(json.dumps(document))
    assert open_session(folder / "session.json").photometry.time.size == 30


def test_a_missing_file_is_told_with_where_it_was_looked_for(folder):
    document = {
        "schema": 1,
        "photometry_sources": [{"path": "lost/one.csv"}, {"path": "two.csv"}],
    }
    (folder / "session.json").write_text(json.dumps(document))
    with pytest.raises(SessionError, match=r"lost/one\.csv.* and .*one\.csv") as caught:
        open_session(folder / "session.json")
    assert [problem.expected for problem in caught.value.problems] == [
        "the file 'lost/one.csv'",
        "the file 'two.csv'",
    ]


def test_a_changed_file_makes_the_solution_stale(folder):
    session = made_up_session()
    sources = (Source("nights.csv", sha256="0" * 64),)
    save_session(
        replace(session, photometry_sources=sources, velocity_sources=()), folder / "s.json"
    )
    opened = open_session(folder / "s.json")
    assert opened.solution is None
    assert opened.audit == ()
    assert opened.markers == session.markers
    assert "nights.csv changed since the session was saved" in opened.notes[0]
    with pytest.raises(SessionError, match=r"the file that the session was saved with"):
        open_session(folder / "s.json", same_files=True)
    save_session(opened, folder / "s.json")
    assert open_session(folder / "s.json", same_files=True).notes == ()


def test_a_solution_of_other_rows_is_set_aside(folder):
    session = replace(made_up_session(), velocity_sources=(), exclusions=())
    sources = tuple(replace(source, sha256="", columns={}) for source in session.photometry_sources)
    save_session(replace(session, photometry_sources=sources), folder / "s.json")
    opened = open_session(folder / "s.json")
    assert opened.solution is None
    assert "read otherwise" in opened.notes[0]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{", r"s\.json, line 1, column '2': expected JSON"),
        ('{"schema": 1,\n "name": }', r"line 2, column '10'"),
        ("[]", "expected a JSON object, found list"),
        ("{}", "expected session schema 1, found None"),
        ('{"schema": 99}', "saved by a newer version"),
        ('{"schema": "1"}', "expected session schema 1, found '1'"),
        ('{"schema": 1, "nmae": "x"}', r"column 'session\.nmae': expected 'name'"),
        ('{"schema": 1, "photometry": {}}', "no such entry in a session"),
        ('{"schema": 1, "plan": {"seed": NaN}}', "NaN is not JSON"),
        ('{"schema": 1, "plan": {"orbit": 3}}', r"column 'session\.plan\.orbit': expected text"),
        ('{"schema": 1, "plan": {"law": "cubic"}}', r"plan\.law': expected one of linear, "),
        ('{"schema": 1, "plan": {"levels": "x"}}', r"levels': expected one of auto, one, night, "),
        ('{"schema": 1, "plan": {"effects": {"tides": "off"}}}', r"expected one of ellipsoidal"),
        ('{"schema": 1, "plan": {"period": 0}}', r"plan\.period': expected a number above 0"),
        ('{"schema": 1, "plan": {"epoch": "inf"}}', r"epoch': expected a finite number, found inf"),
        ('{"schema": 1, "plan": {"exposure": -1}}', r"exposure': expected a number 0 or more"),
        ('{"schema": 1, "plan": {"teff1": [6000, 0]}}', r"teff1\[1\]': expected a number above 0"),
        (
            '{"schema": 1, "plan": {"free": ["mass"]}}',
            r"expected the name of a quantity, found 'mass'",
        ),
        ('{"schema": 1, "plan": {"fixed": {"e": [0]}}}', r"the name of a quantity, found 'e'"),
        (
            '{"schema": 1, "exclusions": [{"table": "x", "file": "f", "lines": [], "reason": ""}]}',
            "expected one of light, rv1, rv2",
        ),
        (
            '{"schema": 1, "system": {"values": {}, "free": [], "law": "linear", "bands": []}}',
            r"system\.values': expected a value for 'period'",
        ),
        ("\x00\xff", "expected JSON"),
        ("[" * 100_000, "expected JSON"),
    ],
)
def test_a_broken_session_says_where(folder, text, words):
    (folder / "s.json").write_text(text, encoding="latin-1")
    with pytest.raises(SessionError, match=words):
        open_session(folder / "s.json")


def test_no_session_at_all(folder):
    with pytest.raises(SessionError, match="expected a session file, found no such file"):
        open_session(folder / "none.json")
    with pytest.raises(SessionError, match="expected a session file, found"):
        open_session(folder)


def test_a_save_that_fails_leaves_the_old_file(folder, monkeypatch):
    path = folder / "session.json"
    save_session(Session(name="old"), path)

    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("shadowscale.session.atomic.os.fsync", full)
    with pytest.raises(OSError, match="No space left"):
        save_session(Session(name="new"), path)
    assert json.loads(path.read_text())["name"] == "old"
    assert sorted(item.name for item in folder.iterdir()) == [
        "nights.csv",
        "session.json",
        "velocities.csv",
    ]


def test_a_session_too_large_is_refused(folder, monkeypatch):
    (folder / "s.json").write_text('{"schema": 1}')
    monkeypatch.setattr(store, "MAX_BYTES", 5)
    with pytest.raises(SessionError, match="a larger file"):
        open_session(folder / "s.json")
