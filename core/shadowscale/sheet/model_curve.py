"""The smooth model over one cycle: `model_curve.csv`."""

from __future__ import annotations

import csv
from io import StringIO

from shadowscale.fit.solution import Solution
from shadowscale.sheet.showing import cycle_curves


def model_curve(solution: Solution) -> str:
    """Phase [cycles], light of each band (1 at the level), velocities of the measured stars [km/s].

    Rows are closer inside the eclipses.
    """
    curves = cycle_curves(solution)
    columns = {"phase": curves.phases}
    columns |= {f"light[{band}]": light for band, light in curves.light.items()}
    stars = {"rv1": curves.rv1, "rv2": curves.rv2}
    columns |= {name: speed for name, speed in stars.items() if speed is not None}
    text = StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    writer.writerows(zip(*(column.tolist() for column in columns.values()), strict=True))
    return text.getvalue()
