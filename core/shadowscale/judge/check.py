"""What a check is: a name, what it asks, the function that answers, its limit and the limit's source."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import isfinite

from shadowscale.judge.evidence import Evidence
from shadowscale.judge.finding import FAIL, PASS, WARN, Finding

Verdict = str


@dataclass(frozen=True)
class Check:
    """One question that is put to every solution.

    Attributes
    ----------
    name : str
        As it stands in the audit.
    meaning : str
        The question in plain words.
    function : callable
        Takes the evidence and the check itself, gives its findings (one; several where the check
        speaks of several things).
    limit : float or None
        Beyond it the verdict is no longer `pass`; None where a word decides, not a number.
    source : str
        Where the limit comes from: a paper, common practice, or the reasoning behind it.
    """

    name: str
    meaning: str
    function: Callable[[Evidence, Check], tuple[Finding, ...]]
    limit: float | None
    source: str

    def passed(
        self, words: str, value: float | None = None, *, limit: float | None = None
    ) -> tuple[Finding, ...]:
        """The finding that nothing is wrong."""
        return self.found(PASS, words, value=value, limit=limit)

    def warned(
        self, words: str, value: float | None = None, *, limit: float | None = None
    ) -> tuple[Finding, ...]:
        """The finding that something needs a look."""
        return self.found(WARN, words, value=value, limit=limit)

    def failed(
        self,
        words: str,
        value: float | None = None,
        *,
        limit: float | None = None,
        fatal: bool = False,
    ) -> tuple[Finding, ...]:
        """The finding that the result does not hold; `fatal` where it must not be handed out."""
        return self.found(FAIL, words, value=value, limit=limit, fatal=fatal)

    def silent(self, words: str) -> tuple[Finding, ...]:
        """The finding that the check has nothing to work on, and why."""
        return (Finding(self.name, None, self.limit, PASS, f"Not judged: {words}", self.source),)

    def found(
        self,
        verdict: Verdict,
        words: str,
        *,
        value: float | None = None,
        limit: float | None = None,
        fatal: bool = False,
    ) -> tuple[Finding, ...]:
        """One finding of this check; numbers that are not finite become None."""
        shown = float(value) if value is not None and isfinite(value) else None
        bound = self.limit if limit is None else limit
        if bound is not None and not isfinite(bound):
            bound = None
        return (Finding(self.name, shown, bound, verdict, words, self.source, fatal),)
