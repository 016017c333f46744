r"""Symbols of quantities and units as pieces of text: what a page needs of TeX, without TeX.

In the words of a report a symbol stands between two marks, `marked(r"r_1")`; whoever draws the words
splits them with `runs` and sets each piece upright or italic, on the line, below or above it.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType

BEGIN, END = "\x02", "\x03"
_TOKEN = re.compile(r"\\[A-Za-z]+|\\.|[{}_^]|.")
THIN = "\N{THIN SPACE}"

SIGNS: Mapping[str, str] = MappingProxyType(
    {
        r"\alpha": "\N{GREEK SMALL LETTER ALPHA}",
        r"\beta": "\N{GREEK SMALL LETTER BETA}",
        r"\gamma": "\N{GREEK SMALL LETTER GAMMA}",
        r"\Lambda": "\N{GREEK CAPITAL LETTER LAMDA}",
        r"\mu": "\N{GREEK SMALL LETTER MU}",
        r"\pi": "\N{GREEK SMALL LETTER PI}",
        r"\rho": "\N{GREEK SMALL LETTER RHO}",
        r"\sigma": "\N{GREEK SMALL LETTER SIGMA}",
        r"\chi": "\N{GREEK SMALL LETTER CHI}",
        r"\omega": "\N{GREEK SMALL LETTER OMEGA}",
        r"\phi": "\N{GREEK SMALL LETTER PHI}",
        r"\ell": "\N{SCRIPT SMALL L}",
        r"\Delta": "\N{GREEK CAPITAL LETTER DELTA}",
        r"\odot": "\N{SUN}",
        r"\langle": "\N{MATHEMATICAL LEFT ANGLE BRACKET}",
        r"\rangle": "\N{MATHEMATICAL RIGHT ANGLE BRACKET}",
        r"\pm": "\N{PLUS-MINUS SIGN}",
        r"\times": "\N{MULTIPLICATION SIGN}",
        r"\circ": "\N{DEGREE SIGN}",
        r"\log": "log" + THIN,
        r"\cos": THIN + "cos" + THIN,
        r"\sin": THIN + "sin" + THIN,
        r"\,": THIN,
    }
)
_UPRIGHT = frozenset(
    (r"\odot", r"\langle", r"\rangle", r"\pm", r"\times", r"\circ", r"\log", r"\cos", r"\sin")
)

GREEK: Mapping[str, str] = MappingProxyType(
    {
        "pi": SIGNS[r"\pi"],
        "sigma": SIGNS[r"\sigma"],
        "mu": SIGNS[r"\mu"],
        "alpha": SIGNS[r"\alpha"],
        "w": SIGNS[r"\omega"],
        "Lambda1": SIGNS[r"\Lambda"] + "1",
        "Lambda2": SIGNS[r"\Lambda"] + "2",
    }
)
HIGH = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")

UNITS: Mapping[str, str] = MappingProxyType(
    {
        "": "",
        "d": r"\rm d",
        "deg": r"\circ",
        "km/s": r"\rm km\,s^{-1}",
        "solMass": r"\rm M_\odot",
        "solRad": r"\rm R_\odot",
        "solLum": r"\rm L_\odot",
        "dex(cm/s2)": r"\rm cgs",
        "kg/m3": r"\rm kg\,m^{-3}",
        "K": r"\rm K",
        "mag": r"\rm mag",
        "pc": r"\rm pc",
    }
)


@dataclass(frozen=True)
class Run:
    """A piece of text in one style; level -1 is below the line, 1 above it."""

    text: str
    italic: bool = False
    level: int = 0


def marked(tex: str) -> str:
    """A symbol as it stands in the words of a report."""
    return f"{BEGIN}{tex}{END}" if tex else ""


def coefficient_sign(name: str) -> str:
    """A coefficient of limb darkening for the words of a report."""
    return marked(r"\alpha" if name == "alpha" else name) if name in ("alpha", "c") else name


def formula(text: str) -> str:
    """A formula of the register as people write it: Greek letters, powers as small figures."""
    for word, sign in GREEK.items():
        text = re.sub(rf"\b{word}\b", sign, text)
    return re.sub(r"\^(\d+)", lambda found: found[1].translate(HIGH), text)


def plain(text: str) -> str:
    """Text of a person or a file, without the marks of symbols; per cent signs stay with their numbers."""
    return text.replace(BEGIN, "").replace(END, "").replace(" %", "\N{NO-BREAK SPACE}%")


def unit_words(unit: str) -> str:
    """A unit of the register for the words of a report."""
    return marked(UNITS.get(unit, rf"\rm {unit}"))


def runs(words: str) -> tuple[Run, ...]:
    """The words of a report in pieces."""
    found: list[Run] = []
    for number, part in enumerate(re.split(f"[{BEGIN}{END}]", words)):
        if part:
            found += symbol_runs(part) if number % 2 else [Run(part)]
    return tuple(found)


@lru_cache(maxsize=512)
def symbol_runs(tex: str) -> tuple[Run, ...]:
    """A symbol in pieces; ValueError names a command that is not known."""
    found: list[Run] = []
    for run in _pieces(iter(_TOKEN.findall(tex)), level=0, upright=False):
        if found and (found[-1].italic, found[-1].level) == (run.italic, run.level):
            run = Run(found.pop().text + run.text, run.italic, run.level)
        found.append(run)
    return tuple(found)


def flat(words: str) -> str:
    """The words with symbols in one line of plain text: `M_1` becomes `M1`."""
    return "".join(run.text for run in runs(words))


def _pieces(tokens: Iterator[str], *, level: int, upright: bool) -> Iterator[Run]:
    """The pieces up to the end of the group."""
    shift = 0
    for token in tokens:
        if token == "}":
            return
        if token in "_^":
            shift = -1 if token == "_" else 1
            continue
        if token == "{":
            yield from _pieces(tokens, level=level or shift, upright=upright)
        elif token == r"\rm":
            upright = True
            continue
        elif token != " ":
            yield _piece(token, level=level or shift, upright=upright)
        shift = 0


def _piece(token: str, *, level: int, upright: bool) -> Run:
    if token.startswith("\\"):
        if token not in SIGNS:
            raise ValueError(f"{token!r} is not a sign that reports know")
        return Run(SIGNS[token], not upright and token not in _UPRIGHT and token != r"\,", level)
    text = "\N{MINUS SIGN}" if token == "-" else token
    return Run(text, token.isalpha() and not upright, level)
