"""The loop of a drag: marker moves, contact solution at once, then the full solution, live."""

from __future__ import annotations

from dataclasses import dataclass, replace

from PySide6.QtCore import QObject, QTimer, Signal

from shadowscale.fit.plan import Plan
from shadowscale.progress import Progress
from shadowscale.session.session import Session
from shadowscale.view.contacts import with_contact_solution
from shadowscale.view.follow import Origin, can_follow, follow, origin_of
from shadowscale.view.wishes import asks_for_solution, for_refit
from shadowscale_app import trouble
from shadowscale_app.desk import Desk
from shadowscale_app.jobs import Answer, LiveLane, Work

THROTTLE_MS = 60  # before the whole solver is asked: the hand may not be done yet


@dataclass(frozen=True, eq=False)
class Request:
    """A fit that was asked for; a quick one starts from the solution and is not stopped by newer ones."""

    session: Session
    quick: bool


class Live(QObject):
    """Watches the desk. Signal `told(words)`.

    While a solution is there for the same model it is followed, which takes a tenth of a second: what is
    asked for meanwhile waits, so that the picture keeps up with the hand. Otherwise the whole solver runs,
    and a newer request stops it.
    """

    told = Signal(str)

    def __init__(self, desk: Desk, lane: LiveLane, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.following = True
        self._desk, self._lane = desk, lane
        self._before = desk.session
        self._origin = origin_of(desk.session)
        self._asked: Request | None = None
        self._again = False
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(self._submit)
        desk.complete = self._with_geometry
        lane.answered.connect(self._answered)
        desk.changed.connect(self._changed)

    def ask(self) -> None:
        """Ask for a full solution of the present session."""
        if not self._timer.isActive():
            quick = can_follow(self._desk.session, self._origin)
            self._timer.start(0 if quick else THROTTLE_MS)

    def wait_until_idle(self) -> bool:
        """For tests: let everything that was asked for arrive."""
        while True:
            if self._timer.isActive():
                self._timer.stop()
                self._submit()
            if not self._lane.wait_until_idle():
                return False
            if not self._timer.isActive():
                return True

    def forget(self) -> None:
        """Nothing that was asked for is wanted any more."""
        self._timer.stop()
        self._lane.drop()
        self._asked, self._again = None, False

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
        if session.solution is not self._origin.solution:
            self._origin = origin_of(session)
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
        session, origin = self._desk.session, self._origin
        if session.photometry is None:
            return
        if self._asked is not None and self._asked.quick:
            self._again = True
            return
        self._asked = Request(session, can_follow(session, origin))
        self._lane.submit(_following(session, origin) if self._asked.quick else _solving(session))

    def _answered(self, answer: Answer) -> None:
        asked, self._asked = self._asked, None
        again, self._again = self._again, False
        if answer.error is not None:
            self.told.emit(str(trouble.trouble_of("fitting", answer.error).sentence))
        elif asked is not None and (not again or asked.session.plan is self._desk.session.plan):
            assert isinstance(answer.result, Session)
            found = answer.result
            self._origin = Origin(found.solution, asked.session.plan, asked.session.markers)
            self._desk.settle(with_results(self._desk.session, found))
        if again:
            self.ask()


def _following(session: Session, origin: Origin) -> Work:
    return lambda _: follow(session, origin)


def _solving(session: Session) -> Work:
    ready = for_refit(session)

    def work(progress: Progress) -> Session:
        from shadowscale.jobs.solve import solve_session

        return solve_session(ready, progress=progress)

    return work


def with_results(session: Session, found: Session, *, plan: Plan | None = None) -> Session:
    """The session with another's solution; its own markers, contacts and wishes stay.

    With `plan` that is what the session keeps, so that doing it again gives the same solution.
    """
    return replace(
        session,
        plan=plan or session.plan,
        system=found.system,
        solution=found.solution,
        audit=found.audit,
        versions=found.versions,
        markers=session.markers or found.markers,
        contact=session.contact if session.markers is not None else found.contact,
    )
