"""The whole job: tables, solution, audit."""

from __future__ import annotations

from dataclasses import dataclass, replace

from shadowscale.data.photometry import Photometry
from shadowscale.errors import NoSolutionError, NotDetachedError, UsageError
from shadowscale.judge.finding import PASS, Finding
from shadowscale.progress import SILENT, Progress
from shadowscale.session.session import Session
from shadowscale.session.spans import within
from shadowscale.session.tables import with_tables

IN_WINDOW = "in a window that the observer excluded"
NOT_FOR_LEVEL = "outside eclipse, and not in a stretch that the observer marked for the level"


@dataclass(frozen=True)
class Share:
    """A progress that is a part of a longer one."""

    whole: Progress
    start: float
    end: float

    def report(self, fraction: float, words: str) -> None:
        """Tell the longer one."""
        self.whole.report(self.start + (self.end - self.start) * fraction, words)


def solve_session(session: Session, *, progress: Progress = SILENT) -> Session:
    """The session with tables, solution and audit.

    Parameters
    ----------
    session : Session
        Its tables are read where they are missing.
    progress : Progress
        Told of each step; may raise `Stopped`.

    Raises
    ------
    InputError
        A file cannot be used.
    NoSolutionError
        There is none, or the audit forbids to report it.
    """
    from shadowscale.fit.solve import solve
    from shadowscale.judge.audit import audit

    progress.report(0.0, "reading")
    ready = session if session.photometry is not None else with_tables(session)
    photometry = tables_to_solve(ready)
    solution = solve(photometry, ready.velocities, ready.plan, progress=Share(progress, 0.05, 0.95))
    progress.report(0.95, "audit")
    findings = audit(solution, photometry, ready.velocities)
    refuse_fatal(findings)
    progress.report(1.0, "done")
    return replace(
        ready,
        system=solution.system,
        contact=solution.contact,
        solution=solution,
        audit=findings,
        versions={},
    )


def tables_to_solve(session: Session) -> Photometry:
    """The photometry of a session with the rows set aside that its markers leave out.

    Those are the excluded stretches; and, where stretches are marked for the level outside eclipse,
    every row that is neither in one of them nor in a window of an eclipse.
    """
    photometry, markers = session.photometry, session.markers
    if photometry is None:
        raise UsageError("INPUT", "no photometry", expected="at least one file of photometry")
    if markers is None or not (markers.excluded or markers.level):
        return photometry
    period, epoch = _ephemeris(session)
    if period is None or epoch is None:
        return photometry
    phase = (photometry.time - epoch) / period
    photometry = photometry.excluded(within(phase, markers.excluded), IN_WINDOW)
    if not markers.level:
        return photometry
    counted = (markers.primary_window, markers.secondary_window, *markers.level)
    return photometry.excluded(~within(phase, counted), NOT_FOR_LEVEL)


def refuse_fatal(findings: tuple[Finding, ...]) -> None:
    """NoSolutionError with the words of the findings that forbid a sheet, and of a doubt of the period.

    Half or twice the period makes nonsense of everything else, so it is the first thing to look at.
    """
    fatal = [finding for finding in findings if finding.fatal]
    if not fatal:
        return
    numbers = {finding.check: finding.value for finding in fatal if finding.value is not None}
    doubts = [f for f in findings if f.check == "period" and f.verdict != PASS and not f.fatal]
    words = " ".join(finding.words for finding in (*fatal, *doubts))
    kind = NotDetachedError if any("fill" in item.check for item in fatal) else NoSolutionError
    raise kind(words, numbers)


def _ephemeris(session: Session) -> tuple[float | None, float | None]:
    """What phases are counted from: the plan's ephemeris, which repeats, else the system's."""
    system, plan = session.system, session.plan
    if plan.period is not None and plan.epoch is not None:
        return plan.period, plan.epoch
    return (None, None) if system is None else (system.value("period"), system.value("epoch"))
