"""The main window: places the panes and connects them to the desk; nothing else."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from PySide6.QtCore import QByteArray, QSize, Qt, QTimer
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import (
    QApplication,
    QMainWindow,
)

from shadowscale.session.session import Session
from shadowscale.view.light_points import ephemeris
from shadowscale_app import theme, trouble
from shadowscale_app.actions import Actions, keys
from shadowscale_app.desk import ALL, Change, Desk
from shadowscale_app.dialogs.trouble import open_trouble
from shadowscale_app.files import Files, sample_sessions, settings
from shadowscale_app.jobs import LiveLane, LongLane
from shadowscale_app.journals import Journals
from shadowscale_app.live import Live
from shadowscale_app.opening import Opening
from shadowscale_app.panes import all_panes
from shadowscale_app.panes.kept import KeptPane
from shadowscale_app.panes.pairs import PairsPane
from shadowscale_app.panes.pane import Pane
from shadowscale_app.panes.periods import PeriodsPane
from shadowscale_app.panes.start import StartPane
from shadowscale_app.placing import place, tool_bar
from shadowscale_app.plots.figure import ask_and_save
from shadowscale_app.plots.picture import Picture
from shadowscale_app.points_desk import PointsDesk
from shadowscale_app.status import Status
from shadowscale_app.warm import READY, Warmer
from shadowscale_app.work import WorkDesk

GEOMETRY = "geometry"
NO_PERIOD = "No period yet: Solve finds it (F5), or search the period (F7)."


class Bench(QMainWindow):
    """The window."""

    desk: Desk  # named here for those who import this module only to check types
    files: Files
    opening: Opening
    live: Live
    work: WorkDesk
    points: PointsDesk
    brushing: bool
    phase: float

    def __init__(self, *, desk: Desk | None = None, immediate: bool = False) -> None:
        super().__init__()
        self.desk = desk or Desk(parent=self)
        self.lane, self.long_lane = LiveLane(self, immediate=immediate), LongLane(self)
        self.live = Live(self.desk, self.lane, self)
        self.work = WorkDesk(self.desk, self.long_lane, self)
        self.files = Files(self.desk, self, immediate=immediate)
        self.opening = Opening(self.desk, self.files)
        self.journals = Journals(self.desk, self.files.errands, self, immediate=immediate)
        self.points = PointsDesk(self.desk, self)
        self.warmer = Warmer(self)
        if immediate:
            READY.reach()
        self.panes: dict[str, Pane] = {pane.title: pane for pane in all_panes()}
        self.phase = 0.0
        self.brushing = False
        self.start = StartPane()
        self.status = Status(self)
        self.stack, self._tabs = place(self)
        self.actions_table = Actions(self)
        self.actions_table.fill_menus()
        self.actions_table.fill_bar(tool_bar(self))
        self._connect()
        self.panes["Help"].write(self.panes.values(), keys())  # type: ignore[attr-defined]
        self.setAcceptDrops(True)
        self.resize(self.screen().availableSize().boundedTo(QSize(1440, 860)))
        geometry = settings().value(GEOMETRY)
        if isinstance(geometry, QByteArray):
            self.restoreGeometry(geometry)
        self._changed(self.desk.session, ALL)

    @property
    def scheme(self) -> str:
        """The chosen colours; empty: as the system has them."""
        application = QApplication.instance()
        return str((application and application.property(theme.CHOICE)) or theme.FOLLOW)

    def choose_scheme(self, name: str) -> None:
        """Light, dark, or as the system."""
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        application.setProperty(theme.CHOICE, name)
        settings().setValue(theme.CHOICE, name)
        self.dress()

    def dress(self, *_: object) -> None:
        """Take the theme's colours everywhere."""
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        theme.dress(application)
        self._show(self.desk.session, ALL)

    def bring(self, title: str) -> None:
        """Bring a pane to the front."""
        pane = self.panes[title]
        for tabs in self._tabs:
            number = tabs.indexOf(pane)
            if number >= 0:
                tabs.setCurrentIndex(number)
        self.stack.setCurrentIndex(1)

    def toggle_brush(self) -> None:
        """Switch the brush on all pictures on or off."""
        self.brushing = not self.brushing
        for picture in self.pictures():
            picture.box.brushing = self.brushing
            picture.viewport().setCursor(
                Qt.CursorShape.CrossCursor if self.brushing else Qt.CursorShape.ArrowCursor
            )
        self.status.tell("Draw round points in a picture." if self.brushing else "")

    def toggle_follow(self) -> None:
        """Whether the fit follows changes by itself."""
        self.live.following = not self.live.following
        if not self.live.following:
            self.live.forget()

    def pictures(self) -> list[Picture]:
        """All plots."""
        return [picture for pane in self.panes.values() for picture in pane.findChildren(Picture)]

    def reset_views(self) -> None:
        """Show everything again, in every picture."""
        for picture in self.pictures():
            picture.reset_view()

    def save_figure(self) -> None:
        """Save the picture that has the keyboard, else the upper pane."""
        focused = QApplication.focusWidget()
        shown = focused if isinstance(focused, Picture) else self._tabs[0].currentWidget()
        ask_and_save(shown)

    def save_pane(self, title: str) -> None:
        """Save all that a pane draws."""
        self.bring(title)
        ask_and_save(self.panes[title])

    def open_paths(self, paths: Sequence[str]) -> None:
        """Open what the command line or a drop names."""
        with trouble.guard("opening " + ", ".join(Path(path).name for path in paths)):
            self.opening.open_paths([Path(path) for path in paths])

    def open_sample(self, path: str) -> None:
        """Open a sample and solve it, so that a newcomer sees a whole sheet at once."""
        with trouble.guard(f"opening {Path(path).name}"):
            self.opening.open_paths([Path(path)], self._solve_new)

    def _solve_again(self) -> None:
        if self.live.following:
            QTimer.singleShot(0, self, self.work.solve)  # once the answer is taken in full

    def _solve_new(self) -> None:
        session = self.desk.session
        if session.photometry is not None and session.solution is None:
            self.work.solve()

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Files may be dropped anywhere."""
        if _files_in(event):
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Open what was dropped."""
        paths = _files_in(event)
        event.acceptProposedAction()
        QTimer.singleShot(0, self, lambda: self.open_paths(paths))

    def closeEvent(self, event: QCloseEvent) -> None:
        """Ask about unsaved work, end the threads."""
        if not self.files.may_leave():
            event.ignore()
            return
        settings().setValue(GEOMETRY, self.saveGeometry())
        self.end()
        event.accept()

    def end(self) -> None:
        """End timers and threads."""
        self.files.errands.close()
        self.journals.end()
        self.live.forget()
        self.lane.close()
        self.long_lane.close()
        self.warmer.close()

    def _connect(self) -> None:
        self.desk.changed.connect(self._changed)
        for pane in self.panes.values():
            pane.wanted.connect(self._wanted)
            pane.let_go.connect(self._let_go)
            pane.looked.connect(self.desk.look)
            pane.told.connect(self.status.tell)
            pane.pointed.connect(self._pointed)
            pane.asked.connect(self._asked)
        for teller in (self.live, self.work, self.points, self.warmer, self.files, self.opening):
            teller.told.connect(self.status.tell)
        self.lane.busy.connect(self.status.show_live)
        self.files.errands.busy.connect(self.status.show_errand)
        self.long_lane.busy.connect(self.status.show_busy)
        self.long_lane.busy.connect(lambda _: self.actions_table.update(self.desk.session))
        self.work.solved.connect(lambda: self.bring("Folded curve"))
        self.work.outdated.connect(self._solve_again)
        self.work.searched.connect(self._searched)
        self.long_lane.progressed.connect(self.status.show_progress)
        self.status.stop_wanted.connect(self.work.stop)
        self.status.give_up_wanted.connect(self.files.errands.give_up)
        self.warmer.ready.connect(self._show_all)
        self.start.open_wanted.connect(trouble.guarded("opening", self.opening.ask_open))
        self.start.path_wanted.connect(lambda path: self.open_paths([path]))
        self.start.sample_wanted.connect(self.open_sample)
        trouble.bell().arose.connect(self._trouble)
        QApplication.styleHints().colorSchemeChanged.connect(self.dress)

    def _wanted(self, change: Change) -> None:
        self.status.tell("")  # what was said belongs to the step before
        self.desk.apply(change)

    def _asked(self, what: str, argument: Any) -> None:
        calls: dict[str, Callable[[], object]] = {
            "velocities": self.opening.ask_velocities,
            "search period": self.work.search_period,
            "solve": self.work.solve,
            "fold": lambda: self.work.fold(*argument),
            "brushed": lambda: self.points.brushed(argument),
            "pair": lambda: self._show_pair(argument),
            "prior": lambda: self.points.prior(argument),
            "compare": lambda: self.files.ask_compare(self.show_beside),
        }
        with trouble.guard(what):
            calls[what]()

    def _let_go(self) -> None:
        self.desk.close_gesture()

    def _pointed(self, phase: float) -> None:
        self.phase = phase
        for pane in self.panes.values():
            pane.point(phase)

    def _changed(self, session: Session, names: frozenset[str]) -> None:
        name = session.name if session.photometry is not None else "no data"
        self.setWindowTitle(f"{name}[*] \N{EM DASH} Shadowscale")
        self.setWindowModified(self.desk.unsaved)
        self._show(session, names)
        self.actions_table.update(session)
        self.status.show_session(session)
        if {"photometry", "name"} <= names and session.photometry is not None:
            folded = ephemeris(session) is not None
            self.bring("Folded curve" if folded else "Whole series")
            self.status.tell(" ".join(session.notes) or ("" if folded else NO_PERIOD))

    def _show(self, session: Session, names: frozenset[str]) -> None:
        self.stack.setCurrentIndex(
            1 if session.photometry is not None or session.velocities is not None else 0
        )
        if self.stack.currentIndex() == 0:
            self.start.offer(sample_sessions(), self.files.recent())
        for pane in self.panes.values():
            with trouble.guard(f"showing {pane.title.lower()}"):
                pane.display(session, names)

    def _show_pair(self, names: tuple[str, str]) -> None:
        pane = self.panes["Correlation"]
        assert isinstance(pane, PairsPane)
        self.bring("Correlation")
        pane.choose(*names)

    def show_beside(self, columns: tuple[Any, ...]) -> None:
        """Put solutions of another file beside the session's own."""
        pane = self.panes["Kept"]
        assert isinstance(pane, KeptPane)
        self.bring("Kept")
        pane.show_beside(columns)

    def _searched(self, found: object) -> None:
        pane = self.panes["Period"]
        assert isinstance(pane, PeriodsPane)
        pane.show_search(found)
        self.bring("Period")
        self.bring("Folded curve")

    def _show_all(self) -> None:
        self._show(self.desk.session, ALL)

    def _trouble(self, found: trouble.Trouble) -> None:
        open_trouble(found, self)


def _files_in(event: QDropEvent) -> list[str]:
    """The files of this machine that are dragged; links to elsewhere are none."""
    return [url.toLocalFile() for url in event.mimeData().urls() if url.isLocalFile()]
