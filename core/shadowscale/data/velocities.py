"""The table of radial velocities: a row an exposure, with one star or both."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import USED, Floats, InputFile, Ints, UnreadableRow


@dataclass(frozen=True, eq=False)
class Velocities:
    """Measured velocities, in time order.

    Attributes
    ----------
    time : (n,) float64 [d]
        Full Julian dates in the scale `time_scale`.
    rv1, rv1_error, rv2, rv2_error : (n,) float64 [km/s]
        NaN where that star was not measured.
    source, file, line : (n,) int64
        Indices into `sources` and `files`; line number from 1.
    why1, why2 : (n,) int64
        0 where that star's velocity takes part, else an index into `reasons`.
    """

    time: Floats
    rv1: Floats
    rv1_error: Floats
    rv2: Floats
    rv2_error: Floats
    source: Ints
    file: Ints
    line: Ints
    why1: Ints
    why2: Ints
    sources: tuple[str, ...]
    files: tuple[InputFile, ...]
    time_scale: str = "unknown"
    errors_from_scatter: bool = False
    reasons: tuple[str, ...] = ("used", "no measurement")
    unreadable: tuple[UnreadableRow, ...] = ()
    notes: tuple[str, ...] = ()

    @property
    def used1(self) -> NDArray[np.bool_]:
        """(n,) True where star 1's velocity takes part."""
        return self.why1 == USED

    @property
    def used2(self) -> NDArray[np.bool_]:
        """(n,) True where star 2's velocity takes part."""
        return self.why2 == USED

    def excluded(self, star: int, rows: NDArray[np.bool_], reason: str) -> Velocities:
        """The same table with `rows` (n, bool) of star 1 or 2 set aside for `reason`."""
        reasons = self.reasons if reason in self.reasons else (*self.reasons, reason)
        code = reasons.index(reason)
        name = f"why{star}"
        why = getattr(self, name)
        return replace(self, **{name: np.where(rows & (why == USED), code, why)}, reasons=reasons)

    def restored(self, star: int, rows: NDArray[np.bool_]) -> Velocities:
        """The same table with `rows` (n, bool) of star 1 or 2 taking part again."""
        name = f"why{star}"
        return replace(self, **{name: np.where(rows, USED, getattr(self, name))})
