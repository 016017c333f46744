"""Random actions in a row: nothing may raise, and undo must lead all the way back."""

from __future__ import annotations

import random

import pytest
from PySide6.QtWidgets import QApplication

from made_up import made_up_session
from shadowscale.view.markers import handles
from shadowscale.view.rows import FREE, HELD, WITH_PRIOR
from shadowscale_app.bench import Bench


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


SAFE = (
    "undo", "redo", "magnitudes", "hours", "binned", "show_contact", "show_window", "show_level", "show_excluded",
    "level", "excluded", "reset", "restore", "brush", "follow", "light", "dark",
)  # fmt: skip


def act(bench: Bench, dice: random.Random) -> str:
    """One random action; what it was."""
    session = bench.desk.session
    kind = dice.choice(("pull", "type", "state", "action", "action", "point", "keep", "tab"))
    if kind == "pull" and session.markers is not None:
        name = dice.choice([each.name for each in handles(session.markers)])
        picture = bench.panes["Folded curve"].pair.curve
        picture.pulled.emit(name, dice.uniform(-0.3, 0.8), dice.random() < 0.5, dice.randrange(4))
        return f"pull {name}"
    if kind in ("type", "state"):
        row = dice.choice([row for row in bench.panes["Quantities"].model.rows if row.basic])
        if kind == "type":
            bench.panes["Quantities"].set_value(row.key, row.value + dice.gauss(0, 5) * row.step)
        else:
            bench.panes["Quantities"].set_state(row.key, dice.choice((FREE, HELD, WITH_PRIOR)))
        return f"{kind} {row.key}"
    if kind == "action":
        name = dice.choice(SAFE)
        bench.actions_table.by_name[name].trigger()
        return name
    if kind == "point":
        bench.panes["Folded curve"].pointed.emit(dice.uniform(-0.25, 0.75))
    elif kind == "keep":
        bench.panes["Kept"].keep_as(f"number {dice.randrange(99)}")
    else:
        bench.bring(dice.choice(list(bench.panes)))
    return kind


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_nothing_breaks_and_undo_leads_back(bench: Bench, seed: int) -> None:
    print("seed", seed)
    bench.desk.begin(made_up_session(("V", "I")))
    start, dice = bench.desk.session, random.Random(seed)
    done = []

    for number in range(60):
        done.append(act(bench, dice))
        if number % 10 == 0:
            QApplication.processEvents()
        bench.live.following = False

    while bench.desk.history.undo_label is not None:
        bench.desk.undo()
    now = bench.desk.session
    for name in (
        "plan",
        "markers",
        "system",
        "solution",
        "contact",
        "kept",
        "photometry",
        "exclusions",
    ):
        assert getattr(start, name) is getattr(now, name), (name, done)
    bench.choose_scheme("")
