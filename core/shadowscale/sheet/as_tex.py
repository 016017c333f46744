"""The sheet as a table for a paper: LaTeX with booktabs, errors rounded to two digits."""

from __future__ import annotations

import re

from shadowscale.quantities import decimals_for
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

    Held values are in italics.
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
    return " & ".join(cells) + r" \\"


def _coefficient(name: str) -> str:
    return rf"\{name}" if name == "alpha" else name


def _number(entry: Entry) -> str:
    estimate = entry.estimate
    errors = [error for error in (estimate.minus, estimate.plus) if error]
    if not errors:
        return rf"\mathit{{{estimate.value:.6g}}}"
    places = decimals_for(min(errors))
    low, high = (f"{error or 0.0:.{places}f}" for error in (estimate.minus, estimate.plus))
    value = f"{estimate.value:.{places}f}"
    return rf"{value} \pm {low}" if low == high else f"{value}^{{+{high}}}_{{-{low}}}"


def _escaped(text: str) -> str:
    return _SPECIAL.sub(r"\\\1", text)
