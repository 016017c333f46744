"""The program in a real window under a virtual display, driven from outside by mouse and keys."""

from __future__ import annotations

import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from real_hand import MISSING, PATIENCE, Hand, hand_before_a_display
from shadowscale_app.samples import samples

pytestmark = [
    pytest.mark.long,
    pytest.mark.skipif(bool(MISSING), reason=f"needs {' and '.join(MISSING)}"),
]


@pytest.fixture
def hand(tmp_path: Path) -> Iterator[Hand]:
    """A hand before a new virtual display."""
    with hand_before_a_display(tmp_path) as found:
        yield found


def solved(seen: dict[str, Any]) -> bool:
    return bool(seen["solved"]) and not seen["busy"] and bool(seen["markers"])


def test_a_drag_in_a_real_window_is_followed_and_survives_a_kill(hand: Hand) -> None:
    title = samples()[0][0]
    hand.start()
    hand.click(hand.seen()["samples"][title])
    first = hand.until(solved)

    hand.drag(first["markers"]["primary.0"], -14)

    moved = hand.until(lambda seen: solved(seen) and seen["followed"])
    assert moved["first_contact"] < first["first_contact"]
    assert moved["radius_sum"] > first["radius_sum"] + 0.002
    assert moved["words"] != first["words"]
    assert moved["unsaved"]
    journals = hand.told.parent / "home" / "Shadowscale" / "Shadowscale" / "journal"
    end = time.monotonic() + PATIENCE
    while str(moved["first_contact"]) not in _texts(journals):
        assert time.monotonic() < end, list(journals.glob("*"))
        time.sleep(0.1)

    hand.kill()
    hand.start()
    asked = hand.until(lambda seen: seen["asked"])
    assert "ended unexpectedly" in asked["asked"]
    hand.click(asked["answers"]["Open"])

    again = hand.until(solved)
    assert again["first_contact"] == moved["first_contact"]
    assert again["radius_sum"] == moved["radius_sum"]


def test_keys_move_a_marker_in_a_real_window(hand: Hand) -> None:
    hand.start()
    hand.click(hand.seen()["samples"][samples()[0][0]])
    first = hand.until(solved)

    hand.click(first["markers"]["primary.0"])
    time.sleep(0.3)
    hand.do("key", "Left")
    hand.do("key", "shift+Left")

    def there(seen: dict[str, Any]) -> bool:
        step = first["first_contact"] - seen["first_contact"]
        return abs(step - 11 * 5e-4) < 1e-9  # one step and a coarse one of ten

    hand.until(there)


def _texts(folder: Path) -> str:
    return "".join(path.read_text(encoding="utf-8") for path in folder.glob("*.json"))
