"""A saved session done again, and compared number by number."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from math import inf, isfinite
from pathlib import Path

import numpy as np

from shadowscale.data.photometry import USED
from shadowscale.errors import Problem, SessionError
from shadowscale.fit.solution import Estimate, Solution
from shadowscale.jobs.solve import solve_session
from shadowscale.progress import SILENT, Progress
from shadowscale.session.session import Session
from shadowscale.versions import library_versions

TOLERANCE = 1e-9  # relative; the same machine and versions repeat to the last bit
SHOWN = 20


@dataclass(frozen=True)
class Difference:
    """A number that came out otherwise: then, now; None where one side has none."""

    name: str
    saved: float | None
    now: float | None

    @property
    def relative(self) -> float:
        """Difference over the larger of the two; infinite where one is missing."""
        if self.saved is None or self.now is None:
            return inf
        scale = max(abs(self.saved), abs(self.now))
        return abs(self.saved - self.now) / scale if scale else 0.0

    def __str__(self) -> str:
        saved, now = (
            "none" if value is None else f"{value:.12g}" for value in (self.saved, self.now)
        )
        size = f", {self.relative:.1e} of it" if isfinite(self.relative) else ""
        return f"{self.name}: was {saved}, is {now}{size}"


@dataclass(frozen=True, eq=False)
class Replay:
    """The session solved again, and every number that differs by more than `TOLERANCE`.

    `changed` names what is not the version that it was solved with: then, now.
    """

    session: Session
    differences: tuple[Difference, ...]
    changed: Mapping[str, tuple[str, str]]

    @property
    def same(self) -> bool:
        """Whether all numbers came out the same."""
        return not self.differences

    def words(self) -> str:
        """What to tell a person."""
        lines = ["the same numbers"]
        if not self.same:
            lines = [f"{len(self.differences)} numbers differ from the saved ones:"]
            lines += [f"  {difference}" for difference in self.differences[:SHOWN]]
            if len(self.differences) > SHOWN:
                lines.append(f"  ... and {len(self.differences) - SHOWN} more")
        return "\n".join([*lines, *self._reasons()])

    def _reasons(self) -> Iterator[str]:
        """Which versions changed, or that it must be something else."""
        listed = ", ".join(
            f"{name} {then}, now {now}" for name, (then, now) in self.changed.items()
        )
        if listed:
            yield f"other versions than then: {listed}"
        elif not self.same:
            yield (
                "data and versions are those of then: another machine, another build of the program, "
                "or the session was edited"
            )


def replay_session(
    session: Session, *, path: Path = Path("session.json"), progress: Progress = SILENT
) -> Replay:
    """Solve a saved session again and compare.

    Raises
    ------
    SessionError
        If the session holds no solution to compare with.
    NoSolutionError
        If there is no solution any more.
    """
    saved = session.solution
    if saved is None:
        help = "solve it first: shadowscale solve SESSION --out DIR"
        raise SessionError(
            Problem(str(path), "a solved session", "one without a solution", help=help)
        )
    bare = replace(session, solution=None, contact=None, audit=())
    again = solve_session(bare, progress=progress)
    assert again.solution is not None
    return Replay(again, differences(saved, again.solution), changed_versions(session.versions))


def changed_versions(then: Mapping[str, str]) -> dict[str, tuple[str, str]]:
    """Versions that are not the present ones: then, now; nothing where then's are not known."""
    now = library_versions()
    names = dict.fromkeys([*then, *now]) if then else {}
    pairs = {name: (then.get(name, "none"), now.get(name, "none")) for name in names}
    return {name: pair for name, pair in pairs.items() if pair[0] != pair[1]}


def differences(saved: Solution, now: Solution) -> tuple[Difference, ...]:
    """Every number of the two solutions that differs, the largest first."""
    then_numbers, now_numbers = _numbers(saved), _numbers(now)
    names = dict.fromkeys([*then_numbers, *now_numbers])
    found = [Difference(name, then_numbers.get(name), now_numbers.get(name)) for name in names]
    found = [item for item in found if not _equal(item)]
    return tuple(sorted(found, key=lambda item: -item.relative))


def _equal(item: Difference) -> bool:
    if item.saved == item.now:
        return True
    if item.saved is not None and item.saved != item.saved:  # both NaN
        return item.now is not None and item.now != item.now
    return item.relative <= TOLERANCE


def _numbers(solution: Solution) -> dict[str, float | None]:
    found: dict[str, float | None] = {}
    for name, estimate in solution.estimates.items():
        found |= _estimate_numbers(name, estimate)
    fit = solution.fit
    found |= {"points": float(fit.points), "free": float(fit.free), "chi2": fit.chi2}
    for label, group in (
        ("rms_light", fit.rms_light),
        ("rms_velocity", fit.rms_velocity),
        ("error_scale", fit.error_scale),
        ("jitter", fit.jitter),
    ):
        found |= _labelled(label, group)
    found["used"] = float(np.count_nonzero(solution.light.why == USED))
    for number, other in enumerate(solution.alternatives, 1):
        found |= _labelled(f"alternative {number}", other.values)
        found[f"alternative {number} chi2"] = other.delta_chi2
    return found


def _estimate_numbers(name: str, estimate: Estimate) -> dict[str, float | None]:
    return {
        name: estimate.value,
        f"{name} minus": estimate.minus,
        f"{name} plus": estimate.plus,
    }


def _labelled(label: str, group: Mapping[str, float]) -> dict[str, float | None]:
    return {f"{label}[{name}]": value for name, value in group.items()}
