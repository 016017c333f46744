"""The long jobs: solving, the period search, the search from many starts; with progress and stop."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING
from weakref import WeakKeyDictionary

from PySide6.QtCore import QObject, QTimer, Signal

from shadowscale.fit.solution import Solution
from shadowscale.progress import Progress
from shadowscale.session.session import Session
from shadowscale.view.follow import is_final
from shadowscale.view.light_points import ephemeris
from shadowscale.view.wishes import outdates
from shadowscale_app import trouble
from shadowscale_app.desk import Change, Desk
from shadowscale_app.jobs import Answer, LongLane
from shadowscale_app.live import with_results

LATE = "Solved as things stood when it was asked for; they have changed since."
CHOOSE = "The session keeps its period; fold with a found one in the Period pane."

if TYPE_CHECKING:
    from shadowscale_app.dialogs.exporting import Target


class WorkDesk(QObject):
    """Starts long jobs and takes their answers.

    Signals: `told(words)`, `solved()`, `searched(PeriodSearch)`; `outdated()` after a solution of what
    was there when it was asked for, where other things are wanted by now.
    """

    told = Signal(str)
    solved = Signal()
    searched = Signal(object)
    outdated = Signal()

    def __init__(self, desk: Desk, lane: LongLane, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk, self._lane = desk, lane
        self._take: Callable[[object], None] = lambda _: None
        self._doing = ""
        self._begun = desk.session
        self._outlives = False  # whether what runs goes on when another session is opened
        self._next: Callable[[], None] | None = None
        # what each solution was found with: only such a session is written as it stands
        self._found: WeakKeyDictionary[Solution, Session] = WeakKeyDictionary()
        desk.changed.connect(self._changed)
        lane.answered.connect(self._answered)
        lane.stopped.connect(lambda: self.told.emit("Stopped. The session is as it was."))
        lane.busy.connect(self._go_on)

    def _changed(self, session: Session, names: frozenset[str]) -> None:
        if {"photometry", "name"} <= names:  # another piece of work
            self._next = None
            if not self._outlives:
                self._lane.abandon()
        if session.solution is not None:
            self._found.setdefault(session.solution, session)

    @property
    def running(self) -> bool:
        """Whether a long job runs."""
        return self._lane.running

    def stop(self) -> None:
        """Stop what is running."""
        self._lane.stop()

    def solve(self) -> None:
        """Solve the present session."""
        session = self._desk.session

        def work(progress: Progress) -> object:
            from shadowscale.jobs.solve import solve_session

            return solve_session(session, progress=progress)

        self._start("solving", work, self._take_solution)

    def search_period(self) -> None:
        """Look for the period."""
        photometry = self._desk.session.photometry

        def work(progress: Progress) -> object:
            from shadowscale.timing.period import search_period

            assert photometry is not None
            return search_period(photometry, progress=progress, keep=True)

        self._start("searching the period", work, self._take_period)

    def search_starts(self) -> None:
        """Solve from many starts."""
        session = self._desk.session

        def work(progress: Progress) -> object:
            from shadowscale.view.starts import solve_from_many_starts

            return solve_from_many_starts(session, progress=progress)

        self._start("searching from many starts", work, self._take_search)

    def measure_contacts(self) -> None:
        """Measure the contacts anew from the points in the eclipse windows."""
        session = self._desk.session

        def work(progress: Progress) -> object:
            from shadowscale.view.contacts import with_measured_contacts

            progress.report(0.1, "measuring the contacts")
            return with_measured_contacts(session)

        self._start("measuring the contacts", work, self._take_contacts)

    def _take_contacts(self, found: object) -> None:
        assert isinstance(found, Session)
        session = self._desk.session
        measured = replace(session, markers=found.markers, contact=found.contact)
        self._desk.apply(Change("Measure contacts", measured))
        self.told.emit("Contacts measured from the points in the eclipse windows.")

    def _start(
        self,
        doing: str,
        work: Callable[[Progress], object],
        take: Callable[[object], None],
        *,
        outlives: bool = False,
    ) -> None:
        if self._lane.abandoned:  # it ends in a moment
            self._next = lambda: self._start(doing, work, take, outlives=outlives)
            return
        if self._lane.running:
            self.told.emit(f"Wait: {self._doing} is still going on, or stop it.")
            return
        self._doing, self._take, self._outlives = doing, take, outlives
        self._begun = self._desk.session
        self.told.emit("")
        self._lane.start(work)

    def _go_on(self, busy: bool) -> None:
        """What was asked for while something abandoned still ran begins, once all know that that ended."""
        if not busy and self._next is not None:
            begin, self._next = self._next, None
            QTimer.singleShot(0, self, begin)

    def _answered(self, answer: Answer) -> None:
        if answer.error is not None:
            trouble.tell(self._doing, answer.error)
            return
        with trouble.guard(self._doing):
            self._take(answer.result)

    def _take_solution(self, found: object) -> None:
        from shadowscale.view.contacts import with_start_markers

        assert isinstance(found, Session)
        assert found.solution is not None
        self._found[found.solution] = found
        late = outdates(self._begun, self._desk.session)
        session = with_start_markers(with_results(self._desk.session, found))
        self._desk.apply(Change("Solve", session))
        self._tell_solved(session)
        if late:
            self.told.emit(LATE)
            self.outdated.emit()

    def _take_search(self, found: object) -> None:
        assert isinstance(found, Session)
        session = with_results(self._desk.session, found, plan=found.plan)
        self._desk.apply(Change("Search from many starts", session))
        self._tell_solved(session, searched=True)

    def _tell_solved(self, session: Session, *, searched: bool = False) -> None:
        note = f": {session.solution.notes[-1]}" if searched and session.solution else ""
        self.told.emit(f"Solved{note}.")
        self.solved.emit()

    def export(self, target: Target | None) -> None:
        """Write the sheet and all that belongs to it."""
        if target is None:
            return
        session = self._desk.session
        solution = session.solution
        final = solution is not None and is_final(session, self._found.get(solution, session))

        def work(progress: Progress) -> object:
            from shadowscale.jobs.painters import painters
            from shadowscale.jobs.results import write_results
            from shadowscale.jobs.solve import Share, solve_session

            with painters() as drawing:  # another process draws: the window stays smooth
                # what was only followed is solved first: the sheet is what the command gives for the session
                ready = (
                    session if final else solve_session(session, progress=Share(progress, 0, 0.8))
                )
                progress.report(0.8, "writing the sheet, curves and figures")
                written = write_results(
                    ready, target.folder, overwrite=target.replace, painters=drawing
                )
            return ready, written

        self._start(
            f"exporting to {target.folder}",
            work,
            lambda found: self._take_written(found, session),
            outlives=True,
        )

    def fold(self, period: float, epoch: float) -> None:
        """Take a period and epoch to start from."""
        session = self._desk.session

        def work(progress: Progress) -> object:
            from shadowscale.view.contacts import with_ephemeris

            progress.report(0.1, "measuring the eclipses")
            return with_ephemeris(session, period, epoch)

        self._start("folding", work, self._take_fold)

    def _take_fold(self, found: object) -> None:
        assert isinstance(found, Session)
        plan = replace(self._desk.session.plan, period=found.plan.period, epoch=found.plan.epoch)
        folded = replace(
            self._desk.session,
            plan=plan,
            markers=found.markers,
            contact=found.contact,
            system=None,
            solution=None,
            audit=(),
        )
        self._desk.apply(Change("Fold anew", folded))

    def _take_written(self, answer: object, asked: Session) -> None:
        assert isinstance(answer, tuple)
        ready, found = answer
        same = self._desk.session.photometry_sources == asked.photometry_sources
        if same and ready.solution is not self._desk.session.solution:
            self._take_solution(ready)
        folders = {str(path.parent) for path in found}
        self.told.emit(f"{len(found)} files written to {min(folders, key=len)}.")

    def _take_period(self, found: object) -> None:
        from shadowscale.timing.results import PeriodSearch

        assert isinstance(found, PeriodSearch)
        self.searched.emit(found)
        words = f"{found.words[:1].upper()}{found.words[1:]}"
        if ephemeris(self._desk.session) is None:
            self.fold(found.period, found.epoch)
        else:  # what stands on another period is not thrown away unasked
            words += f". {CHOOSE}"
        self.told.emit(words)
