"""Files dropped by mouse from another program on the real window, under a virtual display."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from commands import shadowscale
from real_hand import MISSING, Hand, hand_before_a_display
from shadowscale_app.samples import samples

pytestmark = [
    pytest.mark.long,
    pytest.mark.skipif(bool(MISSING), reason=f"needs {' and '.join(MISSING)}"),
]


@pytest.fixture
def hand(tmp_path: Path) -> Iterator[Hand]:
    """A hand before the empty window."""
    with hand_before_a_display(tmp_path) as found:
        found.start()
        yield found


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A sample's files in a folder of one's own."""
    return Path(shutil.copytree(samples()[0][2].parent, tmp_path / "data"))


def dialog(part: str) -> Any:
    return lambda seen: part in seen["dialog"] and seen["answers"]


def test_one_table_is_shown_before_it_is_used(hand: Hand, folder: Path) -> None:
    hand.drop(folder / "photometry.csv")

    shown = hand.until(dialog("Read photometry from photometry.csv"))
    assert shown["rows"] == [0, 0]
    hand.click(shown["answers"]["Open"])

    assert hand.until(lambda seen: seen["rows"][0])["name"] == "photometry"


def test_light_and_velocities_are_dropped_together(hand: Hand, folder: Path) -> None:
    hand.drop(folder / "velocities.csv", folder / "photometry.csv")

    hand.click(hand.until(dialog("Read photometry"))["answers"]["Open"])
    hand.click(hand.until(dialog("Read velocities"))["answers"]["Open"])

    assert all(hand.until(lambda seen: seen["rows"][1])["rows"])


def test_a_session_opens_without_a_question(hand: Hand, folder: Path) -> None:
    hand.drop(folder / "session.json")

    seen = hand.until(lambda seen: all(seen["rows"]))
    assert seen["dialog"] == ""
    assert not seen["unsaved"]


def test_a_bad_file_says_what_the_command_says(hand: Hand, folder: Path) -> None:
    hand.drop(folder / "session.json")
    before = hand.until(lambda seen: all(seen["rows"]))
    bad = folder / "night.csv"
    bad.write_text("To whom it may concern:\nthe weather was bad.\n", encoding="utf-8")
    said = shadowscale("solve", bad, "--out", folder / "out")
    assert said.status == 3

    hand.drop(bad)

    shown = hand.until(lambda seen: seen["explained"])
    sentence = shown["explained"].split("\n\n")[0]
    assert sentence.startswith(str(bad))
    assert sentence in said.err
    hand.click(shown["answers"]["Copy"])
    copied = hand.until(lambda seen: sentence in seen["clipboard"])
    assert copied["explained"]  # it still stands there
    hand.click(copied["answers"]["OK"])
    after = hand.until(lambda seen: not seen["explained"])
    assert {k: after[k] for k in ("name", "rows", "unsaved", "first_contact", "radius_sum")} == {
        k: before[k] for k in ("name", "rows", "unsaved", "first_contact", "radius_sum")
    }
