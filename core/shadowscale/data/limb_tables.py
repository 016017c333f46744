"""Published limb-darkening coefficients: tables by temperature, gravity, metallicity and band.

The columns are known by the names that such tables use (Claret 2000, A&A 363, 1081, and the tables
that followed it): `u`; `a b` or `u1 u2`; `c d`; `e f`; `a1 ... a4`; `g h` or `c alpha`.
"""

from __future__ import annotations

import re
from bisect import bisect_right
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from math import isfinite, log10

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.bands import band_name
from shadowscale.data.files import FilePath, read_table
from shadowscale.data.photometry import Floats
from shadowscale.data.raw_table import Column, RawTable
from shadowscale.errors import ColumnError, Problem, TableError

Coefficients = tuple[float, ...]

_LAWS: Mapping[str, tuple[tuple[str, ...], ...]] = {
    "linear": (("u",), ("x",), ("ulin",)),
    "quadratic": (("a", "b"), ("u1", "u2"), ("ua", "ub")),
    "square-root": (("c", "d"),),
    "logarithmic": (("e", "f"),),
    "power-2": (("g", "h"), ("c", "alpha"), ("cpower2", "alpha")),
    "four-parameter": (("a1", "a2", "a3", "a4"), ("c1", "c2", "c3", "c4")),
}
_AXES = {
    "teff": r"teffk?|temp(erature)?k?|t",
    "logg": r"logg(cgs)?|lgg|gravity",
    "metallicity": r"z|mh|feh|logz|met(allicity)?|loga?bun",
}
_BAND = r"band|filter|filt|fil|passband"
_PREFERRED = (  # where a table holds several versions of a row: column, what is taken, what it is
    (r"xi|vturb|microturbulence|vel", ("2", "2.0"), "microturbulence 2 km/s"),
    (r"met|method|fit", ("L", "least squares", "LS", "LSM"), "the least-squares coefficients"),
    (r"mod|model|atm|atmosphere", ("A", "ATLAS"), "the ATLAS models"),
)


@dataclass(frozen=True, eq=False)
class LimbTable:
    """A table of coefficients.

    Attributes
    ----------
    bands : tuple of str
        Empty for a table of one band that is not named: then it serves any band.
    laws : tuple of str
        Laws that the table has coefficients for.
    teff [K], logg [dex cgs], metallicity [dex] : (n,) float64
    band : (n,) int64
        Index into `bands`.
    values : mapping of law to (n, m) float64
    """

    path: str
    bands: tuple[str, ...]
    laws: tuple[str, ...]
    teff: Floats
    logg: Floats
    metallicity: Floats
    band: NDArray[np.int64]
    values: Mapping[str, Floats]
    notes: tuple[str, ...] = ()

    def coefficients(
        self, teff: float, logg: float, band: str, *, law: str, metallicity: float = 0.0
    ) -> Coefficients:
        """Coefficients of a law, linear in log Teff, log g and metallicity between the rows.

        Parameters
        ----------
        teff : float [K]
        logg : float [dex cgs]
        band : str
            As in the table, or another usual name of it.
        law : str
        metallicity : float [dex]

        Returns
        -------
        tuple of float
            In the law's own order.

        Raises
        ------
        TableError
            Outside the table's range, or where it has no such band or law.
        """
        if law not in self.laws:
            found = f"coefficients for {', '.join(self.laws)}"
            raise TableError(Problem(self.path, f"coefficients of the {law} law", found))
        rows: NDArray[np.bool_] = np.all(np.isfinite(self.values[law]), axis=1)
        if self.bands:
            rows = rows & (self.band == self._band_index(band))
        interpolated = self._over_metallicity(
            law, rows, metallicity=metallicity, teff=teff, logg=logg
        )
        return tuple(float(value) for value in interpolated)

    def _band_index(self, band: str) -> int:
        if band in self.bands:
            return self.bands.index(band)
        for index, name in enumerate(self.bands):
            if band_name(name) is not None and band_name(name) == band_name(band):
                return index
        found = f"the bands {', '.join(self.bands)}"
        raise TableError(Problem(self.path, f"coefficients for band {band}", found))

    def _over_metallicity(
        self, law: str, rows: NDArray[np.bool_], *, metallicity: float, teff: float, logg: float
    ) -> Floats:
        def at(value: float) -> Floats:
            return self._over_teff(law, rows & (self.metallicity == value), teff=teff, logg=logg)

        return self._between("metallicity", metallicity, self.metallicity[rows], at)

    def _over_teff(self, law: str, rows: NDArray[np.bool_], *, teff: float, logg: float) -> Floats:
        def at(value: float) -> Floats:
            here = rows & (self.teff == value)
            where = f" at Teff {value:g} K"
            return self._between(
                f"log g{where}", logg, self.logg[here], lambda g: self._row(law, here, g)
            )

        return self._between("Teff", teff, self.teff[rows], at, scale=log10, unit=" K")

    def _row(self, law: str, rows: NDArray[np.bool_], logg: float) -> Floats:
        found = self.values[law][rows & (self.logg == logg)]
        if len(np.unique(found, axis=0)) > 1:
            raise TableError(
                Problem(
                    self.path,
                    "one row for each Teff, log g, metallicity and band",
                    f"{len(found)} different ones for log g {logg:g}",
                    help="keep the rows of one model and method only",
                )
            )
        return np.asarray(found[0], dtype=np.float64)

    def _between(
        self,
        axis: str,
        wanted: float,
        grid: Floats,
        at: Callable[[float], Floats],
        *,
        scale: Callable[[float], float] = float,
        unit: str = "",
    ) -> Floats:
        """Linear between the two grid values around the wanted one."""
        nodes = [float(value) for value in np.unique(grid)]
        if not nodes or not isfinite(wanted) or not nodes[0] <= wanted <= nodes[-1]:
            within = f"{nodes[0]:g} to {nodes[-1]:g}{unit}" if nodes else "no rows"
            help = "nothing is extrapolated"
            raise TableError(
                Problem(self.path, f"{axis} {wanted:g}{unit} within the table", within, help=help)
            )
        upper = min(bisect_right(nodes, wanted), len(nodes) - 1)
        low, high = nodes[max(upper - 1, 0)], nodes[upper]
        if wanted in (low, high):
            return at(wanted)
        share = (scale(wanted) - scale(low)) / (scale(high) - scale(low))
        return (1.0 - share) * at(low) + share * at(high)


def read_limb_table(path: FilePath) -> LimbTable:
    """Read published coefficients from a text table, FITS, ECSV or VOTable.

    Parameters
    ----------
    path : path
        Columns Teff, log g, [metallicity,] [band,] and the coefficients of one or more laws.

    Raises
    ------
    TableError
        If the file is no table or has no row that can be used.
    ColumnError
        If Teff, log g or all coefficients are missing.
    """
    table = read_table(path)
    names = [_plain(column) for column in table.columns]
    axes = {axis: _axis(table, names, axis) for axis in _AXES}
    laws = _laws(table, names)
    band = next((k for k, name in enumerate(names) if re.fullmatch(_BAND, name)), None)
    metallicity = axes["metallicity"]
    whole = np.ones(len(table.line), dtype=bool)
    bands, codes = table.columns[band].words(whole) if band is not None else ((), None)
    read = {
        "teff": _kelvin(_numbers(table, axes["teff"])),
        "logg": _numbers(table, axes["logg"]),
        "metallicity": np.zeros(len(whole))
        if metallicity is None
        else _numbers(table, metallicity),
    }
    rows = np.isfinite(read["teff"]) & np.isfinite(read["logg"]) & np.isfinite(read["metallicity"])
    notes = [*table.notes, *_unused(table, rows)]
    rows &= _versions(table, names, rows, notes)
    if not np.any(rows):
        raise TableError(Problem(table.path, "rows with Teff, log g and coefficients", "none"))
    return LimbTable(
        path=table.path,
        bands=bands,
        laws=tuple(laws),
        teff=read["teff"][rows],
        logg=read["logg"][rows],
        metallicity=read["metallicity"][rows],
        band=(np.zeros(len(whole), np.int64) if codes is None else codes)[rows],
        values={law: _matrix(table, indices)[rows] for law, indices in laws.items()},
        notes=tuple(notes),
    )


def _plain(column: Column) -> str:
    """The name in small letters and digits only: `log(g)` is `logg`, `[M/H]` is `mh`."""
    return re.sub(r"[^a-z0-9]", "", column.name.lower())


def _axis(table: RawTable, names: list[str], axis: str) -> int | None:
    for index, name in enumerate(names):
        if re.fullmatch(_AXES[axis], name) and not table.columns[index].is_text:
            return index
    if axis == "metallicity":
        return None
    help = f"the columns are {', '.join(table.names[:30])}"
    raise ColumnError(Problem(table.path, f"a column {axis}", "none", column=axis, help=help))


def _laws(table: RawTable, names: list[str]) -> dict[str, tuple[int, ...]]:
    laws = {}
    for law, choices in _LAWS.items():
        for choice in choices:
            if law == "power-2" and choice[0] == "c" and "d" in names:
                continue  # that c belongs to the square-root law
            if all(name in names for name in choice):
                laws[law] = tuple(names.index(name) for name in choice)
                break
    if not laws:
        expected = "coefficients (u; a b; c d; e f; g h; c alpha; a1 a2 a3 a4)"
        raise ColumnError(
            Problem(table.path, expected, f"the columns {', '.join(table.names[:30])}")
        )
    return laws


def _numbers(table: RawTable, index: int | None) -> Floats:
    return table.columns[0 if index is None else index].numbers


def _matrix(table: RawTable, indices: Sequence[int]) -> Floats:
    return np.column_stack([table.columns[index].numbers for index in indices])


def _kelvin(teff: Floats) -> Floats:
    """Kelvin, also from log Teff."""
    return 10.0**teff if len(teff) and np.nanmax(teff, initial=0.0) < 10.0 else teff


def _unused(table: RawTable, rows: NDArray[np.bool_]) -> list[str]:
    lost = [row.line for row in table.unreadable] + [int(n) for n in table.line[~rows]]
    if not lost:
        return []
    shown = ", ".join(map(str, sorted(lost)[:10])) + (", ..." if len(lost) > 10 else "")
    return [f"{len(lost)} lines have no Teff and log g and are not used (line {shown})"]


def _versions(
    table: RawTable, names: list[str], rows: NDArray[np.bool_], notes: list[str]
) -> NDArray[np.bool_]:
    """Rows of one version, where a table holds several (turbulence, method, models)."""
    kept = np.ones(len(rows), dtype=bool)
    for pattern, wanted, what in _PREFERRED:
        index = next((k for k, name in enumerate(names) if re.fullmatch(pattern, name)), None)
        if index is None or index == _axis(table, names, "metallicity"):
            continue
        labels, codes = table.columns[index].words(np.ones(len(rows), dtype=bool))
        good = [k for k, label in enumerate(labels) if label in wanted]
        if good and len(np.unique(codes[rows])) > 1:
            kept &= np.isin(codes, good)
            notes.append(f"of several versions of a row, {what} are taken")
    return kept
