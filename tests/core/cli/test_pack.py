"""`shadowscale pack`, and packed sessions where commands take a session."""

import zipfile

import pytest

from shadowscale.cli import main
from shadowscale.cli.saved import is_session, session_path
from shadowscale.session import Session, Source, open_session, save_session

NIGHTS = "BJD_TDB,mag,mag_err\n" + "".join(
    f"{2459000 + n / 10:.2f},12.0,0.005\n" for n in range(30)
)


@pytest.fixture
def folder(tmp_path, monkeypatch):
    (tmp_path / "nights.csv").write_text(NIGHTS)
    save_session(
        Session(photometry_sources=(Source(str(tmp_path / "nights.csv")),)),
        tmp_path / "session.json",
    )
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_the_command_packs_and_says_where(folder, capsys):
    assert main(["pack", "session.json", "pair.zip"]) == 0
    assert capsys.readouterr().out == "pair.zip\n"
    assert "data/nights.csv" in zipfile.ZipFile(folder / "pair.zip").namelist()
    assert main(["pack", "session.json", "pair.zip", "--quiet"]) == 2
    assert "a free place, or --overwrite" in capsys.readouterr().err
    assert main(["pack", "session.json", "pair.zip", "--overwrite", "--quiet"]) == 0
    assert capsys.readouterr().out == ""


@pytest.mark.parametrize(
    ("words", "status", "told"),
    [
        ([], 2, "SESSION: expected a session file, found 'nothing'"),
        (["session.json"], 2, "FILE.zip: expected a name that ends in .zip, found 'nothing'"),
        (["session.json", "pair.tar"], 2, "found 'pair.tar'"),
        (["none.json", "pair.zip"], 3, "expected a session file, found no such file"),
        (["nights.csv", "pair.zip"], 3, "nights.csv"),
    ],
)
def test_what_is_wrong_is_told(folder, capsys, words, status, told):
    assert main(["pack", *words]) == status
    assert told in capsys.readouterr().err
    assert not list(folder.glob("*.zip"))


def test_data_that_changed_are_not_packed(folder, capsys):
    save_session(open_session(folder / "session.json"), folder / "session.json")
    (folder / "nights.csv").write_text(NIGHTS.replace("12.0", "12.1"))
    assert main(["pack", "session.json", "pair.zip"]) == 3
    assert "another content" in capsys.readouterr().err


def test_a_packed_session_is_unpacked_among_the_results(folder, capsys):
    main(["pack", "session.json", "pair.zip"])
    assert is_session("pair.ZIP")
    assert is_session("session.json")
    assert not is_session("nights.csv")
    path = session_path("pair.zip", folder / "results", overwrite=False)
    assert path == folder / "results" / "pair" / "session.json"
    assert open_session(path).photometry.time.size == 30
    assert str(session_path("session.json", folder, overwrite=False)) == "session.json"


def test_commands_take_it_and_tell_what_it_lacks(folder, capsys):
    main(["pack", "session.json", "pair.zip"])
    assert main(["replay", "pair.zip", "--out", "again", "--report", "no"]) == 3
    assert "expected a solved session" in capsys.readouterr().err
    assert main(["solve", "pair.zip", "nights.csv", "--out", "out"]) == 2
    assert "nothing beside the session 'pair.zip'" in capsys.readouterr().err
