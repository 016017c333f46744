"""The whole way with the real engine: a sample, one click, masses and radii near the truth."""

from __future__ import annotations

import json

from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QPushButton

from shadowscale.session.session import Session
from shadowscale_app.bench import Bench
from shadowscale_app.samples import samples


def test_one_click_from_a_sample_to_both_stars(bench: Bench) -> None:
    title, _, path = samples()[0]
    truth = json.loads((path.parent / "truth.json").read_text(encoding="utf-8"))
    bench.desk.begin(Session())
    sample = next(b for b in bench.start.findChildren(QPushButton) if b.accessibleName() == title)

    QTest.mouseClick(sample, Qt.MouseButton.LeftButton)
    assert bench.long_lane.wait_until_idle()

    estimates = bench.desk.session.solution.estimates
    for name in ("M1", "M2", "R1", "R2"):
        assert abs(estimates[name].value - truth["values"][name]) < 5 * estimates[name].plus, name
    assert bench.desk.session.markers is not None
    assert bench.panes["Eclipses"].pairs["primary"].curve.lines
    assert bench.panes["To scale"].sky.scene is not None
