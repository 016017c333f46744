"""The whole way with the real engine, as somebody goes it who has read nothing."""

from __future__ import annotations

import json
import subprocess
import sys
from functools import partial
from pathlib import Path
from typing import Any

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QLabel, QPushButton

from hands import drag
from shadowscale.jobs import results
from shadowscale.jobs.replay import replay_session
from shadowscale.jobs.solve import solve_session
from shadowscale.session.session import Session
from shadowscale.session.store import open_session
from shadowscale.view.contacts import with_start_markers
from shadowscale.view.follow import FOLLOWED
from shadowscale_app.bench import Bench
from shadowscale_app.dialogs.exporting import Target
from shadowscale_app.samples import samples

SAME = 1e-9  # relative


@pytest.fixture(autouse=True)
def without_report(monkeypatch: pytest.MonkeyPatch) -> None:
    """The report and its figures have tests of their own, and take longer than all the rest."""
    monkeypatch.setattr(results, "write_results", partial(results.write_results, report=False))


@pytest.fixture(scope="module")
def solved() -> Session:
    """The first sample as one click leaves it."""
    return with_start_markers(solve_session(open_session(samples()[0][2])))


def pull_first_contact(bench: Bench, by: float = -0.004) -> None:
    """Drag the first contact of primary eclipse outwards by so many cycles."""
    picture = bench.panes["Eclipses"].pairs["primary"].curve
    start = bench.desk.session.markers.primary[0]
    drag(picture, start, start + by)


def test_one_click_from_a_sample_to_both_stars(bench: Bench, solved: Session) -> None:
    title, _, path = samples()[0]
    bench.desk.begin(Session())
    sample = next(b for b in bench.start.findChildren(QPushButton) if b.accessibleName() == title)
    QTest.mouseClick(sample, Qt.MouseButton.LeftButton)
    assert bench.long_lane.wait_until_idle()
    truth = json.loads((path.parent / "truth.json").read_text(encoding="utf-8"))

    estimates = bench.desk.session.solution.estimates
    for name in ("M1", "M2", "R1", "R2"):
        assert abs(estimates[name].value - truth["values"][name]) < 5 * estimates[name].plus, name
    assert bench.desk.session.markers is not None
    assert bench.panes["Eclipses"].pairs["primary"].curve.lines
    assert bench.panes["To scale"].sky.scene is not None
    labels = bench.panes["The two stars"].findChildren(QLabel)
    assert bench.desk.session.markers == solved.markers
    assert any(f"<b>{estimates['M1'].value:.4f}" in label.text() for label in labels)


def test_drag_solve_export_gives_what_the_command_gives(
    bench: Bench, solved: Session, tmp_path: Path
) -> None:
    """The radii of the contacts follow the marker, the sheet is that of `shadowscale solve` on the session."""
    bench.desk.begin(solved)
    bench.live.following = True
    before = bench.desk.session.contact.values
    words = bench.panes["Eclipses"].geometry_words.text()

    pull_first_contact(bench)
    assert bench.live.wait_until_idle()

    after = bench.desk.session.contact.values
    assert after["r1"] + after["r2"] > before["r1"] + before["r2"] + 0.003
    assert words != bench.panes["Eclipses"].geometry_words.text()
    assert FOLLOWED in bench.desk.session.solution.notes

    bench.actions_table.by_name["solve"].trigger()
    assert bench.long_lane.wait_until_idle()
    assert FOLLOWED not in bench.desk.session.solution.notes
    export(bench, tmp_path / "desktop")
    solve_by_command(tmp_path / "desktop" / "session.json", tmp_path / "command")

    assert differences(tmp_path / "desktop", tmp_path / "command") == []


def test_what_was_only_followed_is_solved_before_it_is_written(
    bench: Bench, solved: Session, tmp_path: Path
) -> None:
    bench.desk.begin(solved)
    bench.live.following = True
    pull_first_contact(bench)
    bench.panes["Quantities"].set_state("surface_brightness_ratio[V]", "held")
    assert bench.live.wait_until_idle()
    assert FOLLOWED in bench.desk.session.solution.notes

    export(bench, tmp_path)

    assert FOLLOWED not in bench.desk.session.solution.notes
    assert bench.desk.history.undo_label == "Solve"
    written = json.loads((tmp_path / "sheet.json").read_text(encoding="utf-8"))
    fitted = bench.desk.session.solution.estimates["r1"].value
    assert written["quantities"]["r1"]["value"] == fitted
    replayed = replay_session(open_session(tmp_path / "session.json", same_files=True))
    assert replayed.words() == "the same numbers"


def export(bench: Bench, folder: Path) -> None:
    """Export to a folder."""
    bench.work.export(Target(folder, replace=False))
    assert bench.long_lane.wait_until_idle()
    assert (folder / "sheet.json").exists()


def solve_by_command(session: Path, folder: Path) -> None:
    """Solve the session anew with the command line."""
    command = [sys.executable, "-m", "shadowscale_app", "solve", str(session), "--out", str(folder)]
    subprocess.run([*command, "--quiet", "--report", "no"], check=True, timeout=100)


def differences(first: Path, second: Path) -> list[str]:
    """Numbers of two sheets that differ; where they stand."""
    pair = [json.loads((each / "sheet.json").read_text("utf-8")) for each in (first, second)]
    for sheet in pair:
        del sheet["provenance"]
    found: list[str] = []
    _compare(pair[0], pair[1], "sheet", found)
    return found


def _compare(first: Any, second: Any, where: str, found: list[str]) -> None:
    if isinstance(first, dict) and isinstance(second, dict) and first.keys() == second.keys():
        for name in first:
            _compare(first[name], second[name], f"{where}.{name}", found)
    elif isinstance(first, list) and isinstance(second, list) and len(first) == len(second):
        for number, (one, other) in enumerate(zip(first, second, strict=True)):
            _compare(one, other, f"{where}[{number}]", found)
    elif isinstance(first, float) and isinstance(second, float):
        if first != pytest.approx(second, rel=SAME, abs=SAME):
            found.append(f"{where}: {first!r}, {second!r}")
    elif first != second:
        found.append(f"{where}: {first!r}, {second!r}")
