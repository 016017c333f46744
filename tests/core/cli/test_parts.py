"""The bar, tables, and the door's own words."""

import io
import json

import pytest

from shadowscale.cli import COMMANDS, main
from shadowscale.cli.bar import bar
from shadowscale.cli.table import aligned
from shadowscale.errors import NotDetachedError, Problem, TableError
from shadowscale.jobs.table import Column, Table
from shadowscale.progress import SILENT


class Terminal(io.StringIO):
    def isatty(self):
        return True


def test_the_bar_is_drawn_on_a_terminal_and_gone_at_the_end():
    stream = Terminal()
    with bar(quiet=False, stream=stream) as progress:
        progress.report(0.5, "fitting")
        progress.report(0.5, "fitting")
        progress.report(7.0, "done")
    text = stream.getvalue()
    assert text.count(" 50 %  fitting") == 1
    assert "100 %  done" in text
    assert text.endswith(" \r")


def test_the_bar_is_cleared_before_an_error_is_told():
    stream = Terminal()

    def work():
        with bar(quiet=False, stream=stream) as progress:
            progress.report(0.1, "reading")
            raise ValueError("broke")

    with pytest.raises(ValueError, match="broke"):
        work()
    assert stream.getvalue().endswith("\r")


def test_there_is_no_bar_in_a_file_or_when_quiet():
    with bar(quiet=False, stream=io.StringIO()) as progress:
        assert progress is SILENT
    with bar(quiet=True, stream=Terminal()) as progress:
        assert progress is SILENT


TABLE = Table(
    (Column("time", "d", 3), Column("remark"), Column("error")),
    ((1.23456, "good", 0.1), (100.0, "no error", None), (2.0, "odd", float("nan"))),
    ("that is all",),
    {"period": 2.5, "other": float("inf")},
)


def test_numbers_stand_to_the_right_and_words_to_the_left():
    assert aligned(TABLE).splitlines() == [
        "time [d]  remark    error",
        "   1.235  good        0.1",
        " 100.000  no error",
        "   2.000  odd",
        "that is all",
    ]


def test_a_table_as_json_has_full_numbers_and_null_for_none():
    document = json.loads(json.dumps(TABLE.document(), allow_nan=False))
    assert document["rows"][0] == {"time": 1.23456, "remark": "good", "error": 0.1}
    assert document["rows"][2]["error"] is None
    assert (document["period"], document["other"]) == (2.5, None)
    assert document["notes"] == ["that is all"]


def test_help_names_every_command(capsys):
    assert main(["--help"]) == 0
    text = capsys.readouterr().out
    for name, command in COMMANDS.items():
        assert f"  {name} " in text
        assert command.words in text


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_help_and_refuses_unknown_options(name, capsys):
    assert main([name, "--help"]) == 0
    assert "--json-errors" in capsys.readouterr().out
    assert main([name, "--quite"]) == 2
    assert "did you mean --quiet?" in capsys.readouterr().err


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_says_what_is_missing(name, capsys):
    assert main([name]) == 2
    assert "found 'nothing'" in capsys.readouterr().err


def test_an_unknown_command_names_the_nearest(capsys):
    assert main(["slove"]) == 2
    assert "did you mean 'solve'?" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("error", "status"),
    [
        (TableError(Problem("a.csv", "a number", "'x'", line=3, column="mag")), 3),
        (NotDetachedError("star 1 fills its lobe", {"fill-out": 0.97}), 4),
    ],
)
def test_errors_become_one_json_object(error, status, capsys, monkeypatch):
    def broken(_):
        raise error

    command = COMMANDS["solve"]
    monkeypatch.setitem(vars(command), "run", broken)
    assert main(["solve", "a.csv", "--json-errors"]) == status
    shown = json.loads(capsys.readouterr().err)
    assert shown["error"] == type(error).__name__
    assert shown["exit_status"] == status
    assert shown["message"] == str(error)


def test_trouble_inside_the_program_is_a_sentence(capsys, monkeypatch):
    def broken(_):
        raise KeyError("radius")

    monkeypatch.setitem(vars(COMMANDS["solve"]), "run", broken)
    monkeypatch.delenv("SHADOWSCALE_DEBUG", raising=False)
    assert main(["solve"]) == 1
    text = capsys.readouterr().err
    assert "trouble inside the program (KeyError: 'radius')" in text
    assert "Traceback" not in text
    monkeypatch.setenv("SHADOWSCALE_DEBUG", "1")
    assert main(["solve"]) == 1
    assert "Traceback" in capsys.readouterr().err


def test_a_stop_from_the_keyboard_has_its_own_status(capsys, monkeypatch):
    def stopped(_):
        raise KeyboardInterrupt

    monkeypatch.setitem(vars(COMMANDS["solve"]), "run", stopped)
    assert main(["solve"]) == 130
    assert capsys.readouterr().err == "shadowscale: stopped\n"
