"""Checks, decisions and what is absent, gathered for reading: the gravest first."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from shadowscale.data.photometry import Photometry
from shadowscale.fit.solution import Solution
from shadowscale.judge.finding import ABSENT, FAIL, PASS, WARN, Finding
from shadowscale.session.session import Session
from shadowscale.view.last import Last
from shadowscale.view.light_points import fitting_solution
from shadowscale.view.written import symbol

SHOWN_LINES = 10
_ORDER = {FAIL: 0, WARN: 1, PASS: 2}


@dataclass(frozen=True)
class Doubt:
    """A line: a heading, or a name with words, numbers and a source."""

    heading: str = ""
    verdict: str = ""
    name: str = ""
    words: str = ""
    numbers: str = ""
    source: str = ""


def doubts(session: Session) -> tuple[Doubt, ...]:
    """All of it; empty without a solution and findings."""
    return tuple(_lines(session))


def counts(session: Session) -> tuple[int, int]:
    """How many checks failed, and how many warn."""
    verdicts = [finding.verdict for finding in session.audit]
    return verdicts.count(FAIL), verdicts.count(WARN)


def _lines(session: Session) -> Iterator[Doubt]:
    if session.audit:
        yield Doubt("Checks")
        for finding in sorted(session.audit, key=lambda each: _ORDER.get(each.verdict, 3)):
            if finding.verdict == PASS and finding.check.startswith(ABSENT):
                continue  # told below, under what the data cannot give
            yield Doubt(
                "", finding.verdict, finding.check, finding.words, _numbers(finding), finding.source
            )
    yield from _rows(session)
    contact = session.contact
    if contact is not None and contact.notes:
        yield Doubt("From the contacts")
        yield from (Doubt("", "", "", note) for note in contact.notes)
    solution = session.solution
    if solution is None:
        return
    if solution.alternatives:
        yield Doubt("Other solutions that the data do not exclude")
        for other in solution.alternatives:
            values = ", ".join(
                f"{symbol(name)} = {value:.4g}" for name, value in other.values.items()
            )
            yield Doubt("", WARN, "", other.words, f"chi-squared {other.delta_chi2:+.1f}; {values}")
    if solution.decisions:
        yield Doubt("What the data decided")
        for decision in solution.decisions:
            yield Doubt("", "", f"{decision.what}: {decision.chosen}.", decision.words)
    if solution.absent:
        yield Doubt("What the data cannot give")
        yield from (Doubt("", "", f"{name}:", words) for name, words in solution.absent.items())
    if solution.notes:
        yield Doubt("Notes")
        yield from (Doubt("", "", "", note) for note in solution.notes)


def _rows(session: Session) -> Iterator[Doubt]:
    """How many rows of the tables do not take part, by reason."""
    photometry, solution = session.photometry, fitting_solution(session)
    if photometry is None:
        return
    found = list(_COUNTS.of(photometry, solution))
    found += [
        (f"{row.file}, line {row.line}: {row.reason}", 1)
        for row in photometry.unreadable[:SHOWN_LINES]
    ]
    shown = [(words, count) for words, count in found if count]
    if shown:
        yield Doubt("Rows set aside")
        yield from (Doubt("", "", f"{count}", words) for words, count in shown)
    more = len(photometry.unreadable) - SHOWN_LINES
    if more > 0:
        yield Doubt("", "", f"{more}", "more lines that cannot be read")


def _counted(photometry: Photometry, solution: Solution | None) -> tuple[tuple[str, int], ...]:
    why = photometry.why if solution is None else solution.light.why
    reasons = photometry.reasons if solution is None else solution.light.reasons
    numbers = np.bincount(why, minlength=len(reasons))
    return tuple((reason, int(numbers[code])) for code, reason in enumerate(reasons) if code)


_COUNTS = Last(_counted)


def _numbers(finding: Finding) -> str:
    if finding.value is None:
        return ""
    limit = "" if finding.limit is None else f", limit {finding.limit:.3g}"
    return f"({finding.value:.3g}{limit})"
