"""How works are timed: both sides in one process, interleaved, warmed, set-up outside the clock."""

from __future__ import annotations

import gc
import statistics
from collections.abc import Callable, Sequence
from dataclasses import asdict, dataclass, field
from time import perf_counter, process_time

Call = Callable[[], object]
CLOCKS: dict[str, Callable[[], float]] = {"wall": perf_counter, "cpu": process_time}


@dataclass(frozen=True)
class Work:
    """Something to be timed.

    ours, other : what is called; other is None where there is nothing to compare with
    wanted : the ratio (other over ours; ours over other where `cost`) that we want to keep
    checked : what both sides were compared by, with its number
    """

    name: str
    size: str
    ours: Call
    other: Call | None = None
    beside: str = ""
    wanted: float | None = None
    cost: bool = False
    checked: str = ""


@dataclass(frozen=True)
class Timed:
    """Seconds of every run of a work; `peak` in MB where it was a process."""

    name: str
    size: str
    beside: str
    wanted: float | None
    cost: bool
    checked: str
    ours: tuple[float, ...]
    other: tuple[float, ...] = ()
    peak: float | None = None
    notes: tuple[str, ...] = field(default=())

    @property
    def ratio(self) -> float | None:
        """Median of the other over median of ours; turned round where a cost is told."""
        return self._ratio(statistics.median)

    @property
    def ratio_of_best(self) -> float | None:
        """The same of the shortest runs, which a busy machine spoils least."""
        return self._ratio(min)

    def _ratio(self, of: Callable[[Sequence[float]], float]) -> float | None:
        if not self.other:
            return None
        ratio = of(self.other) / of(self.ours)
        return 1 / ratio if self.cost else ratio

    @property
    def spread(self) -> float | None:
        """Half the range of the middle half of the ratios of neighbouring runs, over their median."""
        if not self.other or len(self.ours) < 4:
            return None
        ratios = [two / one for one, two in zip(self.ours, self.other, strict=True)]
        low, middle, high = statistics.quantiles(ratios, n=4)
        return (high - low) / 2 / middle

    def as_dict(self) -> dict[str, object]:
        """For the JSON file."""
        return {
            **asdict(self), "ratio": self.ratio, "ratio_of_best": self.ratio_of_best,
            "spread": self.spread,
        }  # fmt: skip


def timed(work: Work, repeats: int, clock: Callable[[], float]) -> Timed:
    """Time one work, `repeats` runs of each side in turn after a warm one."""
    work.ours()
    if work.other is not None:
        work.other()
    ours, other = [], []
    gc.collect()
    gc.disable()
    try:
        for _ in range(repeats):
            ours.append(_seconds(work.ours, clock))
            if work.other is not None:
                other.append(_seconds(work.other, clock))
    finally:
        gc.enable()
    return Timed(
        work.name, work.size, work.beside, work.wanted, work.cost, work.checked, tuple(ours),
        tuple(other),
    )  # fmt: skip


def _seconds(call: Call, clock: Callable[[], float]) -> float:
    """Of one call; short ones are repeated until the clock can tell."""
    start = clock()
    call()
    took = clock() - start
    if took > 2e-3:
        return took
    count = int(4e-3 / max(took, 1e-7)) + 1
    start = clock()
    for _ in range(count):
        call()
    return (clock() - start) / count


HEADINGS = (
    "work", "size", "ours", "other", "ratio", "wanted", "spread", "peak", "checked",
)  # fmt: skip


def table(results: Sequence[Timed]) -> str:
    """All results as aligned columns: medians, in brackets of the shortest runs."""
    rows = [HEADINGS, *(_row(each) for each in results)]
    widths = [max(len(row[column]) for row in rows) for column in range(len(HEADINGS))]
    lines = ["  ".join(cell.ljust(width) for cell, width in zip(row, widths)) for row in rows]
    return "\n".join(line.rstrip() for line in lines)


def _row(each: Timed) -> tuple[str, ...]:
    beside = _span(statistics.median(each.other)) if each.other else "-"
    sign = "<=" if each.cost else ">="
    return (
        each.name,
        each.size,
        f"{_span(statistics.median(each.ours))} ({_span(min(each.ours))})",
        f"{beside} {each.beside}".rstrip(),
        f"{_figure(each.ratio, each.cost)} ({_figure(each.ratio_of_best, each.cost)})",
        "-" if each.wanted is None else f"{sign} {each.wanted:g}",
        "-" if each.spread is None else f"{100 * each.spread:.0f} %",
        "-" if each.peak is None else f"{each.peak:.0f} MB",
        each.checked or "-",
    )


def _figure(ratio: float | None, cost: bool) -> str:
    return "-" if ratio is None else f"{ratio:.2f}" if cost else f"{ratio:.0f}"


def _span(seconds: float) -> str:
    for unit, factor in (("s", 1.0), ("ms", 1e3), ("us", 1e6)):
        if seconds * factor >= 1.0:
            return f"{seconds * factor:.3g} {unit}"
    return f"{seconds * 1e9:.3g} ns"
