"""What the data decide under `auto`: each by a likelihood-ratio test at one per cent (Wilks 1938)."""

from __future__ import annotations

from shadowscale.fit.chances import chi2_limit
from shadowscale.fit.solution import Decision

SIGNIFICANCE = 0.01


def needed(gain: float, extra: int) -> tuple[bool, float]:
    """Whether `extra` quantities are worth a gain in chi-squared, and the gain that would be needed."""
    limit = chi2_limit(max(extra, 1), SIGNIFICANCE)
    return gain > limit, limit


def decision(
    what: str, *, chosen: str, gain: float, extra: int, limit: float, subject: str
) -> Decision:
    """The decision in words: `subject` wins `gain` in chi-squared for `extra` quantities."""
    verb = "wins" if gain > limit else "wins only"
    words = (
        f"{subject} {verb} {gain:.1f} in chi-squared for {extra} more "
        f"{'quantity' if extra == 1 else 'quantities'}; {limit:.1f} is needed at one per cent: {chosen}"
    )
    return Decision(what, chosen, words, {"gain": gain, "extra": float(extra), "needed": limit})
