"""What the columns of a table mean: guessed by name, by unit, by place and look, each with its reason.

A role is what a column is for (`time`, `mag`, `rv1_error`, ...). Whoever calls may name the columns:
`{"time": "BJD", "mag": "V"}`; a number counts the columns from 1, an empty name says that the
table has no such column.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches

from shadowscale.data.bands import band_name
from shadowscale.data.looks import light_by_look, time_column, uncertainty_by_look
from shadowscale.data.raw_table import Column, RawTable
from shadowscale.errors import ColumnError, Problem, UsageError

PHOTOMETRY_ROLES = ("time", "mag", "flux", "error", "band", "airmass", "quality", "exposure")
VELOCITY_ROLES = ("time", "rv1", "rv1_err", "rv2", "rv2_err", "source")
SETTINGS = ("time_system", "unit")  # not columns: how the numbers of a column are to be taken

_TIME_NAMES = (  # the earlier, the better
    r"(tbjd|btjd|bkjd|bjd|bmjd|mbjd|rbjd|brjd)([ _-]*(tdb|utc|tt))?",
    r"(hjd|hmjd|mhjd|rhjd|hrjd)([ _-]*(tdb|utc|tt))?",
    r"(jd|mjd|rjd|tjd)([ _-]*(tdb|utc|tt))?|julian[ _]?da(te|y)",
    r"time([ _-]*(bjd|hjd|jd|mjd|btjd|bkjd)([ _-]*(tdb|utc|tt))?)?|(bjd|hjd|jd|mjd)[ _]?time|obs[ _]?time|mid[ _]?time|t[ _]?mid|times",
    r"date([ _-]?obs)?|epoch|t|day|days",
)
_FLUX_NAMES = (
    (
        r"flux|rel(ative)?[ _]?flux(_t1)?|norm(alised|alized)?[ _]?flux|flux[ _]?(rel|norm|normalised|normalized)|fnorm|f_norm",
        "the name says flux",
    ),
    (r"pdcsap_flux", "corrected aperture flux, preferred to the simple one"),
    (
        r"kspsap_flux|det_flux|corr(ected)?_?flux|flux_?corr(ected)?|fcor",
        "the name says corrected flux",
    ),
    (r"sap_flux|raw_?flux|flux_?raw|fraw", "simple aperture flux"),
    (r".*flux.*", "the name speaks of flux"),
    (r"f|light|intensity|counts?|cts|cnts|brightness", "the name says light"),
)
_MAG_NAMES = (
    (r"mag(nitude)?s?", "the name says magnitude"),
    (
        r"(delta|diff|d|rel|inst|cal|std)[ _-]?mag(nitude)?s?|mag(nitude)?[ _-]?(diff|rel|inst|cal|std)",
        "the name says magnitude",
    ),
    (r"v[ _-]*-[ _-]*c1?|var[ _-]*-[ _-]*comp", "variable minus comparison star, in magnitudes"),
    (r".*mag.*", "the name speaks of magnitudes"),
    (r"m", "m stands for magnitude"),
)
_NOT_LIGHT = re.compile(
    r".*(err|unc|sig|std|background|bkg|bg|airmass|quality|flag|comp|check|chk|zero|ref|lim|over).*|e[ _].*|s[ _].*"
)
_ERROR_NAMES = r"e|s|err(or)?s?|sig(ma)?|unc(ertainty)?|stdev|sd|(mag|flux|m|f|rel_?flux|light)[ _]?(err(or)?|unc(ertainty)?|sig(ma)?)(_t1)?|(e|err(or)?|sig(ma)?|s|unc|d)[ _]?(mag|flux|m|f)|e_?(mag|flux)|rel_?flux_?err_?\w*"
_VELOCITY_NAMES = (r"(rv|vr|v|vel|velocity|vrad|radvel|radial[ _]?velocity)", r"(rv|vr|vel|velocity|vrad|radial[ _]?velocity)")  # fmt: skip
_STARS = {1: r"(1|a|pri|prim|primary)", 2: r"(2|b|sec|secondary)"}
_ROLE_NAMES = {
    "band": r"(photometric[ _]?)?(band|filter|filt|fil|passband|bandpass|flt)([ _]?(code|name))?",
    "airmass": r"air[ _]?mass|amass|am|secz|x",
    "quality": r"(sap_|d|k_)?quality(_?flag)?|qual(ity)?_?flags?|(cat)?flags?|qual|q",
    "exposure": r"exp(osure)?([ _]?time)?|exptime|t_?exp|int(egration)?[ _]?time|cadence_s",
    "source": r"source|instrument|instr?|telescope|tel|site|observatory|spectrograph|ref(erence)?|spec",
}
_TIME_UNITS = re.compile(r"(?i)^(d|days?|jd|bjd|hjd|mjd|.*\b[bhm]?jd\b.*)$")
_MAG_UNITS = re.compile(r"(?i)^(m?mag(nitude)?s?)(\(.*\))?$")
_FLUX_UNITS = re.compile(
    r"(?i)^(e-?/s|electrons?\s*/?\s*s(\*\*-1|-1|\^-1)?|(m|u)?jy|adu(/s)?|ct(/s)?|counts?(/s)?|ppm|ppt|erg.*|w.*m.*)$"
)
_VELOCITY_UNITS = re.compile(r"(?i)^k?m\s*(/\s*s|s\s*\^?(\*\*)?\s*-1|\.s-1)$")


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


def photometry_columns(table: RawTable, columns: Mapping[str, str | int] = {}) -> tuple[Guess, ...]:
    """Time, light (`mag` or `flux`), and whatever else of `PHOTOMETRY_ROLES` the table holds.

    Raises
    ------
    ColumnError
        If the time or the light is missing, or several columns could be meant.
    """
    chosen = _chosen(table, columns, PHOTOMETRY_ROLES)
    free = _Free(table, chosen, columns)
    if not table.named and "mag" not in chosen and "flux" not in chosen:
        _by_place(table, chosen, free)
    if "time" not in chosen:
        chosen["time"] = _time(table, free)
    if "mag" not in chosen and "flux" not in chosen:
        light = _light(table, free)
        chosen[light.role] = light
    light = chosen.get("flux") or chosen["mag"]
    _add(chosen, free, "error", _light_error(table, free, light))
    for role in ("band", "airmass", "quality", "exposure"):
        _add(chosen, free, role, _by_name(table, free, role))
    return tuple(chosen[role] for role in PHOTOMETRY_ROLES if role in chosen)


def velocity_columns(table: RawTable, columns: Mapping[str, str | int] = {}) -> tuple[Guess, ...]:
    """Time, the velocities of one or both stars, their errors and source, as far as the table has them.

    Raises
    ------
    ColumnError
        If the time or all velocities are missing.
    """
    chosen = _chosen(table, columns, VELOCITY_ROLES)
    free = _Free(table, chosen, columns)
    if not table.named and "rv1" not in chosen and "rv2" not in chosen:
        _velocities_by_place(table, chosen, free)
    if "time" not in chosen:
        chosen["time"] = _time(table, free)
    for star in (1, 2):
        _add(chosen, free, f"rv{star}_err", _velocity(table, free, star, error=True))
        _add(chosen, free, f"rv{star}", _velocity(table, free, star, error=False))
    if "rv1" not in chosen and "rv2" not in chosen:
        raise ColumnError(_no_column(table, "rv1", "a radial velocity (such as rv1)"))
    _add(chosen, free, "source", _by_name(table, free, "source"))
    return tuple(chosen[role] for role in VELOCITY_ROLES if role in chosen)


class _Free:
    """Which columns still have no role, and which roles are closed by the caller."""

    def __init__(
        self, table: RawTable, chosen: Mapping[str, Guess], columns: Mapping[str, str | int]
    ) -> None:
        self.taken = {guess.index for guess in chosen.values()}
        self.closed = {role for role, column in columns.items() if column == ""}

    def indices(self, table: RawTable) -> list[int]:
        """The columns without a role."""
        return [index for index in range(len(table.columns)) if index not in self.taken]


def _add(chosen: dict[str, Guess], free: _Free, role: str, guess: Guess | None) -> None:
    if guess is not None and role not in chosen and role not in free.closed:
        chosen[role] = guess
        free.taken.add(guess.index)


def _guess(table: RawTable, role: str, index: int, reason: str) -> Guess:
    column = table.columns[index]
    return Guess(role, column.name, index, reason, unit_of(column))


def _chosen(
    table: RawTable, columns: Mapping[str, str | int], roles: tuple[str, ...]
) -> dict[str, Guess]:
    chosen = {}
    for role, wanted in columns.items():
        if role in SETTINGS:
            continue
        if role not in roles:
            raise UsageError("columns", role, roles)
        if wanted != "":
            index = _index_of(table, role, wanted)
            chosen[role] = _guess(table, role, index, "named by the user")
    return chosen


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


def _no_column(table: RawTable, role: str, expected: str) -> Problem:
    help = f'{_listed(table)}; say which one it is: columns={{"{role}": ...}}'
    return Problem(table.path, f"a column with {expected}", "none that looks like it", help=help)


def _matching(table: RawTable, free: _Free, pattern: str) -> list[int]:
    return [
        index
        for index in free.indices(table)
        if re.fullmatch(pattern, plain_name(table.columns[index].name))
    ]


def _by_name(table: RawTable, free: _Free, role: str) -> Guess | None:
    found = _matching(table, free, _ROLE_NAMES[role])
    return _guess(table, role, found[0], f"the name says {role}") if found else None


def _time(table: RawTable, free: _Free) -> Guess:
    offset = r"([ _]*[-(+]?[ _]*24\d{5}(\.\d+)?[ _)+]*)?"
    if "time" not in free.closed:
        for rank, pattern in enumerate(_TIME_NAMES):
            found = _matching(table, free, f"({pattern}){offset}")
            found = [index for index in found if not table.columns[index].is_text]
            if found:
                return _taken(
                    table, free, "time", found[0], _time_reason(table, free, found[0], rank)
                )
        for index in free.indices(table):
            if _TIME_UNITS.match(unit_of(table.columns[index])):
                return _taken(table, free, "time", index, "the unit is one of time")
        found_by_look = time_column(table, free.indices(table))
        if found_by_look is not None:
            return _taken(table, free, "time", *found_by_look)
    raise ColumnError(_no_column(table, "time", "the time"))


def _time_reason(table: RawTable, free: _Free, index: int, rank: int) -> str:
    later = [
        table.columns[other].name
        for pattern in _TIME_NAMES[rank:]
        for other in _matching(table, free, pattern)
        if other != index
    ]
    reason = "the name says time"
    return reason + (f"; preferred to {', '.join(dict.fromkeys(later))}" if later else "")


def _taken(table: RawTable, free: _Free, role: str, index: int, reason: str) -> Guess:
    free.taken.add(index)
    return _guess(table, role, index, reason)


def _light(table: RawTable, free: _Free) -> Guess:
    """The column of light by its name, else otherwise.

    Flux is preferred to magnitudes unless only the magnitudes have an error; a plain name to a longer one.
    """
    named = {role: _named_light(table, free, role) for role in ("flux", "mag")}
    named = {role: found for role, found in named.items() if found[0] and role not in free.closed}
    if not named:
        return _light_otherwise(table, free)
    with_error = [
        role
        for role, (found, _) in named.items()
        if any(_own_error(table, free, index) is not None for index in found)
    ]
    role = with_error[0] if with_error else next(iter(named))
    found, reason = named[role]
    if len(named) > 1:
        reason += (
            ", preferred because only it has an error"
            if role == "mag"
            else ", preferred to magnitudes"
        )
    return _only(table, free, role, found, reason)


def _named_light(table: RawTable, free: _Free, role: str) -> tuple[list[int], str]:
    """Columns whose names speak of that light, the plainest names only."""
    ranked, other = (_FLUX_NAMES, _MAG_UNITS) if role == "flux" else (_MAG_NAMES, _FLUX_UNITS)
    for pattern, reason in ranked:
        found = [
            index
            for index in _matching(table, free, pattern)
            if not _NOT_LIGHT.fullmatch(plain_name(table.columns[index].name))
            and not table.columns[index].is_text
            and not other.match(unit_of(table.columns[index]))
        ]
        if found:
            return found, reason
    return [], ""


def _light_otherwise(table: RawTable, free: _Free) -> Guess:
    """A column named after a band, or with a unit of light, or that looks like light."""
    numeric = [index for index in free.indices(table) if not table.columns[index].is_text]
    named = [i for i in numeric if band_name(_short(table.columns[i].name)) is not None]
    if named and "mag" not in free.closed:
        return _only(table, free, "mag", named, "named after a band, so a magnitude")
    for role, units in (("flux", _FLUX_UNITS), ("mag", _MAG_UNITS)):
        found = [
            index
            for index in numeric
            if units.match(unit_of(table.columns[index]))
            and not re.match(r".*(err|unc|sig)|e_", plain_name(table.columns[index].name))
        ]
        if found and role not in free.closed:
            return _only(table, free, role, found, f"the unit is one of {role}")
    raise ColumnError(_no_column(table, "mag", "a magnitude or flux"))


def _short(name: str) -> str:
    return re.sub(r"\s*[\[({].*?[\])}]\s*", "", name).strip()


def _only(table: RawTable, free: _Free, role: str, found: list[int], reason: str) -> Guess:
    """The one candidate; if there are several, the only one that has an error of its own."""
    if len(found) > 1:
        with_error = [i for i in found if _own_error(table, free, i) is not None]
        if len(with_error) != 1:
            names = ", ".join(repr(table.columns[index].name) for index in found)
            help = f'say which one is meant: columns={{"{role}": {table.columns[found[0]].name!r}}}'
            raise ColumnError(Problem(table.path, f"one column of {role}", names, help=help))
        found, reason = with_error, reason + ", and it is the only one with an error"
    return _taken(table, free, role, found[0], reason)


def _own_error(table: RawTable, free: _Free, light: int) -> int | None:
    """The column whose name is the light's with a word for error."""
    name = re.escape(plain_name(table.columns[light].name))
    base = (
        re.escape(re.sub(r"[ _-]?(mag|flux)$", "", plain_name(table.columns[light].name))) or name
    )
    words = r"(e|err|error|s|sig|sigma|unc|uncertainty|stdev)"
    pattern = (
        rf"({name}|{base})[ _-]?{words}|{words}[ _-]?({name}|{base})|({base})[ _-]?{words}[ _-]?\w*"
    )
    found = [i for i in _matching(table, free, pattern) if i != light]
    found = [i for i in found if not table.columns[i].is_text]
    return found[0] if found else None


def _light_error(table: RawTable, free: _Free, light: Guess) -> Guess | None:
    own = _own_error(table, free, light.index)
    if own is not None:
        return _guess(table, "error", own, f"the name is {light.column!r} with a word for error")
    other = "mag" if light.role == "flux" else "flux"
    found = [
        index
        for index in _matching(table, free, _ERROR_NAMES)
        if not table.columns[index].is_text and other not in plain_name(table.columns[index].name)
    ]
    return _guess(table, "error", found[0], "the name says error") if found else None


def _by_place(table: RawTable, chosen: dict[str, Guess], free: _Free) -> None:
    """Without names: time, light, error, in this order; the look of the numbers says which light."""
    if "time" not in chosen:
        found = time_column(table, free.indices(table))
        if found is not None:
            chosen["time"] = _taken(table, free, "time", *found)
    after = chosen["time"].index if "time" in chosen else -1
    rest = [i for i in free.indices(table) if i > after and not table.columns[i].is_text]
    if not rest:
        raise ColumnError(_no_column(table, "mag", "a magnitude or flux after the time"))
    role, reason = light_by_look(table.columns[rest[0]].numbers)
    if role in free.closed:
        role = "mag" if role == "flux" else "flux"
    chosen[role] = _taken(table, free, role, rest[0], f"follows the time, and {reason}")
    if len(rest) > 1 and "error" not in chosen:
        reason = uncertainty_by_look(table.columns[rest[0]].numbers, table.columns[rest[1]].numbers)
        if reason:
            _add(chosen, free, "error", _guess(table, "error", rest[1], reason))


def _velocities_by_place(table: RawTable, chosen: dict[str, Guess], free: _Free) -> None:
    """Without names: time, rv1, its error, rv2, its error, source."""
    if "time" not in chosen:
        found = time_column(table, free.indices(table))
        if found is not None:
            chosen["time"] = _taken(table, free, "time", *found)
    after = chosen["time"].index if "time" in chosen else -1
    rest = [i for i in free.indices(table) if i > after and not table.columns[i].is_text]
    roles: tuple[str, ...] = ("rv1", "rv1_err", "rv2", "rv2_err")
    if len(rest) in (2, 3) and not _is_error(table, rest[0], rest[1]):
        roles = ("rv1", "rv2")
    for role, index in zip(roles, rest):
        _add(chosen, free, role, _guess(table, role, index, "by its place after the time"))
    words = [index for index in free.indices(table) if table.columns[index].is_text]
    if words:
        _add(chosen, free, "source", _guess(table, "source", words[0], "a column of words"))


def _is_error(table: RawTable, value: int, error: int) -> bool:
    return bool(uncertainty_by_look(table.columns[value].numbers, table.columns[error].numbers))


def _velocity(table: RawTable, free: _Free, star: int, *, error: bool) -> Guess | None:
    """The velocity (or its error) of a star: rv1, v_a, RV_pri ...; star 1 also without a number."""
    name = f"{_VELOCITY_NAMES[0]}[ _]?{_STARS[star]}"
    bare = [_VELOCITY_NAMES[1]] if star == 1 else []
    unit = r"([ _](k?ms|k?mps|k?m/s))?"
    words = r"(e|err|error|s|sig|sigma|unc|uncertainty)"
    number = _STARS[star]
    for pattern in [name, *bare]:
        if error:
            pattern = rf"{pattern}[ _-]?{words}|{words}[ _-]?{pattern}" + (
                rf"|{words}[ _]?{number}|{_VELOCITY_NAMES[0]}[ _]?{words}[ _]?{number}"
                if pattern == name
                else rf"|{words}"
            )
        pattern = f"({pattern}){unit}"
        found = [i for i in _matching(table, free, pattern) if not table.columns[i].is_text]
        if found:
            role = f"rv{star}" + ("_err" if error else "")
            what = "the error of the velocity" if error else "the velocity"
            return _guess(table, role, found[0], f"the name says {what} of star {star}")
    return _velocity_by_unit(table, free, star) if star == 1 and not error else None


def _velocity_by_unit(table: RawTable, free: _Free, star: int) -> Guess | None:
    found = [
        index
        for index in free.indices(table)
        if _VELOCITY_UNITS.match(unit_of(table.columns[index]))
    ]
    return _guess(table, f"rv{star}", found[0], "the unit is one of velocity") if found else None
