"""How soon the desktop follows a hand: from a move of the mouse to what is painted of it."""

from __future__ import annotations

import os
import statistics
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from tempfile import TemporaryDirectory
from time import perf_counter, process_time, sleep
from typing import TYPE_CHECKING, NamedTuple

from timing import Timed

from shadowscale.fit.plan import Plan
from shadowscale.jobs.simulate import simulate, write_simulation
from shadowscale.jobs.solve import solve_session
from shadowscale.jobs.spec import (
    BandSpec,
    Noise,
    PhotometrySpec,
    Run,
    Spec,
    VelocitySource,
    VelocitySpec,
)
from shadowscale.session.session import Session, Source
from shadowscale.session.tables import with_tables
from shadowscale.view.contacts import with_start_markers

if TYPE_CHECKING:
    from PySide6.QtCore import QPoint

    from shadowscale_app.bench import Bench
    from shadowscale_app.plots.marked import MarkedPicture

NIGHTS, QUICK_NIGHTS = 40, 4
HOURS, CADENCE = 10.0, 72.0  # 500 points a night
MOVES, QUICK_MOVES = 25, 3
START = 12  # pixels until a press is surely a drag
BETWEEN = 0.03  # [s] moves that come faster are passed over by the plots
LONGEST_MS = 20_000  # for a fit to arrive
EPOCH = 2459000.3127
SYSTEM = {
    "period": 2.4371926, "epoch": EPOCH, "r1": 0.151, "r2": 0.118, "inclination": 88.2,
    "ecosw": 0.0, "esinw": 0.0, "K1": 98.4, "K2": 112.9, "gamma1": -14.2, "gamma2": -14.2,
}  # fmt: skip


class Span(NamedTuple):
    """Seconds by the clock, and of the processor."""

    took: float
    busy: float

    @classmethod
    def now(cls) -> Span:
        """Both clocks."""
        return cls(perf_counter(), process_time())

    def __sub__(self, other: Span) -> Span:
        return Span(self.took - other.took, self.busy - other.busy)


def desktop_results(*, quick: bool) -> list[Timed]:
    """From a move of the mouse to the painted contact solution, and to the painted fit.

    By the clock, and in processor time of the whole process: all that a busy machine cannot spoil.
    """
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    with TemporaryDirectory() as folder:
        session = _solved(Path(folder), QUICK_NIGHTS if quick else NIGHTS)
        with _bench(session) as bench:
            moves = _moved(bench, QUICK_MOVES if quick else MOVES)
    assert session.photometry is not None
    size = f"{session.photometry.time.size} points"
    contact, fit = zip(*moves[1:], strict=True)
    return [
        _told("drag: contact solution painted", size, contact, "60 ms"),
        _told("drag: whole fit painted", size, fit, "150 ms"),
    ]


def _told(name: str, size: str, spans: Sequence[Span], wanted: str) -> Timed:
    busy = statistics.median(span.busy for span in spans)
    checked = f"computing {1e3 * busy:.0f} ms; wanted {wanted}"
    return Timed(name, size, "", None, True, checked, tuple(span.took for span in spans))


def _moved(bench: Bench, moves: int) -> list[tuple[Span, Span]]:
    """The first contact of primary eclipse pulled outwards, a pixel a move."""
    from PySide6.QtCore import Qt
    from PySide6.QtTest import QTest
    from PySide6.QtWidgets import QApplication

    pair = bench.panes["Eclipses"].pairs["primary"]  # type: ignore[attr-defined]
    picture: MarkedPicture = pair.curve
    phase = picture.lines["primary.0"].value()
    view = picture.visible()
    place = picture.place_of(phase, view.top() + 0.3 * view.height()).toPoint()
    QTest.mouseMove(picture.viewport(), place)
    QApplication.processEvents()
    QTest.mousePress(picture.viewport(), Qt.MouseButton.LeftButton, pos=place)
    for _ in range(START):
        _step(picture, place)
        QApplication.processEvents()
    bench.live.wait_until_idle()
    return [_timed_move(bench, picture, place) for _ in range(moves)]


def _timed_move(bench: Bench, picture: MarkedPicture, place: QPoint) -> tuple[Span, Span]:
    """One move: to the painted contact solution, and to the painted fit."""
    before = bench.desk.session
    sleep(BETWEEN)
    start = Span.now()
    _step(picture, place)
    picture.viewport().repaint()
    shown = Span.now() - start
    if bench.desk.session.contact is before.contact:
        raise RuntimeError("the marker did not follow the mouse")
    _wait_for_fit(bench, before)
    picture.viewport().repaint()
    followed = Span.now() - start
    bench.live.wait_until_idle()
    return shown, followed


def _wait_for_fit(bench: Bench, before: Session) -> None:
    """Let the event loop sleep and wake as it does under a hand, until another solution is there."""
    from PySide6.QtCore import QEventLoop, QTimer

    loop, late = QEventLoop(), QTimer()
    late.setSingleShot(True)
    late.timeout.connect(lambda: loop.exit(1))
    late.start(LONGEST_MS)

    def look() -> None:
        if bench.desk.session.solution is not before.solution:
            loop.exit(0)

    bench.desk.changed.connect(look)
    failed = loop.exec()
    bench.desk.changed.disconnect(look)
    if failed:
        raise RuntimeError("the fit did not follow the marker")


def _step(picture: MarkedPicture, place: QPoint) -> None:
    """A pixel to the left with the button held; QTest's own moves carry no buttons on every platform."""
    from PySide6.QtCore import QEvent, QPointF, Qt
    from PySide6.QtGui import QMouseEvent
    from PySide6.QtWidgets import QApplication

    place.setX(place.x() - 1)
    port, button = picture.viewport(), Qt.MouseButton
    event = QMouseEvent(
        QEvent.Type.MouseMove, QPointF(place), QPointF(port.mapToGlobal(place)), button.NoButton,
        button.LeftButton, Qt.KeyboardModifier.NoModifier,
    )  # fmt: skip
    QApplication.sendEvent(port, event)


@contextmanager
def _bench(session: Session) -> Iterator[Bench]:
    from PySide6.QtWidgets import QApplication

    from shadowscale_app import theme
    from shadowscale_app.bench import Bench
    from shadowscale_app.warm import READY

    application = QApplication.instance() or QApplication(["bench"])
    assert isinstance(application, QApplication)
    theme.dress(application)
    READY.reach()
    window = Bench()
    window.resize(1440, 900)
    window.desk.begin(session)
    window.show()
    application.processEvents()
    yield window
    window.end()
    window.hide()


def _solved(folder: Path, nights: int) -> Session:
    spec = Spec(
        system=SYSTEM,
        bands={"V": BandSpec(0.62, (0.62, 0.55), (0.68, 0.60))},
        photometry=PhotometrySpec(
            (Run(EPOCH - 0.2, HOURS, CADENCE, nights),), Noise(0.003), errors=True
        ),
        velocities=VelocitySpec(EPOCH, EPOCH + 60, (VelocitySource("north", 24),)),
        seed=1,
    )
    write_simulation(simulate(spec), folder)
    names = sorted(folder.glob("photometry*"))
    session = Session(
        name="invented pair",
        plan=Plan(period=SYSTEM["period"], epoch=EPOCH),
        photometry_sources=tuple(Source(str(name)) for name in names),
        velocity_sources=(Source(str(folder / "velocities.csv")),),
    )
    return with_start_markers(solve_session(with_tables(session)))
