"""Recovery after a crash."""

import json
import os
import subprocess
import sys

import pytest

from shadowscale.session import Session, Source
from shadowscale.session.journal import Journal, discard, recover, recoverable

LIGHT = "BJD_TDB,mag,mag_err\n" + "\n".join(
    f"{2459000 + number / 10:.2f},{12 + number / 1000:.3f},0.005" for number in range(30)
)
WRITER = """
import sys
from pathlib import Path
from shadowscale.session import Session, Source
from shadowscale.session.journal import Journal
journal = Journal(Path(sys.argv[1]))
journal.write(Session(name="lost work", photometry_sources=(Source("light.csv"),)), path="old.json")
print(journal.file, flush=True)
sys.stdin.read()
"""


@pytest.fixture
def folder(tmp_path, monkeypatch):
    (tmp_path / "light.csv").write_text(LIGHT)
    monkeypatch.chdir(tmp_path)
    return tmp_path / "journals"


def test_work_of_a_process_that_was_killed_can_be_recovered(folder, tmp_path, monkeypatch):
    with subprocess.Popen(
        [sys.executable, "-c", WRITER, str(folder)], stdin=subprocess.PIPE, stdout=subprocess.PIPE
    ) as process:
        process.stdout.readline()
        assert recoverable(folder) == ()  # it still runs
        process.kill()
    (found,) = recoverable(folder)
    assert (found.name, found.path) == ("lost work", "old.json")
    monkeypatch.chdir(tmp_path.parent)  # paths in the journal do not depend on where one stands
    session = recover(found)
    assert session.name == "lost work"
    assert session.photometry.time.size == 30
    discard(found)
    assert recoverable(folder) == ()


def test_our_own_journal_is_not_recoverable_and_goes_when_closed(folder):
    journal = Journal(folder)
    session = Session(name="mine", photometry_sources=(Source("light.csv"),))
    assert journal.write(session) is True
    assert journal.write(session) is False  # nothing changed
    assert journal.write(Session(name="other")) is True
    assert recoverable(folder) == ()
    journal.close()
    assert list(folder.iterdir()) == []
    journal.close()


def test_a_process_number_used_again_does_not_hide_lost_work(folder):
    journal = Journal(folder)
    journal.write(Session(name="mine"))
    document = json.loads(journal.file.read_text())
    if document["journal"]["started"] is None:
        pytest.skip("this system does not tell when a process started")
    document["journal"]["started"] = "before"
    assert document["journal"]["pid"] == os.getpid()
    journal.file.write_text(json.dumps(document))
    assert [item.name for item in recoverable(folder)] == ["mine"]


@pytest.mark.parametrize("text", ["", "{", "[]", '{"journal": {}, "session": {}}', "null"])
def test_damaged_journals_are_left_out(folder, text):
    folder.mkdir()
    (folder / "1-1.journal.json").write_text(text)
    assert recoverable(folder) == ()
