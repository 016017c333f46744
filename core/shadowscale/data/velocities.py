"""The table of radial velocities: a row an exposure, with one star or both."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import USED, Floats, InputFile, Ints, UnreadableRow

NO_MEASUREMENT = "no measurement"  # the reason where a star has no velocity in a row


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
    reasons: tuple[str, ...] = ("used", NO_MEASUREMENT)
    unreadable: tuple[UnreadableRow, ...] = ()
    notes: tuple[str, ...] = ()

    @property
    def used1(self) -> NDArray[np.bool_]:
        """(n,) True where star 1's velocity takes part."""
        return np.equal(self.why1, USED)

    @property
    def used2(self) -> NDArray[np.bool_]:
        """(n,) True where star 2's velocity takes part."""
        return np.equal(self.why2, USED)

    def excluded(self, star: int, rows: NDArray[np.bool_], reason: str) -> Velocities:
        """The same table with `rows` (n, bool) of star 1 or 2 set aside for `reason`."""
        reasons = self.reasons if reason in self.reasons else (*self.reasons, reason)
        why = self._why(star)
        code = reasons.index(reason)
        return self._changed(star, np.where(rows & (why == USED), code, why), reasons)

    def restored(self, star: int, rows: NDArray[np.bool_]) -> Velocities:
        """The same table with `rows` (n, bool) of star 1 or 2 taking part again.

        Rows without a measurement stay out.
        """
        why = self._why(star)
        measured = why != self.reasons.index(NO_MEASUREMENT)
        return self._changed(star, np.where(rows & measured, USED, why), self.reasons)

    def _why(self, star: int) -> Ints:
        if star not in (1, 2):
            raise ValueError(f"star: expected 1 or 2, found {star!r}")
        return self.why1 if star == 1 else self.why2

    def _changed(self, star: int, why: Ints, reasons: tuple[str, ...]) -> Velocities:
        if star == 1:
            return replace(self, why1=why, reasons=reasons)
        return replace(self, why2=why, reasons=reasons)
