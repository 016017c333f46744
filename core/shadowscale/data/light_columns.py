"""The columns of photometry: time, magnitude or flux, its error, and what else is there."""

from __future__ import annotations

import re

from shadowscale.data.bands import band_name
from shadowscale.data.columns import (
    NOTHING_CHOSEN,
    Chosen,
    ColumnSearch,
    Guess,
    give_time,
    role_names_speak,
    search_with_time,
)
from shadowscale.data.looks import light_by_look, uncertainty_by_look
from shadowscale.data.raw_table import RawTable
from shadowscale.errors import ColumnError, Problem

ROLES = ("time", "mag", "flux", "error", "band", "airmass", "quality", "exposure")

_FLUX_NAMES = (  # the earlier, the better
    (
        r"(rel(ative)?|norm(alised|alized)?)?[ _]?flux(_t1)?"
        r"|flux[ _]?(rel|norm|normalised|normalized)|f_?norm",
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
_KINDS_OF_MAG = r"(delta|diff|d|rel|inst|cal|std)"
_MAG_NAMES = (
    (r"mag(nitude)?s?", "the name says magnitude"),
    (
        rf"{_KINDS_OF_MAG}[ _-]?mag(nitude)?s?|mag(nitude)?[ _-]?{_KINDS_OF_MAG}",
        "the name says magnitude",
    ),
    (r"v[ _-]*-[ _-]*c1?|var[ _-]*-[ _-]*comp", "variable minus comparison star, in magnitudes"),
    (r".*mag.*", "the name speaks of magnitudes"),
    (r"m", "m stands for magnitude"),
)
_NOT_LIGHT = re.compile(
    r".*(err|unc|sig|std|background|bkg|bg|airmass|quality|flag|comp|check|chk|zero|ref|lim|over).*"
    r"|[es][ _].*"
)
_ERROR_WORDS = r"(e|err|errors?|s|sig|sigma|unc|uncertainty|stdev|sd)"
_LIGHT_WORDS = r"(mag|flux|m|f|light)"
_ERROR_NAMES = (
    rf"{_ERROR_WORDS}|{_LIGHT_WORDS}[ _]?{_ERROR_WORDS}|({_ERROR_WORDS}|d)[ _]?{_LIGHT_WORDS}"
    r"|rel_?flux_?err_?\w*"
)
_MAG_UNITS = re.compile(r"(?i)^(m?mag(nitude)?s?)(\(.*\))?$")
_FLUX_UNITS = re.compile(
    r"(?i)^(e-?/s|electrons?\s*/?\s*s(\*\*-1|-1|\^-1)?|[mu]?jy|(adu|ct|counts?)(/s)?|pp[mt]|erg.*|w.*m.*)$"
)


def photometry_columns(table: RawTable, columns: Chosen = NOTHING_CHOSEN) -> tuple[Guess, ...]:
    """Time, light (`mag` or `flux`), and whatever else of `ROLES` the table holds.

    Parameters are those of `search_with_time`.

    Raises
    ------
    ColumnError
        If the time or the light is missing, or several columns could be meant.
    """
    search = search_with_time(
        table, columns, ROLES, values=("mag", "flux"), by_place=_give_by_place
    )
    if not search.has("mag", "flux"):
        _give_light(search)
    _give_error(search)
    search.give_by_name("band", "airmass", "quality", "exposure")
    return search.result()


def _give_light(search: ColumnSearch) -> None:
    """By name; flux is preferred to magnitudes unless only the magnitudes have an error."""
    named = {role: _named_light(search, role) for role in ("flux", "mag") if search.open(role)}
    named = {role: found for role, found in named.items() if found[0]}
    if not named:
        _give_light_otherwise(search)
        return
    with_error = [
        role
        for role, (found, _) in named.items()
        if any(_own_error(search, index) is not None for index in found)
    ]
    role = with_error[0] if with_error else next(iter(named))
    found, reason = named[role]
    if len(named) > 1:
        only = "because only it has an error" if role == "mag" else "to magnitudes"
        reason = f"{reason}, preferred {only}"
    _give_only(search, role, found, reason=reason)


def _named_light(search: ColumnSearch, role: str) -> tuple[list[int], str]:
    """Columns whose names speak of that light, the plainest names only."""
    ranked, other = (_FLUX_NAMES, _MAG_UNITS) if role == "flux" else (_MAG_NAMES, _FLUX_UNITS)
    for pattern, reason in ranked:
        found = [
            index
            for index in search.named(pattern)
            if not _NOT_LIGHT.fullmatch(search.plain(index)) and not other.match(search.unit(index))
        ]
        if found:
            return found, reason
    return [], ""


def _give_light_otherwise(search: ColumnSearch) -> None:
    """A column named after a band, or with a unit of light."""
    names = {index: _short(search.table.columns[index].name) for index in search.numeric()}
    bands = [index for index, name in names.items() if band_name(name) is not None]
    if bands and search.open("mag"):
        _give_only(search, "mag", bands, reason="named after a band, so a magnitude")
        return
    for role, units in (("flux", _FLUX_UNITS), ("mag", _MAG_UNITS)):
        found = [
            index
            for index in search.numeric()
            if units.match(search.unit(index)) and not _NOT_LIGHT.fullmatch(search.plain(index))
        ]
        if found and search.open(role):
            _give_only(search, role, found, reason=f"the unit is one of {role}")
            return
    if role_names_speak(search):
        raise ColumnError(search.missing("mag", "a magnitude or flux"))
    _give_by_place(search)


def _short(name: str) -> str:
    return re.sub(r"\s*[\[({].*?[\])}]\s*", "", name).strip()


def _give_only(search: ColumnSearch, role: str, found: list[int], *, reason: str) -> None:
    """The one candidate; if there are several, the only one that has an error of its own."""
    if len(found) > 1:
        with_error = [index for index in found if _own_error(search, index) is not None]
        if len(with_error) != 1:
            names = [repr(search.table.columns[index].name) for index in found]
            first = search.table.columns[found[0]].name
            help = f"say which one is meant: {search.wish(role, first)}"
            problem = Problem(
                search.table.path, f"one column of {role}", ", ".join(names), help=help
            )
            raise ColumnError(problem)
        found, reason = with_error, reason + ", and it is the only one with an error"
    search.give(role, found[0], reason)


def _own_error(search: ColumnSearch, light: int) -> int | None:
    """The column whose name is the light's with a word for error."""
    plain = search.plain(light)
    name = re.escape(plain)
    base = re.escape(re.sub(r"[ _-]?(mag|flux)$", "", plain)) or name
    pattern = (
        rf"({name}|{base})[ _-]?{_ERROR_WORDS}|{_ERROR_WORDS}[ _-]?({name}|{base})"
        rf"|{base}[ _-]?{_ERROR_WORDS}[ _-]?\w*"
    )
    found = [index for index in search.named(pattern) if index != light]
    return found[0] if found else None


def _give_error(search: ColumnSearch) -> None:
    light = search.given.get("flux") or search.given["mag"]
    reason = f"the name is {light.column!r} with a word for error"
    search.give("error", _own_error(search, light.index), reason)
    other = "mag" if light.role == "flux" else "flux"
    found = [index for index in search.named(_ERROR_NAMES) if other not in search.plain(index)]
    search.give("error", found[0] if found else None, "the name says error")


def _give_by_place(search: ColumnSearch) -> None:
    """Without names: time, light, error, in this order; the look of the numbers says which light."""
    give_time(search)
    rest = search.numeric(after=search.given["time"].index)
    if not rest:
        raise ColumnError(search.missing("mag", "a magnitude or flux after the time"))
    numbers = search.table.columns[rest[0]].numbers
    role, reason = light_by_look(numbers)
    if not search.open(role):
        role, reason = ("mag" if role == "flux" else "flux"), "the user excludes the other kind"
    search.give(role, rest[0], f"follows the time, and {reason}")
    if len(rest) > 1:
        reason = uncertainty_by_look(numbers, search.table.columns[rest[1]].numbers)
        search.give("error", rest[1] if reason else None, reason)
