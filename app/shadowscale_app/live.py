"""The loop of a drag: marker moves, contact solution at once, then the full solution, live."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import QObject, QTimer, Signal

from shadowscale.progress import Progress
from shadowscale.session.session import Session
from shadowscale.view.contacts import with_contact_solution
from shadowscale.view.wishes import asks_for_solution, for_refit
from shadowscale_app import trouble
from shadowscale_app.desk import Desk
from shadowscale_app.jobs import Answer, LiveLane

THROTTLE_MS = 60  # between two requests while something is being dragged


class Live(QObject):
    """Watches the desk. Signal `told(words)`."""

    told = Signal(str)

    def __init__(self, desk: Desk, lane: LiveLane, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.following = True
        self._desk, self._lane = desk, lane
        self._before = desk.session
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setInterval(THROTTLE_MS)
        self._timer.timeout.connect(self._submit)
        desk.complete = self._with_geometry
        lane.answered.connect(self._answered)
        desk.changed.connect(self._changed)

    def ask(self) -> None:
        """Ask for a full solution of the present session."""
        if not self._timer.isActive():
            self._timer.start()

    def wait_until_idle(self) -> bool:
        """For tests: let everything that was asked for arrive."""
        if self._timer.isActive():
            self._timer.stop()
            self._submit()
        return self._lane.wait_until_idle()

    def forget(self) -> None:
        """Nothing that was asked for is wanted any more."""
        self._timer.stop()
        self._lane.drop()

    def _with_geometry(self, before: Session, after: Session) -> Session:
        """A step that moved markers brings its contact solution along."""
        same = after.markers is before.markers or after.contact is not before.contact
        if after.markers is None or same:
            return after
        try:
            return with_contact_solution(after)
        except ValueError as problem:  # the markers are no pair of eclipses
            self.told.emit(str(problem))
            return replace(after, contact=None)

    def _changed(self, session: Session, names: frozenset[str]) -> None:
        before, self._before = self._before, session
        if "name" in names and "photometry" in names:  # another piece of work
            self.forget()
            return
        if self._desk.travelling:  # a state that was left and is taken up again has its solution
            self.forget()
            return
        solved = session.solution is not None and before.solution is session.solution
        if self.following and solved and asks_for_solution(before, session):
            self.ask()

    def _submit(self) -> None:
        if self._desk.session.photometry is None:
            return
        session = for_refit(self._desk.session)

        def work(progress: Progress) -> Session:
            from shadowscale.jobs.solve import solve_session

            return solve_session(session, progress=progress)

        self._lane.submit(work)

    def _answered(self, answer: Answer) -> None:
        if answer.error is not None:
            self.told.emit(str(trouble.trouble_of("fitting", answer.error).sentence))
            return
        assert isinstance(answer.result, Session)
        self._desk.settle(with_results(self._desk.session, answer.result))


def with_results(session: Session, found: Session) -> Session:
    """The session with another's solution; its own markers, contacts and wishes stay."""
    return replace(
        session,
        system=found.system,
        solution=found.solution,
        audit=found.audit,
        markers=session.markers or found.markers,
        contact=session.contact if session.markers is not None else found.contact,
    )
