"""How the checks write numbers and lists, so that all sound alike."""

from __future__ import annotations

from collections.abc import Sequence
from math import isfinite


def percent(fraction: float) -> str:
    """A fraction as a percentage with two digits that matter; what is below 0.01 % is said to be so."""
    if 0 < abs(fraction) < 1e-4:
        return "under 0.01 %"
    return f"{number(100 * fraction)} %"


def number(value: float) -> str:
    """A number with about two digits that matter, never in powers of ten where it can be read plainly."""
    if not isfinite(value):
        return "unknown"
    size = abs(value)
    if size >= 1e6 or 0 < size < 1e-5:
        return f"{value:.1e}"
    if size >= 99.5:
        return f"{value:.0f}"
    if size >= 9.95:
        return f"{value:.3g}"
    return f"{value:.2g}" if size < 1 else f"{value:.2f}"


def listed(parts: Sequence[str]) -> str:
    """Parts joined as in a sentence: `a`, `a and b`, `a, b and c`."""
    if len(parts) < 2:
        return "".join(parts)
    return ", ".join(parts[:-1]) + " and " + parts[-1]


def counted(count: int, thing: str) -> str:
    """A count with its noun: `1 point`, `3 points`, `3 quantities`."""
    several = f"{thing[:-1]}ies" if thing.endswith("y") else f"{thing}s"
    return f"{count} {thing if count == 1 else several}"


def capital(text: str) -> str:
    """Text with a capital at its start."""
    return text[:1].upper() + text[1:]


def sentence(text: str) -> str:
    """Words as a sentence: a capital at the start, one full stop at the end."""
    bare = text.strip().rstrip(".")
    return f"{capital(bare)}." if bare else ""
