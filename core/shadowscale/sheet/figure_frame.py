"""What all figures share: a place measured in inches, colours, line widths, and how axes look.

Colours are those of Okabe & Ito (2008, Color Universal Design), which stay apart for every kind of
colour vision; shape and filling say the same once more.
"""

from __future__ import annotations

from collections.abc import Mapping
from contextlib import AbstractContextManager
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

INK, SOFT, FAINT = "#1f2328", "#767d86", "#c9ced6"  # a page may give these others
DARK = "#15181c"  # on light fillings, whatever the page
BLUE, VERMILLION, GREEN = "#0072b2", "#d55e00", "#009e73"
ORANGE, SKY, PURPLE, YELLOW = "#e69f00", "#56b4e9", "#cc79a7", "#f0e442"
STAR = {1: BLUE, 2: VERMILLION}
SHAPES = "osD^"
WIDTH = 6.69  # [inches] 17 cm, the text of an A4 page
LEFT, RIGHT = 0.62, 0.08  # [inches] margins of axes with labels

STYLE: Mapping[str, Any] = MappingProxyType(
    {
        "font.family": ["DejaVu Sans"],
        "font.size": 7.5,
        "mathtext.fontset": "dejavusans",
        "text.color": INK,
        "axes.labelcolor": INK,
        "axes.edgecolor": INK,
        "axes.linewidth": 0.6,
        "axes.labelsize": 8,
        "axes.facecolor": "none",
        "axes.unicode_minus": True,
        "axes.formatter.useoffset": False,
        "figure.facecolor": "white",
        "xtick.color": INK,
        "ytick.color": INK,
        "xtick.direction": "in",
        "ytick.direction": "in",
        "xtick.top": True,
        "ytick.right": True,
        "xtick.major.size": 3,
        "ytick.major.size": 3,
        "xtick.major.width": 0.6,
        "ytick.major.width": 0.6,
        "lines.linewidth": 1.0,
        "legend.frameon": False,
        "svg.fonttype": "path",
        "svg.hashsalt": "shadowscale",
        "pdf.fonttype": 3,
        "pdf.compression": 6,
        "path.simplify": True,
    }
)


def drawing_style() -> AbstractContextManager[None]:
    """The look of all figures while it lasts; matplotlib's own settings come back after."""
    from matplotlib import rc_context

    settings: Any = dict(STYLE)
    return rc_context(settings)


@dataclass(frozen=True)
class Place:
    """A rectangle of a figure [inches from its lower left corner] that a drawing fills."""

    figure: Figure
    left: float
    bottom: float
    width: float
    height: float

    def axes(self, left: float, bottom: float, width: float, height: float) -> Axes:
        """Axes at a position inside the place [inches]."""
        across, up = self.figure.get_size_inches()
        rectangle = (
            (self.left + left) / across,
            (self.bottom + bottom) / up,
            width / across,
            height / up,
        )
        return self.figure.add_axes(rectangle)


def label_band(axes: Axes, text: str, *, low: bool = False, bold: bool = True) -> None:
    """Words in the left corner of a panel, inside; `low` where the curve runs along the top."""
    y, side = (5.0, "bottom") if low else (-5.0, "top")
    axes.annotate(
        text,
        (0.0, 0.0 if low else 1.0),
        (6.0, y),
        xycoords="axes fraction",
        textcoords="offset points",
        va=side,
        weight="bold" if bold else "normal",
        zorder=6,
    )


def few_ticks(axes: Axes, *, x: int | None = None, y: int | None = None) -> None:
    """At most so many steps between ticks."""
    from matplotlib.ticker import MaxNLocator

    for axis, count in ((axes.xaxis, x), (axes.yaxis, y)):
        if count is not None:
            axis.set_major_locator(MaxNLocator(count, steps=[1, 2, 2.5, 5, 10]))


def no_x_labels(axes: Axes) -> None:
    """Ticks without numbers, for a panel above another."""
    axes.tick_params(labelbottom=False)
