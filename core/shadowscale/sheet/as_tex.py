"""The sheet as a table for a paper: LaTeX with booktabs, errors rounded to two digits."""

from __future__ import annotations

import re

from shadowscale.quantities import rounded
from shadowscale.sheet.sheet import Entry, Sheet

UNITS = {
    "": "",
    "d": r"\mathrm{d}",
    "deg": r"{}^{\circ}",
    "km/s": r"\mathrm{km\,s^{-1}}",
    "solRad": r"\mathcal{R}^{\mathrm N}_{\odot}",
    "solMass": r"\mathcal{M}^{\mathrm N}_{\odot}",
    "solLum": r"\mathcal{L}^{\mathrm N}_{\odot}",
    "dex(cm/s2)": r"\log\,\mathrm{cm\,s^{-2}}",
    "kg/m3": r"\mathrm{kg\,m^{-3}}",
    "K": r"\mathrm{K}",
    "mag": r"\mathrm{mag}",
    "pc": r"\mathrm{pc}",
}
_SPECIAL = re.compile(r"([&%$#_{}])")


def as_tex(sheet: Sheet) -> str:
    """The numbers as a `tabular` and one more for each band and source; needs `booktabs`.

    Held values are in italics. What each number means, its prior and the source of its formula stand
    behind it as a comment.
    """
    made = sheet.provenance
    lines = [
        f"% {made.program}: {' '.join(made.command.split())}".rstrip(": "),
        f"% times in {made.time_scale}; errors are 68.3 % limits; solar units are nominal (IAU 2015 B3)",
        r"\begin{tabular}{llll}",
        r"\toprule",
        r"Quantity & Value & Unit & How \\",
        r"\midrule",
        *map(_row, sheet.quantities.values()),
    ]
    for label, band in sheet.bands.items():
        limb = [entry for star in band.limb_darkening.values() for entry in star.values()]
        lines += _section(f"Band {label}", [*band.quantities.values(), *limb])
    for label, entries in sheet.sources.items():
        lines += _section(f"Velocities from {label}", list(entries.values()))
    return "\n".join([*lines, r"\bottomrule", r"\end{tabular}"]) + "\n"


def _section(title: str, entries: list[Entry]) -> list[str]:
    """A table of its own, since a `tabular` cannot go over the end of a page."""
    heading = rf"\multicolumn{{4}}{{l}}{{{_escaped(title)}}} \\"
    end = [r"\bottomrule", r"\end{tabular}", "", r"\medskip", "", r"\begin{tabular}{llll}"]
    return [*end, r"\toprule", heading, r"\midrule", *map(_row, entries)]


def _row(entry: Entry) -> str:
    quantity, estimate = entry.quantity, entry.estimate
    symbol = quantity.tex + (rf"\,({_coefficient(entry.name)})" if entry.name else "")
    unit = UNITS.get(quantity.unit, rf"\mathrm{{{_escaped(quantity.unit)}}}")
    cells = (f"${symbol}$", f"${_number(entry)}$", f"${unit}$" if unit else "", estimate.how)
    return " & ".join(cells) + r" \\ % " + _remark(entry)


def _remark(entry: Entry) -> str:
    """What the table has no room for, as a comment: meaning, prior, source of the formula."""
    words = [entry.meaning]
    if entry.estimate.prior is not None:
        words.append("prior {:g} +- {:g}".format(*entry.estimate.prior))
    if entry.source:
        words.append(f"formula: {entry.source}")
    return "; ".join(" ".join(each.split()) for each in words)


def _coefficient(name: str) -> str:
    return rf"\{name}" if name == "alpha" else name


def _number(entry: Entry) -> str:
    estimate = entry.estimate
    found = rounded(estimate.value, estimate.minus, estimate.plus)
    if found is None:
        return rf"\mathit{{{estimate.value:.6g}}}"
    value, low, high = found
    return rf"{value} \pm {low}" if low == high else f"{value}^{{+{high}}}_{{-{low}}}"


def _escaped(text: str) -> str:
    return _SPECIAL.sub(r"\\\1", text)
