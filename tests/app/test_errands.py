"""Reading and writing beside the window: the frame never waits, nothing is lost, errors are told."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtWidgets import QApplication, QMessageBox

from shadowscale.session import store, tables
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.dialogs.reading import Reading
from shadowscale_app.errands import Errands
from shadowscale_app.samples import samples
from shadowscale_app.trouble import Trouble


@pytest.fixture
def errands(qapp: QApplication) -> Iterator[Errands]:
    found = Errands()
    yield found
    found.close()


@pytest.fixture
def unhurried(bench: Bench) -> Bench:
    """The bench that reads and writes in a thread, as the program does."""
    bench.files.errands.immediate = False
    return bench


def test_work_is_done_elsewhere_and_taken_here_in_order(errands: Errands) -> None:
    seen: list[object] = []
    here = threading.current_thread()

    def work(number: int) -> tuple[int, bool]:
        return number, threading.current_thread() is here

    for number in range(3):
        errands.run(
            "counting",
            lambda number=number: work(number),
            lambda found: seen.append((found, threading.current_thread() is here)),
        )

    assert seen == []
    assert errands.wait_until_idle()
    assert seen == [((number, False), True) for number in range(3)]


def test_what_goes_wrong_is_told_and_the_next_errand_is_done(
    errands: Errands, told: list[Trouble]
) -> None:
    seen: list[int] = []
    errands.run("opening night.csv", lambda: Path("/nowhere/night.csv").read_text("utf-8"))
    errands.run("counting", lambda: 1, lambda found: seen.append(1 // (found - 1)))
    errands.run("counting on", lambda: 2, seen.append)

    assert errands.wait_until_idle()
    assert [each.doing for each in told] == ["opening night.csv", "counting"]
    assert seen == [2]


def test_the_window_lives_while_a_table_is_read(
    unhurried: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    gate, plain = threading.Event(), tables.with_tables
    monkeypatch.setattr(
        tables, "with_tables", lambda session: plain(session) if gate.wait(20) else session
    )
    monkeypatch.setattr(unhurried.files, "_ask", lambda *_, **__: Reading())
    before = unhurried.desk.session
    path = samples()[0][2].parent / "photometry.csv"

    unhurried.files.open_photometry(path)
    QApplication.processEvents()
    busy = unhurried.status.errand.text()
    unhurried.actions_table.by_name["magnitudes"].trigger()  # something else is done meanwhile

    assert busy.startswith("opening photometry.csv")
    assert before.photometry is unhurried.desk.session.photometry
    gate.set()
    assert unhurried.files.errands.wait_until_idle()
    assert unhurried.desk.session.name == "photometry"
    assert unhurried.status.errand.text() == ""


def test_closing_waits_until_the_work_is_saved(
    unhurried: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    plain, slow = store.save_session, threading.Event()

    def save(session: object, path: Path) -> None:
        slow.wait(0.1)
        plain(session, path)

    monkeypatch.setattr(store, "save_session", save)
    monkeypatch.setattr(QMessageBox, "question", lambda *_: QMessageBox.StandardButton.Save)
    unhurried.open_paths([str(samples()[0][2])])
    assert unhurried.files.errands.wait_until_idle()
    unhurried.desk.path = tmp_path / "work.json"
    unhurried.desk.apply(Change("Rename", replace(unhurried.desk.session, name="other")))

    assert unhurried.close()

    assert '"other"' in (tmp_path / "work.json").read_text(encoding="utf-8")


def test_what_changed_while_it_was_saved_stays_unsaved(unhurried: Bench, tmp_path: Path) -> None:
    unhurried.open_paths([str(samples()[0][2])])
    assert unhurried.files.errands.wait_until_idle()

    unhurried.files.save_to(tmp_path / "work.json")
    unhurried.desk.apply(Change("Rename", replace(unhurried.desk.session, name="other")))
    assert unhurried.files.errands.wait_until_idle()

    assert unhurried.desk.unsaved
    assert tmp_path / "work.json" == unhurried.desk.path
