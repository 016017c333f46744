"""The table of photometry: every row of every file, used or with the reason why not."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

USED = 0  # code of a row that takes part; the other codes index `Photometry.reasons`


@dataclass(frozen=True)
class UnreadableRow:
    """A line of a file that could not become a measurement."""

    file: str
    line: int
    reason: str
    text: str = ""


@dataclass(frozen=True)
class InputFile:
    """A file as it was read: where, what it held, how its columns were understood."""

    path: str
    sha256: str
    rows: int
    used: int
    columns: tuple[tuple[str, str], ...] = ()  # (role, name and reason of the guess)


@dataclass(frozen=True, eq=False)
class Photometry:
    """Measured light, in time order.

    Attributes
    ----------
    time : (n,) float64 [d]
        Full Julian dates (a printed offset is added back) in the scale `time_scale`.
    flux, flux_error : (n,) float64
        Linear; magnitudes were turned with m = -2.5 log10 F, and each band is scaled to a median near 1.
    band, file, night : (n,) int64
        Indices into `bands`, `files`, and the number of the night or segment (counted per band).
    line : (n,) int64
        Line (or row) number in the file, from 1.
    value, value_error : (n,) float64
        As printed in the file (magnitude where `magnitudes`), so that the row can be shown again.
    why : (n,) int64
        0 for a row that takes part, else an index into `reasons`.
    errors_from_scatter : (number of bands,) bool
        True where the file had no errors and they were estimated.
    exposure : (n,) float64 [s] or None
    airmass : (n,) float64 or None
        As printed in the file; NaN where it has none.
    """

    time: Floats
    flux: Floats
    flux_error: Floats
    band: Ints
    night: Ints
    file: Ints
    line: Ints
    value: Floats
    value_error: Floats
    why: Ints
    bands: tuple[str, ...]
    files: tuple[InputFile, ...]
    time_scale: str = "unknown"
    magnitudes: bool = False
    errors_from_scatter: tuple[bool, ...] = ()
    reasons: tuple[str, ...] = ("used",)
    unreadable: tuple[UnreadableRow, ...] = ()
    notes: tuple[str, ...] = field(default=())
    exposure: Floats | None = None
    airmass: Floats | None = None

    @property
    def used(self) -> NDArray[np.bool_]:
        """(n,) True where the row takes part."""
        return np.equal(self.why, USED)

    def excluded(self, rows: NDArray[np.bool_], reason: str) -> Photometry:
        """The same table with `rows` (n, bool) set aside for `reason`; rows set aside before keep theirs."""
        reasons = self.reasons if reason in self.reasons else (*self.reasons, reason)
        why = np.where(rows & self.used, reasons.index(reason), self.why)
        return replace(self, why=why, reasons=reasons)

    def restored(self, rows: NDArray[np.bool_]) -> Photometry:
        """The same table with `rows` (n, bool) taking part again; rows without a flux stay out."""
        usable = np.isfinite(self.flux) & np.isfinite(self.flux_error) & (self.flux_error > 0)
        return replace(self, why=np.where(rows & usable, USED, self.why))
