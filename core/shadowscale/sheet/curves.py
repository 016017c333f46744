"""Every input row with what the solution says of it: `light_curve.csv`, `velocity_curve.csv`.

Rows stand in the order of the files, so that nothing can be lost between a file and its curve:
a row that takes no part has `used` 0 and the reason, a line that could not be read has only those.
"""

from __future__ import annotations

import csv
from collections.abc import Iterable, Mapping, Sequence
from io import StringIO
from typing import Any

import numpy as np

from shadowscale.data.photometry import Floats, Photometry, UnreadableRow
from shadowscale.data.velocities import Velocities
from shadowscale.fit.solution import Solution
from shadowscale.sheet.file_names import file_names

LIGHT_HEADER = (
    "file",
    "line",
    "time",
    "band",
    "value",
    "value_error",
    "phase",
    "observed",
    "error",
    "model",
    "residual",
    "level",
    "used",
    "why",
)
_STAR = ("rv{}", "rv{}_err", "model{}", "residual{}", "used{}", "why{}")
VELOCITY_HEADER = (
    "file",
    "line",
    "time",
    "source",
    "phase",
    *(name.format(1) for name in _STAR),
    *(name.format(2) for name in _STAR),
)


def light_curve(solution: Solution, photometry: Photometry) -> str:
    """All rows of the photometry as text.

    `value` is what the file says; `observed`, `error`, `model`, `residual` and `level` are fluxes
    in units of the band's typical flux, `phase` is in cycles from mid primary eclipse.
    """
    result = solution.light
    used, why = _fate(result.why.tolist(), result.reasons)
    names = file_names(file.path for file in photometry.files)
    files = [names[file.path] for file in photometry.files]
    columns = (
        [files[number] for number in photometry.file.tolist()],
        photometry.line.tolist(),
        photometry.time.tolist(),
        [photometry.bands[number] for number in photometry.band.tolist()],
        _cells(photometry.value),
        _cells(photometry.value_error),
        _cells(result.phase),
        _cells(photometry.flux),
        _cells(photometry.flux_error),
        _cells(result.model),
        _cells(photometry.flux - result.model),
        _cells(result.level),
        used,
        why,
    )
    return _written(LIGHT_HEADER, columns, photometry.unreadable, names)


def velocity_curve(solution: Solution, velocities: Velocities) -> str:
    """All rows of the velocities as text [km/s]; the model includes gamma and the source's offset."""
    result = solution.velocity
    if result is None:
        raise ValueError("the solution has no velocities")
    names = file_names(file.path for file in velocities.files)
    files = [names[file.path] for file in velocities.files]
    stars: list[Sequence[Any]] = []
    for observed, error, model, codes in (
        (velocities.rv1, velocities.rv1_error, result.model1, result.why1),
        (velocities.rv2, velocities.rv2_error, result.model2, result.why2),
    ):
        used, why = _fate(codes.tolist(), result.reasons)
        stars += [_cells(item) for item in (observed, error, model, observed - model)]
        stars += [used, why]
    columns = (
        [files[number] for number in velocities.file.tolist()],
        velocities.line.tolist(),
        velocities.time.tolist(),
        [velocities.sources[number] for number in velocities.source.tolist()],
        _cells(result.phase),
        *stars,
    )
    return _written(VELOCITY_HEADER, columns, velocities.unreadable, names)


def _fate(codes: list[int], reasons: tuple[str, ...]) -> tuple[list[int], list[str]]:
    """Whether each row is used, and why not."""
    used = [int(code == 0) for code in codes]
    return used, ["" if code == 0 else reasons[code] for code in codes]


def _cells(numbers: Floats) -> list[float | str]:
    """Numbers as they are written, nothing where there is none."""
    found: list[float | str] = numbers.tolist()
    for row in np.flatnonzero(np.isnan(numbers)):
        found[row] = ""
    return found


def _written(
    header: tuple[str, ...],
    columns: Sequence[Sequence[Any]],
    unreadable: Iterable[UnreadableRow],
    names: Mapping[str, str],
) -> str:
    """The table as text, lines that could not be read put where they stood."""
    rows: list[tuple[Any, ...]] = list(zip(*columns))
    rows += [_unreadable(row, names.get(row.file, row.file), header) for row in unreadable]
    order = {name: number for number, name in enumerate(names.values())}
    rows.sort(key=lambda row: (order.get(row[0], len(order)), row[1]))
    text = StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    return text.getvalue()


def _unreadable(row: UnreadableRow, file: str, header: tuple[str, ...]) -> tuple[Any, ...]:
    known: dict[str, Any] = {"file": file, "line": row.line}
    for name in header:
        if name.startswith("used"):
            known[name] = 0
        elif name.startswith("why"):
            known[name] = f"unreadable: {row.reason}"
    return tuple(known.get(name, "") for name in header)
