"""Reading and writing beside the window: the frame never waits, nothing is lost, errors are told."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QMessageBox

from shadowscale import data
from shadowscale.session import store, tables
from shadowscale.session.session import Session
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
    monkeypatch.setattr(unhurried.opening, "ask", lambda *_, **__: Reading())
    before = unhurried.desk.session
    path = samples()[0][2].parent / "photometry.csv"

    unhurried.opening.open_paths([path])
    while not (busy := unhurried.status.errand.text()).startswith("opening"):
        QApplication.processEvents()  # it is looked into first
    unhurried.actions_table.by_name["magnitudes"].trigger()  # something else is done meanwhile

    assert busy == "opening photometry.csv\N{HORIZONTAL ELLIPSIS}"
    assert before.photometry is unhurried.desk.session.photometry
    gate.set()
    assert unhurried.files.errands.wait_until_idle()
    assert unhurried.desk.session.name == "photometry"
    assert unhurried.status.errand.text() == ""


@pytest.mark.parametrize("moment", ["looked into", "read"])
def test_reading_can_be_given_up_by_a_click(
    unhurried: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, moment: str
) -> None:
    gate = threading.Event()
    module, name = (data, "head_of") if moment == "looked into" else (tables, "with_tables")
    plain = getattr(module, name)
    monkeypatch.setattr(module, name, lambda given: (gate.wait(20), plain(given))[1])
    asked: list[str] = []
    monkeypatch.setattr(
        unhurried.opening, "ask", lambda *_, **__: (asked.append(moment), Reading())[1]
    )
    before = unhurried.desk.session
    unhurried.opening.open_paths([samples()[0][2].parent / "photometry.csv"])
    while moment == "read" and not asked:
        QApplication.processEvents()
    QApplication.processEvents()
    assert unhurried.status.errand.text().endswith("photometry.csv\N{HORIZONTAL ELLIPSIS}")
    assert unhurried.status.errand_bar.isVisible()

    QTest.mouseClick(unhurried.status.give_up, Qt.MouseButton.LeftButton)

    assert not unhurried.files.errands.running
    assert not unhurried.status.give_up.isVisible()
    assert unhurried.files.errands.left_behind
    told = unhurried.status.words.text()
    assert told.startswith("Given up: ")
    assert told.endswith("The session is as it was.")
    unhurried.files.errands.run("counting", lambda: 1)  # others are done at once
    assert unhurried.files.errands.wait_until_idle()
    gate.set()
    while unhurried.files.errands.left_behind:
        QApplication.processEvents()
    QApplication.processEvents()
    assert unhurried.desk.session is before
    assert asked == (["read"] if moment == "read" else [])


def test_what_is_written_cannot_be_given_up(unhurried: Bench, tmp_path: Path) -> None:
    gate, done = threading.Event(), []
    unhurried.files.errands.run("saving work.json", lambda: gate.wait(20), done.append)
    QApplication.processEvents()

    assert not unhurried.status.give_up.isVisible()
    unhurried.files.errands.give_up()

    assert unhurried.files.errands.running
    gate.set()
    assert unhurried.files.errands.wait_until_idle()
    assert done == [True]


def test_photometry_comes_before_velocities_whatever_their_order(
    unhurried: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    kinds: list[str] = []
    monkeypatch.setattr(
        unhurried.opening,
        "ask",
        lambda _window, _table, kind, **_: (kinds.append(kind), Reading())[1],
    )
    folder = samples()[0][2].parent

    unhurried.open_paths([str(folder / "velocities.csv"), str(folder / "photometry.csv")])
    assert unhurried.files.errands.wait_until_idle()

    assert kinds == ["photometry", "velocities"]
    assert unhurried.desk.session.photometry is not None
    assert unhurried.desk.session.velocities is not None


def test_a_second_table_of_the_same_drop_is_added(
    unhurried: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    paths = [tmp_path / "blue.csv", tmp_path / "red.csv"]
    for night, path in enumerate(paths):
        rows = [f"{2459000 + night + n / 500:.4f},12.{n % 7},0.01" for n in range(300)]
        path.write_text("\n".join(["BJD,mag,err", *rows]), encoding="utf-8")
    offered: list[bool] = []
    monkeypatch.setattr(
        unhurried.opening,
        "ask",
        lambda *_, adds=False, **__: (offered.append(adds), Reading(adds=adds))[1],
    )

    unhurried.desk.begin(Session())
    unhurried.open_paths([str(path) for path in paths])
    assert unhurried.files.errands.wait_until_idle()

    assert offered == [False, True]
    sources = unhurried.desk.session.photometry_sources
    assert [Path(each.path).name for each in sources] == ["blue.csv", "red.csv"]


def test_velocities_are_not_added_to_what_was_opened_meanwhile(
    unhurried: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    gate, plain = threading.Event(), tables.with_tables
    monkeypatch.setattr(tables, "with_tables", lambda each: (gate.wait(20), plain(each))[1])
    monkeypatch.setattr(unhurried.opening, "ask", lambda *_, **__: Reading())
    unhurried.desk.begin(replace(unhurried.desk.session, velocity_sources=(), velocities=None))
    unhurried.opening.open_paths([samples()[0][2].parent / "velocities.csv"])
    while not unhurried.status.errand.text().startswith("opening"):
        QApplication.processEvents()
    other = Session(name="other")

    unhurried.desk.begin(other)
    gate.set()

    assert unhurried.files.errands.wait_until_idle()
    assert unhurried.desk.session is other
    assert "velocities.csv is not added" in unhurried.status.words.text()


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
