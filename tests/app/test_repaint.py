"""Many repaints, pans and drags: nothing may leak, and the cost of a marker must not grow with the points."""

from __future__ import annotations

import gc
import sys
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtWidgets import QApplication

from made_up import made_up_photometry, made_up_session, made_up_solution
from shadowscale.view.markers import moved
from shadowscale_app.bench import Bench
from shadowscale_app.desk import Change
from shadowscale_app.plots.points import MOST_POINTS


@pytest.fixture
def bench(shared: Bench) -> Bench:
    """These tests leave the window as it was."""
    return shared


ROUNDS = 100


def test_repaints_take_no_references_to_none(bench: Bench) -> None:
    """PySide6 6.12.0 on Python 3.11 lost some on every repaint until the interpreter aborted (measured)."""
    picture = bench.panes["Eclipses"].pairs["primary"].curve
    for _ in range(20):  # fill what caches there are
        picture.box.translateBy(x=1e-4)
        QApplication.processEvents()
    gc.collect()
    before = sys.getrefcount(None)

    for number in range(ROUNDS):
        picture.box.translateBy(x=(-1) ** number * 1e-3)
        session = bench.desk.session
        markers = moved(session.markers, "primary.0", session.markers.primary[0] - 1e-6)
        bench.desk.apply(Change("Move", replace(session, markers=markers), "test"))
        picture.viewport().repaint()

    gc.collect()
    assert sys.getrefcount(None) > before - ROUNDS


def test_points_are_painted_once_while_only_a_marker_moves(
    bench: Bench, monkeypatch: pytest.MonkeyPatch
) -> None:
    pair = bench.panes["Eclipses"].pairs["primary"]
    QApplication.processEvents()
    made: list[int] = []
    plain = pair.points._pixmap
    monkeypatch.setattr(pair.points, "_pixmap", lambda *args: made.append(1) or plain(*args))

    for _ in range(10):
        session = bench.desk.session
        markers = moved(session.markers, "primary.0", session.markers.primary[0] - 1e-5)
        bench.desk.apply(Change("Move", replace(session, markers=markers), "test"))
        pair.curve.viewport().repaint()

    assert made == []


@pytest.mark.parametrize(("pixels", "repaints"), [(0.1, 0), (3.0, 1)])
def test_points_are_painted_anew_once_they_are_seen_to_move(
    bench: Bench, monkeypatch: pytest.MonkeyPatch, pixels: float, repaints: int
) -> None:
    pair = bench.panes["Eclipses"].pairs["primary"]
    pair.curve.viewport().repaint()
    made: list[int] = []
    plain = pair.points._pixmap
    monkeypatch.setattr(pair.points, "_pixmap", lambda *args: made.append(1) or plain(*args))
    _, high = pair.points.pixelVectors()
    up = pixels * abs(high.y())

    pair.points.show_layers(tuple(replace(each, y=each.y + up) for each in pair.points.layers))
    pair.curve.viewport().repaint()

    assert len(made) == repaints


def test_very_many_points_become_a_density_and_single_points_again(bench: Bench) -> None:
    photometry = made_up_photometry(nights=40, points=800)
    assert photometry.time.size > MOST_POINTS
    session = replace(
        made_up_session(), photometry=photometry, solution=made_up_solution(photometry)
    )
    bench.desk.begin(session)
    pair = bench.panes["Folded curve"].pair
    QApplication.processEvents()
    assert pair.points.as_density

    pair.curve.setXRange(0.0, 0.02, padding=0)
    QApplication.processEvents()

    assert not pair.points.as_density


def test_the_density_picture_shows_where_the_points_are(bench: Bench) -> None:
    photometry = made_up_photometry(nights=40, points=800)
    session = replace(
        made_up_session(), photometry=photometry, solution=made_up_solution(photometry)
    )
    bench.desk.begin(session)
    curve = bench.panes["Folded curve"].pair.curve
    QApplication.processEvents()

    image = curve.grab().toImage()

    def darkness(phase: float, light: float) -> float:
        place = curve.place_of(phase, light).toPoint()
        shades = [
            image.pixelColor(place.x() + x, place.y() + y).lightness()
            for x in (-2, 0, 2)
            for y in (-1, 0, 1)
        ]
        return 255.0 - float(np.mean(shades))

    assert darkness(0.25, 1.0) > 5 * darkness(0.25, 0.8)
