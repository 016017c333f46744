"""Saving, opening, asking before work is lost, recovery, export, figures."""

from __future__ import annotations

import base64
import re
from dataclasses import replace
from functools import partial
from pathlib import Path

import pytest
from PySide6.QtGui import QColor, QImage
from PySide6.QtWidgets import QApplication, QMessageBox

from shadowscale.jobs import results as jobs_results
from shadowscale.session.journal import Journal
from shadowscale.session.session import Session
from shadowscale_app import theme
from shadowscale_app.actions import FIGURE_PANES
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.dialogs.exporting import ExportDialog, Target, agreed_target
from shadowscale_app.journals import journal_folder
from shadowscale_app.plots import figure
from shadowscale_app.plots.figure import KINDS, save_figure
from shadowscale_app.samples import samples

ANSWER = QMessageBox.StandardButton


def opened(bench: Bench) -> None:
    """Open the first sample."""
    bench.open_paths([str(samples()[0][2])])


def answer(monkeypatch: pytest.MonkeyPatch, button: QMessageBox.StandardButton) -> list[str]:
    """Answer every question with one button; what was asked."""
    asked: list[str] = []

    def question(_parent: object, _title: str, text: str, *_: object) -> QMessageBox.StandardButton:
        asked.append(text)
        return button

    monkeypatch.setattr(QMessageBox, "question", question)
    return asked


def rename(bench: Bench) -> None:
    """Some step."""
    bench.desk.apply(Change("Rename", replace(bench.desk.session, name="other")))


def test_the_title_shows_unsaved_work(bench: Bench, tmp_path: Path) -> None:
    opened(bench)
    assert not bench.isWindowModified()
    rename(bench)
    assert bench.isWindowModified()
    assert bench.windowTitle().startswith("other[*]")

    bench.files.save_to(tmp_path / "work.json")

    assert not bench.isWindowModified()
    assert tmp_path / "work.json" == bench.files.recent()[0]


def test_how_things_are_looked_at_is_no_unsaved_work(bench: Bench) -> None:
    opened(bench)
    bench.actions_table.by_name["magnitudes"].trigger()

    assert bench.desk.session.view["magnitudes"] is True
    assert not bench.desk.unsaved
    assert bench.desk.history.undo_label is None


def test_what_is_saved_opens_again(bench: Bench, tmp_path: Path) -> None:
    opened(bench)
    rename(bench)
    bench.files.save_to(tmp_path / "work.json")

    bench.open_paths([str(tmp_path / "work.json")])

    assert bench.desk.session.name == "other"
    assert bench.desk.session.photometry is not None


def test_a_session_of_the_command_has_markers_to_pull(
    bench: Bench, session: Session, tmp_path: Path
) -> None:
    """The command keeps the contacts it measured, and knows no markers."""
    opened(bench)
    solved = replace(bench.desk.session, contact=session.contact, markers=None)
    bench.desk.begin(solved, bench.desk.path)
    bench.files.save_to(tmp_path / "session.json")
    bench.open_paths([str(tmp_path / "session.json")])

    markers, contact = bench.desk.session.markers, session.contact
    assert markers is not None
    assert contact is not None
    assert markers.primary == pytest.approx(contact.primary.contacts)
    assert not bench.desk.unsaved


def test_closing_asks_and_cancel_keeps_the_window(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened(bench)
    rename(bench)
    asked = answer(monkeypatch, ANSWER.Cancel)

    assert not bench.close()
    assert bench.isVisible()
    assert asked == ["Save the changes of other?"]
    answer(monkeypatch, ANSWER.Discard)
    assert bench.close()


def test_a_place_that_cannot_be_written_is_told_and_nothing_is_lost(
    bench: Bench, told: list, tmp_path: Path
) -> None:
    opened(bench)
    rename(bench)
    (tmp_path / "folder.json").mkdir()

    bench.files.save_to(tmp_path / "folder.json")

    assert "folder.json" in told[0].sentence
    assert bench.desk.unsaved
    told.clear()


@pytest.fixture
def left_behind(bench: Bench) -> Path:
    """The journal of a window that is gone, with work under another name."""
    opened(bench)
    rename(bench)
    journal_folder().mkdir(parents=True, exist_ok=True)
    journal = Journal(journal_folder())
    journal.write(bench.desk.session)
    text = journal.file.read_text(encoding="utf-8")
    journal.file.write_text(text.replace('"pid": ', '"pid": 99'), encoding="utf-8")
    bench.desk.begin(bench.desk.session)
    return journal.file


def test_work_of_a_window_that_is_gone_is_offered_and_opens(
    bench: Bench, left_behind: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked = answer(monkeypatch, ANSWER.Open)

    bench.journals.offer_recovery()

    assert len(asked) == 1
    assert "other" in asked[0]
    assert bench.desk.session.name == "other"
    assert bench.desk.unsaved
    assert not left_behind.exists()
    assert len(list(journal_folder().glob("*"))) == 1  # it has a journal of its own already


@pytest.mark.parametrize(("button", "stays"), [(ANSWER.Discard, False), (ANSWER.Cancel, True)])
def test_work_left_behind_is_discarded_only_when_asked(
    bench: Bench,
    left_behind: Path,
    monkeypatch: pytest.MonkeyPatch,
    button: QMessageBox.StandardButton,
    stays: bool,
) -> None:
    answer(monkeypatch, button)

    bench.journals.offer_recovery()

    assert left_behind.exists() is stays


def test_the_journal_is_written_only_where_there_is_something_to_lose(bench: Bench) -> None:
    opened(bench)
    bench.journals.write()
    before = set(journal_folder().glob("*"))
    rename(bench)

    bench.journals.write()

    assert len(set(journal_folder().glob("*")) - before) == 1
    bench.journals.end()
    assert before == set(journal_folder().glob("*"))


def test_export_writes_the_sheet_and_asks_before_it_replaces(
    bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    without_report = partial(jobs_results.write_results, report=False)  # it has tests of its own
    monkeypatch.setattr(jobs_results, "write_results", without_report)
    bench.work.export(agreed_target(bench, bench.desk.session, tmp_path))
    assert bench.long_lane.wait_until_idle()
    written = {path.name for path in tmp_path.iterdir()}
    assert {"sheet.json", "sheet.csv", "sheet.tex", "light_curve.csv", "session.json"} <= written
    assert "files written" in bench.status.words.text()
    asked = answer(monkeypatch, ANSWER.No)

    again = agreed_target(bench, bench.desk.session, tmp_path)

    assert again is None
    assert "sheet.json" in asked[0]


def test_a_folder_is_proposed_for_the_sheet(
    bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened(bench)
    bench.files.save_to(tmp_path / "work.json")
    shown: list[str] = []

    def accept(dialog: ExportDialog) -> int:
        shown.append(dialog.folder.text())
        dialog.folder.setText("")
        assert not dialog.export.isEnabled()
        dialog.folder.setText(str(tmp_path / "not there yet"))
        return 1

    monkeypatch.setattr(ExportDialog, "exec", accept)
    target = bench.files.ask_export()

    assert Path(shown[0]).parent == tmp_path
    assert shown[0].endswith("_sheet")
    assert target == Target(tmp_path / "not there yet", replace=False)


def test_a_sample_is_never_written_over(
    bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened(bench)
    rename(bench)
    before = samples()[0][2].read_bytes()
    target = str(tmp_path / "mine.json")
    dialog = staticmethod(lambda *_: (target, ""))
    monkeypatch.setattr(figure.QFileDialog, "getSaveFileName", dialog)

    bench.actions_table.by_name["save"].trigger()

    assert Path(target) == bench.desk.path
    assert samples()[0][2].read_bytes() == before


@pytest.mark.parametrize("kind", KINDS)
def test_any_picture_can_be_saved(bench: Bench, tmp_path: Path, kind: str) -> None:
    heads = {"png": b"\x89PNG", "svg": b"<?xml", "pdf": b"%PDF"}
    picture = bench.panes["Folded curve"].pair.curve

    save_figure(picture, tmp_path / f"figure.{kind}")

    content = (tmp_path / f"figure.{kind}").read_bytes()
    assert content.startswith(heads[kind])
    assert len(content) > 3000


def test_every_pane_can_be_saved(bench: Bench, tmp_path: Path) -> None:
    for name in FIGURE_PANES:
        bench.bring(name)
        save_figure(bench.panes[name], tmp_path / f"{name}.svg")
        assert (tmp_path / f"{name}.svg").stat().st_size > 1000, name


def test_a_figure_that_fails_leaves_the_old_file(
    bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    there = tmp_path / "figure.pdf"
    there.write_bytes(b"the old one")

    def broken(*_: object, **__: object) -> None:
        raise RuntimeError("the painter broke")

    monkeypatch.setattr(figure, "_draw", broken)
    with pytest.raises(RuntimeError, match="the painter broke"):
        save_figure(bench.panes["To scale"].sky, there)

    assert there.read_bytes() == b"the old one"
    assert [each.name for each in tmp_path.glob("*figure*")] == ["figure.pdf"]


def test_a_figure_that_cannot_be_written_is_told(
    bench: Bench, told: list, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    target = tmp_path / "notes" / "figure.pdf"
    target.parent.write_text("a file, not a folder")
    monkeypatch.setattr(
        figure.QFileDialog, "getSaveFileName", staticmethod(lambda *_: (str(target), ""))
    )

    figure.ask_and_save(bench.panes["To scale"].sky)

    assert [each.doing for each in told] == ["saving figure.pdf"]
    told.clear()


def test_another_ending_is_refused_in_words(bench: Bench, tmp_path: Path) -> None:
    with pytest.raises(
        ValueError, match=r"expected a file ending in \.png, \.svg or \.pdf, found 'figure\.bmp'"
    ):
        save_figure(bench.panes["To scale"].sky, tmp_path / "figure.bmp")


def test_a_packed_session_is_unpacked_beside_itself(
    bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened(bench)
    rename(bench)
    target = str(tmp_path / "to send")
    dialog = staticmethod(lambda *_: (target, ""))
    monkeypatch.setattr(figure.QFileDialog, "getSaveFileName", dialog)

    bench.actions_table.by_name["pack"].trigger()
    assert "to send.zip" in bench.status.words.text()
    bench.desk.begin(bench.desk.session)
    bench.open_paths([str(tmp_path / "to send.zip")])

    assert tmp_path / "to send" / "session.json" == bench.desk.path
    assert bench.desk.session.name == "other"
    sources = bench.desk.session.photometry_sources
    assert [Path(each.path).parent for each in sources] == [tmp_path / "to send" / "data"]
    assert "Unpacked" in bench.status.words.text()


def test_another_zip_file_is_refused_in_words(bench: Bench, told: list, tmp_path: Path) -> None:
    before = bench.desk.session
    (tmp_path / "holiday.zip").write_bytes(b"PK no")

    bench.open_paths([str(tmp_path / "holiday.zip")])

    assert "a session packed by shadowscale" in told[0].sentence
    assert bench.desk.session is before
    told.clear()


def test_points_of_a_saved_drawing_are_fine_enough_for_print(bench: Bench, tmp_path: Path) -> None:
    picture = bench.panes["Folded curve"].pair.curve
    save_figure(picture, tmp_path / "figure.svg")

    text = (tmp_path / "figure.svg").read_text(encoding="utf-8")
    found = re.findall(r'<image [^>]*?width="(\d+)"[^>]*?base64,([^"]+)"', text)
    images = [(int(width), QImage.fromData(base64.b64decode(data))) for width, data in found]
    shown, image = max(images, key=lambda each: each[1].width())

    assert image.width() >= 3 * shown - 3


def test_lines_of_a_saved_picture_are_as_thick_as_on_the_screen(
    bench: Bench, tmp_path: Path
) -> None:
    """Measured on the zero line of the residuals, which is alone in its colour there."""
    pair = bench.panes["Folded curve"].pair
    pair.rest_points.setVisible(False)
    QApplication.processEvents()
    before = {line: line.pen.widthF() for line in pair.curve.lines.values()}

    save_figure(pair.rest, tmp_path / "rest.png")

    pair.rest_points.setVisible(True)
    image = QImage(str(tmp_path / "rest.png"))
    tint = QColor(theme.colours().model)
    middle = image.width() // 2
    column = [image.pixelColor(middle, y) for y in range(image.height())]
    thick = sum(_near(each, tint) for each in column)
    assert thick >= 3  # 1.2 of the screen's pixels
    assert before == {line: line.pen.widthF() for line in pair.curve.lines.values()}


def _near(one: QColor, other: QColor) -> bool:
    return max(abs(a - b) for a, b in zip(one.getRgb(), other.getRgb(), strict=True)) < 60
