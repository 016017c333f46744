"""The figures of a solution: which there are, and how they are saved."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from io import BytesIO
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from shadowscale.sheet.figure_correlations import correlations_size, draw_correlations
from shadowscale.sheet.figure_data import Shown
from shadowscale.sheet.figure_frame import Place, drawing_style
from shadowscale.sheet.figure_light import (
    draw_eclipses,
    draw_light_curve,
    eclipses_size,
    light_curve_size,
)
from shadowscale.sheet.figure_system import draw_system, system_size
from shadowscale.sheet.figure_velocity import (
    draw_minima,
    draw_velocities,
    minima_size,
    velocities_size,
)

if TYPE_CHECKING:
    from matplotlib.figure import Figure

FORMATS = ("pdf", "svg", "png")
DOTS_AN_INCH = 200
POINTS = 72  # an inch


@dataclass(frozen=True)
class Drawing:
    """A figure: what draws it, its size [inches], whether a solution has it; `effort` puts slow ones first."""

    draw: Callable[[Place, Shown], None]
    size: Callable[[Shown], tuple[float, float]]
    possible: Callable[[Shown], bool]
    effort: int = 1


FIGURES: Mapping[str, Drawing] = MappingProxyType(
    {
        "system": Drawing(draw_system, system_size, lambda shown: bool(shown.eclipses)),
        "light_curve": Drawing(
            draw_light_curve, light_curve_size, lambda shown: bool(shown.bands), effort=3
        ),
        "eclipses": Drawing(
            draw_eclipses,
            eclipses_size,
            lambda shown: bool(shown.bands and shown.eclipses),
            effort=2,
        ),
        "velocities": Drawing(draw_velocities, velocities_size, lambda shown: bool(shown.stars)),
        "minima": Drawing(draw_minima, minima_size, lambda shown: len(shown.minima) > 1),
        "correlations": Drawing(
            draw_correlations,
            correlations_size,
            lambda shown: len(shown.correlation_names) > 1,
            effort=2,
        ),
    }
)


def possible_figures(shown: Shown) -> tuple[str, ...]:
    """The names of the figures that a solution has."""
    return tuple(name for name, drawing in FIGURES.items() if drawing.possible(shown))


def heights(shown: Shown) -> dict[str, float]:
    """The heights of a solution's figures [points, 1/72 inch]."""
    return {name: POINTS * FIGURES[name].size(shown)[1] for name in possible_figures(shown)}


def make_figure(name: str, shown: Shown) -> Figure:
    """One figure, alone; to be saved inside `drawing_style`."""
    from matplotlib.figure import Figure

    drawing = FIGURES[name]
    size = drawing.size(shown)
    figure = Figure(figsize=size, dpi=DOTS_AN_INCH)
    drawing.draw(Place(figure, 0.0, 0.0, *size), shown)
    return figure


def saved(figure: Figure, kind: str) -> bytes:
    """A figure as a file of one of `FORMATS`; the same figure gives the same bytes."""
    stream = BytesIO()
    metadata = {
        "pdf": {"CreationDate": None, "Producer": None, "Creator": "shadowscale"},
        "svg": {"Date": None, "Creator": "shadowscale"},
        "png": {"Software": "shadowscale"},
    }
    extra: Any = {"pil_kwargs": {"compress_level": 3}} if kind == "png" else {}
    figure.savefig(stream, format=kind, metadata=metadata[kind], **extra)
    content = stream.getvalue()
    if kind == "svg":  # pictures of points are to be shrunk smoothly, not by dropping pixels
        content = content.replace(b"image-rendering:crisp-edges;image-rendering:pixelated", b"")
    return content


def files_of(name: str, shown: Shown) -> dict[str, bytes]:
    """A figure as files of all `FORMATS`."""
    with drawing_style():
        figure = make_figure(name, shown)
        return {kind: saved(figure, kind) for kind in FORMATS}


def all_figures(shown: Shown, names: Iterable[str] | None = None) -> dict[str, dict[str, bytes]]:
    """Figures of a solution in every format (all where no names are given): name, format, bytes."""
    chosen = possible_figures(shown) if names is None else names
    return {name: files_of(name, shown) for name in chosen}


def warm_up() -> None:
    """Load what draws and its letters, so that the first figure does not wait for them."""
    from matplotlib.figure import Figure

    with drawing_style():
        figure = Figure(figsize=(1, 1))
        figure.add_axes((0.2, 0.2, 0.7, 0.7)).set_xlabel(r"$T_{\rm eff,1}$")
        for kind in FORMATS:
            saved(figure, kind)
