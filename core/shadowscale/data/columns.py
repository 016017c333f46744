"""What the columns of a table mean: guessed by name, by unit, by place and look, each with its reason.

A role is what a column is for (`time`, `mag`, `rv1_err` ...). Whoever calls may name the columns:
`{"time": "BJD", "mag": "V"}`; a number counts the columns from 1, an empty name says that the
table has no such column. This module holds what photometry (`light_columns`) and velocities
(`velocity_columns`) have in common.
"""

from __future__ import annotations

import re
import shlex
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from types import MappingProxyType

from shadowscale.data.looks import time_column
from shadowscale.data.raw_table import Column, RawTable
from shadowscale.errors import ColumnError, Problem, UsageError

SETTINGS = ("time_system", "unit")  # not columns: how the numbers of a column are to be taken
Chosen = Mapping[str, str | int]
NOTHING_CHOSEN: Chosen = MappingProxyType({})

_SCALES = r"([ _-]*(tdb|utc|tt))?"
_OFFSET = r"([ _]*[-(+]?[ _]*24\d{5}(\.\d+)?[ _)+]*)?"
_TIME_NAMES = (  # the earlier, the better
    rf"(tbjd|btjd|bkjd|bjd|bmjd|mbjd|rbjd|brjd){_SCALES}",
    rf"(hjd|hmjd|mhjd|rhjd|hrjd){_SCALES}",
    rf"(jd|mjd|rjd|tjd){_SCALES}|julian[ _]?da(te|y)",
    rf"times?([ _-]*(bjd|hjd|jd|mjd|btjd|bkjd){_SCALES})?|(bjd|hjd|jd|mjd)[ _]?time"
    r"|(obs|mid)[ _]?time|t[ _]?mid",
    r"date([ _-]?obs)?|epoch|t|days?",
)
_ROLE_NAMES = {
    "band": r"(photometric[ _]?)?(band|filter|filt|fil|passband|bandpass|flt)([ _]?(code|name))?",
    "airmass": r"air[ _]?mass|amass|am|secz|x",
    "quality": r"(sap_|d|k_)?quality(_?flag)?|qual(ity)?_?flags?|(cat)?flags?|qual|q",
    "exposure": r"exp(osure)?([ _]?time)?|exptime|t_?exp|int(egration)?[ _]?time|cadence_s",
    "source": r"source|instrument|instr?|telescope|tel|site|observatory|spectrograph"
    r"|ref(erence)?|spec",
}
_TIME_UNITS = re.compile(r"(?i)^(d|days?|jd|bjd|hjd|mjd|.*\b[bhm]?jd\b.*)$")
_PHASE = re.compile(r".*(phase|cycle).*|phi")
_DATE = re.compile(r"^\d{4}[-/]\d{1,2}[-/]\d{1,2}")


@dataclass(frozen=True)
class Guess:
    """Which column plays a role, and why it is thought so.

    `index` counts the columns from 0; `unit` is empty where nothing is said of it.
    """

    role: str
    column: str
    index: int
    reason: str
    unit: str = ""


def plain_name(name: str) -> str:
    """A column's name in lower case, without its unit in brackets."""
    return re.sub(r"\s*[\[({].*?[\])}]\s*", " ", name).strip().lower() or name.strip().lower()


def unit_of(column: Column) -> str:
    """The unit of a column, or the one in brackets after its name."""
    found = re.search(r"[\[({]([^\])}]+)[\])}]", column.name)
    return column.unit or (found[1].strip() if found else "")


class ColumnSearch:
    """The columns of a table that have no role yet, and the roles given so far.

    Parameters
    ----------
    table : RawTable
    columns : mapping of role to column
        What the user says.
    roles : tuple of str
        All roles of this kind of table.
    """

    def __init__(self, table: RawTable, columns: Chosen, roles: tuple[str, ...]) -> None:
        self.table = table
        self.roles = roles
        self.given: dict[str, Guess] = {}
        self.names_speak = False  # whether the name or unit of any column says what it is
        self.closed = {role for role, column in columns.items() if column == ""}
        for role, wanted in columns.items():
            if role in SETTINGS:
                continue
            if role not in roles:
                raise UsageError("columns", role, roles)
            if wanted != "":
                self.give(role, _index_of(table, role, wanted), "named by the user")

    def has(self, *roles: str) -> bool:
        """Whether one of the roles is given."""
        return any(role in self.given for role in roles)

    def open(self, role: str) -> bool:
        """Whether the role may still be given."""
        return role not in self.given and role not in self.closed

    def give(self, role: str, index: int | None, reason: str) -> None:
        """Give a role to a column, unless there is none, or the role is given or closed."""
        if index is not None and self.open(role):
            self.given[role] = self.guess(role, index, reason)

    def guess(self, role: str, index: int, reason: str) -> Guess:
        """A guess about a column of the table."""
        column = self.table.columns[index]
        return Guess(role, column.name, index, reason, unit_of(column))

    def numeric(self, after: int = -1) -> list[int]:
        """Columns of numbers without a role, to the right of column `after`."""
        columns = self.table.columns
        return [k for k in self._free() if k > after and not columns[k].is_text]

    def words(self) -> list[int]:
        """Columns of words without a role."""
        return [index for index in self._free() if self.table.columns[index].is_text]

    def named(self, pattern: str, *, numeric: bool = True) -> list[int]:
        """Columns without a role whose plain name matches the whole pattern."""
        choice = self.numeric() if numeric else self._free()
        return [index for index in choice if re.fullmatch(pattern, self.plain(index))]

    def plain(self, index: int) -> str:
        """The plain name of a column."""
        return plain_name(self.table.columns[index].name)

    def unit(self, index: int) -> str:
        """The unit of a column."""
        return unit_of(self.table.columns[index])

    def give_by_name(self, *roles: str) -> None:
        """Give roles that are known by the name of the column only."""
        for role in roles:
            found = self.named(_ROLE_NAMES[role], numeric=False)
            self.give(role, found[0] if found else None, f"the name says {role}")

    def result(self) -> tuple[Guess, ...]:
        """All roles given, in their usual order."""
        return tuple(self.given[role] for role in self.roles if role in self.given)

    def missing(self, role: str, expected: str) -> Problem:
        """The complaint that no column plays a role."""
        help = f"{_listed(self.table)}; say which one it is: {self.wish(role, 'NAME')}"
        found = "none that looks like it"
        return Problem(self.table.path, f"a column with {expected}", found, help=help)

    def wish(self, role: str, column: str) -> str:
        """How the command line is told that a column plays a role."""
        option = "--velocity-columns" if "rv1" in self.roles else "--columns"
        return f"{option} {shlex.quote(f'{role}={column}')}"

    def _free(self) -> list[int]:
        taken = {guess.index for guess in self.given.values()}
        return [index for index in range(len(self.table.columns)) if index not in taken]


def search_with_time(
    table: RawTable,
    columns: Chosen,
    roles: tuple[str, ...],
    *,
    values: tuple[str, ...],
    by_place: Callable[[ColumnSearch], None],
) -> ColumnSearch:
    """A search that has its time; a table without names has its other columns by their place, too.

    Parameters
    ----------
    table : RawTable
    columns : mapping of role to column
        What the user says; goes before every guess.
    roles : tuple of str
        All roles of this kind of table.
    values : tuple of str
        The roles of what was measured: `by_place` is not asked where one of them is given.
    by_place : function of the search

    Raises
    ------
    ColumnError
        If no column looks like the time.
    """
    search = ColumnSearch(table, columns, roles)
    if not table.named and not search.has(*values):
        by_place(search)
    give_time(search)
    return search


def give_time(search: ColumnSearch) -> None:
    """Give the role of time: by name, by unit, or by the size of the numbers.

    Raises
    ------
    ColumnError
        If no column looks like it.
    """
    if search.has("time"):
        return
    for rank, pattern in enumerate(_TIME_NAMES):
        found = search.named(f"({pattern}){_OFFSET}")
        if found and search.open("time"):
            search.give("time", found[0], _time_reason(search, found[0], rank))
            search.names_speak = True
            return
    by_unit = [index for index in search.numeric() if _TIME_UNITS.match(search.unit(index))]
    search.give("time", by_unit[0] if by_unit else None, "the unit is one of time")
    search.names_speak = search.has("time")
    unfolded = [index for index in search.numeric() if not _is_phase(search, index)]
    looks = time_column(search.table, unfolded, any_column=not search.table.named)
    if looks is not None:
        search.give("time", *looks)
    if not search.has("time"):
        raise ColumnError(_no_time(search))


def role_names_speak(search: ColumnSearch) -> bool:
    """Whether the name of any column is one of those that are known."""
    patterns = _ROLE_NAMES.values()
    return search.names_speak or any(search.named(one, numeric=False) for one in patterns)


def _is_phase(search: ColumnSearch, index: int) -> bool:
    return search.table.named and bool(_PHASE.fullmatch(search.plain(index)))


def _time_reason(search: ColumnSearch, index: int, rank: int) -> str:
    later = [
        search.table.columns[other].name
        for pattern in _TIME_NAMES[rank:]
        for other in search.named(f"({pattern}){_OFFSET}")
        if other != index
    ]
    reason = "the name says time"
    return reason + (f"; preferred to {', '.join(dict.fromkeys(later))}" if later else "")


def _no_time(search: ColumnSearch) -> Problem:
    """What is said of a table without times: folded, or with calendar dates."""
    path = search.table.path
    phases = [k for k in search.numeric() if _is_phase(search, k)]
    if phases:
        found = f"phases ({search.table.columns[phases[0]].name!r})"
        return Problem(path, "a column with the time", found, help="give the unfolded light curve")
    for index in search.words():
        cell = search.table.columns[index].cell(0) if len(search.table.line) else ""
        if _DATE.match(cell):
            help = "turn the dates into Julian dates first"
            return Problem(path, "times as Julian dates", f"dates such as {cell!r}", help=help)
    return search.missing("time", "the time")


def _index_of(table: RawTable, role: str, wanted: str | int) -> int:
    names = table.names
    if isinstance(wanted, str) and wanted in names:
        return names.index(wanted)
    lower = [plain_name(name) for name in names]
    text = str(wanted).strip()
    if text.lower() in lower:
        return lower.index(text.lower())
    if text.isdigit() and 1 <= int(text) <= len(names):
        return int(text) - 1
    near = get_close_matches(text, names, n=3) or get_close_matches(text.lower(), lower, n=3)
    help = f"did you mean {' or '.join(map(repr, near))}?" if near else _listed(table)
    problem = Problem(table.path, f"a column {text!r} for {role}", "none", column=text, help=help)
    raise ColumnError(problem)


def _listed(table: RawTable) -> str:
    names = ", ".join(table.names[:30]) + (", ..." if len(table.names) > 30 else "")
    return f"the columns are {names}"
