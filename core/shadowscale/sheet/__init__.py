"""The fitted-parameter sheet and its renderings."""

from collections.abc import Callable, Mapping
from types import MappingProxyType

from shadowscale.sheet.as_csv import as_csv
from shadowscale.sheet.as_ecsv import as_ecsv
from shadowscale.sheet.as_json import as_json
from shadowscale.sheet.as_tex import as_tex
from shadowscale.sheet.curves import light_curve, velocity_curve
from shadowscale.sheet.sheet import Entry, Sheet, make_sheet

# File name to what makes its text.
RENDERINGS: Mapping[str, Callable[[Sheet], str]] = MappingProxyType(
    {
        "sheet.json": as_json,
        "sheet.csv": as_csv,
        "sheet.tex": as_tex,
        "sheet.ecsv": as_ecsv,
    }
)

__all__ = [
    "RENDERINGS",
    "Entry",
    "Sheet",
    "as_csv",
    "as_ecsv",
    "as_json",
    "as_tex",
    "light_curve",
    "make_sheet",
    "velocity_curve",
]
