"""The columns of radial velocities: time, the velocity of either star, errors, source."""

from __future__ import annotations

import re

from shadowscale.data.columns import (
    NOTHING_CHOSEN,
    Chosen,
    ColumnSearch,
    Guess,
    give_time,
    role_names_speak,
    search_with_time,
)
from shadowscale.data.looks import uncertainty_by_look
from shadowscale.data.raw_table import RawTable
from shadowscale.errors import ColumnError

ROLES = ("time", "rv1", "rv1_err", "rv2", "rv2_err", "source")

_VELOCITY = r"(rv|vr|v|vel|velocity|vrad|radvel|radial[ _]?velocity)"
_ALONE = r"(rv|vr|vel|velocity|vrad|radvel|radial[ _]?velocity)"  # v alone is rather a band
_STARS = {1: r"(1|a|pri|prim|primary)", 2: r"(2|b|sec|secondary)"}
_ERROR = r"(e|err|error|s|sig|sigma|unc|uncertainty)"
_UNIT_IN_NAME = r"([ _](k?ms|k?mps|k?m/s))?"
_VELOCITY_UNITS = re.compile(r"(?i)^k?m\s*(/\s*s|s\s*\^?(\*\*)?\s*-1|\.s-1)$")


def velocity_columns(table: RawTable, columns: Chosen = NOTHING_CHOSEN) -> tuple[Guess, ...]:
    """Time, the velocities of one or both stars, their errors and source, as far as the table has them.

    Parameters are those of `search_with_time`.

    Raises
    ------
    ColumnError
        If the time or all velocities are missing.
    """
    search = search_with_time(table, columns, ROLES, values=("rv1", "rv2"), by_place=_give_by_place)
    for star in (1, 2):
        _give_star(search, star)
    if not search.has("rv1", "rv2"):
        _give_by_unit(search)
    if not search.has("rv1", "rv2") and not role_names_speak(search):
        _give_by_place(search)
    if not search.has("rv1", "rv2"):
        raise ColumnError(search.missing("rv1", "a radial velocity (such as rv1)"))
    search.give_by_name("source")
    for star in (1, 2):
        _give_error_beside(search, star)
    return search.result()


def _give_star(search: ColumnSearch, star: int) -> None:
    """The velocity of a star and its error: rv1, v_a, RV_pri ...; star 1 also without a number."""
    number = _STARS[star]
    name = f"{_VELOCITY}[ _]?{number}"
    error = rf"{name}[ _-]?{_ERROR}|{_ERROR}[ _-]?{name}|{_ERROR}[ _]?{number}|{_VELOCITY}[ _]?{_ERROR}[ _]?{number}"
    _give_named(search, f"rv{star}", name)
    _give_named(search, f"rv{star}_err", error)
    if star == 1:
        _give_named(search, "rv1", _ALONE)
        _give_named(search, "rv1_err", rf"{_ALONE}[ _-]?{_ERROR}|{_ERROR}[ _-]?{_ALONE}|{_ERROR}")


def _give_named(search: ColumnSearch, role: str, pattern: str) -> None:
    found = search.named(f"({pattern}){_UNIT_IN_NAME}")
    what = "the error of the velocity" if role.endswith("_err") else "the velocity"
    reason = f"the name says {what} of star {role[2]}"
    search.give(role, found[0] if found else None, reason)


def _give_by_unit(search: ColumnSearch) -> None:
    found = [index for index in search.numeric() if _VELOCITY_UNITS.match(search.unit(index))]
    search.give("rv1", found[0] if found else None, "the unit is one of velocity")


def _give_by_place(search: ColumnSearch) -> None:
    """Without names: time, rv1, its error, rv2, its error, source."""
    give_time(search)
    rest = search.numeric(after=search.given["time"].index)
    roles: tuple[str, ...] = ("rv1", "rv1_err", "rv2", "rv2_err")
    if len(rest) in (2, 3) and not _is_error(search, *rest[:2]):
        roles = ("rv1", "rv2")
    for role, index in zip(roles, rest):
        search.give(role, index, "by its place after the time")
    words = search.words()
    search.give("source", words[0] if words else None, "a column of words")


def _give_error_beside(search: ColumnSearch, star: int) -> None:
    """An error that no name tells, but that stands behind the velocity and looks like one."""
    velocity = search.given.get(f"rv{star}")
    if velocity is None or velocity.index + 1 not in search.numeric():
        return
    if _is_error(search, velocity.index, velocity.index + 1):
        reason = f"stands behind {velocity.column!r}, and its numbers are small and not negative"
        search.give(f"rv{star}_err", velocity.index + 1, reason)


def _is_error(search: ColumnSearch, value: int, error: int) -> bool:
    columns = search.table.columns
    return bool(uncertainty_by_look(columns[value].numbers, columns[error].numbers))
