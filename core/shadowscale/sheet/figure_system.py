"""The system to scale."""

from __future__ import annotations

from collections.abc import Mapping
from math import cos, pi, radians
from typing import TYPE_CHECKING, Any

import numpy as np

from shadowscale.sheet.figure_data import Floats, Shown
from shadowscale.sheet.figure_frame import (
    DARK,
    INK,
    SOFT,
    STAR,
    WIDTH,
    YELLOW,
    Place,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes

HEIGHT, TITLE = 3.0, 0.22  # [inches]
FILL = {1: "#9cc7e2", 2: "#f0b78c"}


def system_size(shown: Shown) -> tuple[float, float]:
    """Width and height [inches]."""
    return WIDTH, HEIGHT


def draw_system(place: Place, shown: Shown) -> None:
    """From above with both orbits, and both eclipses as they are seen, all to scale."""
    values = shown.values
    above = 3.62
    _above(place, above, values)
    number = len(shown.eclipses)
    left = above + 0.1
    height = (place.height - 0.05) / max(number, 1)
    for row, eclipse in enumerate(shown.eclipses):
        bottom = place.height - (row + 1) * height
        room = (place.width - left, height - TITLE)
        axes = _bare(place.axes(left, bottom, *room))
        _seen(axes, eclipse, values, room=room)
        name = "primary" if eclipse == 1 else "secondary"
        axes.set_title(f"{name} eclipse, as seen", fontsize=7.5, pad=3)


def _above(place: Place, width: float, values: Mapping[str, float]) -> None:
    height = place.height - TITLE - 0.05
    axes = _bare(place.axes(0.0, 0.0, width, height))
    axes.set_title("from above, to scale", fontsize=7.5, pad=3)
    ratio = values.get("mass_ratio")
    shares = (0.0, 1.0) if ratio is None else (ratio / (1 + ratio), 1 / (1 + ratio))
    e_cos, e_sin = values["ecosw"], values["esinw"]
    radii = {1: values["r1"], 2: values["r2"]}
    angle = np.linspace(0, 2 * pi, 361)
    reach = 0.0
    discs = []
    for star, share, sign in ((1, shares[0], 1), (2, shares[1], -1)):
        x, z = _orbit(angle, e_cos, e_sin)
        axes.plot(
            sign * share * x,
            sign * share * z,
            color=STAR[star],
            linewidth=0.9,
            linestyle="-" if star == 1 else (0, (5, 1.5)),
            zorder=1,
        )
        ahead = float(sign * share * x[0])
        axes.plot(ahead, 0.0, "^" if star == 1 else "v", color=STAR[star], markersize=4)
        x0, z0 = _orbit(np.array([pi / 2]), e_cos, e_sin)
        at = (float(sign * share * x0[0]), float(sign * share * z0[0]))
        discs.append((at, star))
        reach = max(reach, share * float(np.hypot(x, z).max()) + radii[star])
    for at, star in discs:
        _disc(axes, at, radii[star], star, beside=radii[star] < 0.06 * reach)
    axes.plot(0, 0, "+", color=INK, markersize=5, markeredgewidth=0.6, zorder=1)
    half = reach * width / height
    axes.set_xlim(-half, half)
    axes.set_ylim(-1.32 * reach, 1.02 * reach)
    axes.set_aspect("equal", adjustable="box", anchor="C")
    low = -1.30 * reach
    axes.annotate(
        "",
        xy=(0, low),
        xytext=(0, low + 0.2 * reach),
        arrowprops={
            "arrowstyle": "-|>",
            "color": INK,
            "linewidth": 0.7,
            "shrinkA": 0,
            "shrinkB": 0,
        },
    )
    axes.text(0.05 * reach, low + 0.05 * reach, "to the observer", fontsize=7, va="bottom")
    _sun(axes, values, corner=(-half, -1.3 * reach), reach=reach)


def _orbit(longitude: Floats, ecosw: float, esinw: float) -> tuple[Floats, Floats]:
    """Star 1 in its plane against the centre of mass [a]; z away from the observer."""
    distance = (1 - ecosw**2 - esinw**2) / (
        1 + ecosw * np.cos(longitude) + esinw * np.sin(longitude)
    )
    return distance * np.cos(longitude), distance * np.sin(longitude)


def _sun(
    axes: Axes, values: Mapping[str, float], *, corner: tuple[float, float], reach: float
) -> None:
    """The Sun at the same scale, and a length."""
    x, y = corner[0] + 0.06 * reach, corner[1] + 0.04 * reach
    if "a" not in values:
        _length(axes, (x, y), 0.5, "half the semi-major axis", reach=reach)
        return
    radius = 1 / values["a"]
    axes.add_patch(_circle((x + radius, y + radius), radius, YELLOW))
    axes.text(x + 2 * radius + 0.04 * reach, y + radius, "the Sun", fontsize=7, va="center")
    length = _round_length(0.5 * reach * values["a"])
    above = y + max(2 * radius + 0.1 * reach, 0.16 * reach)
    _length(axes, (x, above), length / values["a"], f"{length:g} solar radii", reach=reach)


def _length(
    axes: Axes, at: tuple[float, float], length: float, words: str, *, reach: float
) -> None:
    """A bar of a length, with its words above."""
    axes.plot([at[0], at[0] + length], [at[1]] * 2, color=INK, linewidth=0.9)
    axes.text(at[0], at[1] + 0.04 * reach, words, fontsize=7, va="bottom")


def _round_length(length: float) -> float:
    """The nearest of 1, 2, 5 times a power of ten below."""
    power = 10.0 ** np.floor(np.log10(length))
    return float(next(step * power for step in (5.0, 2.0, 1.0) if step * power <= length * 1.0001))


def _seen(
    axes: Axes, eclipse: int, values: Mapping[str, float], *, room: tuple[float, float]
) -> None:
    """Both discs on the sky at mid eclipse, and the path of the one in front."""
    from matplotlib.patches import Circle

    sign = 1.0 if eclipse == 1 else -1.0
    e_cos, e_sin = values["ecosw"], values["esinw"]
    front, behind = (2, 1) if eclipse == 1 else (1, 2)
    radii = {1: values["r1"], 2: values["r2"]}
    tilt = cos(radians(values["inclination"]))
    span = np.linspace(-1.2, 1.2, 121)
    x, depth = _orbit(sign * pi / 2 + span, e_cos, e_sin)
    # the front star against the one behind: star 2 - star 1 in primary eclipse, the other way in secondary
    path_x, path_y = -sign * x, -sign * depth * tilt
    middle = int(np.argmin(np.hypot(path_x, path_y)))
    _disc(axes, (0.0, 0.0), radii[behind], behind)
    axes.plot(path_x, path_y, color=SOFT, linewidth=0.8, zorder=5, linestyle=(0, (4, 2)))
    _disc(axes, (float(path_x[middle]), float(path_y[middle])), radii[front], front, zorder=4)
    hidden = {"edgecolor": STAR[behind], "facecolor": "none", "linestyle": (0, (1, 2))}
    axes.add_patch(Circle((0.0, 0.0), radii[behind], linewidth=0.6, zorder=4.5, **hidden))
    top = max(radii[behind], path_y[middle] + radii[front])
    low = min(-radii[behind], path_y[middle] - radii[front])
    centre, half = (top + low) / 2, 0.55 * (top - low)
    wide = half * room[0] / room[1]
    axes.set_xlim(-wide, wide)
    axes.set_ylim(centre - half, centre + half)
    axes.set_aspect("equal", adjustable="box", anchor="C")
    if "a" in values:
        radius = 1 / values["a"]
        axes.add_patch(
            _circle((wide - 1.15 * radius, centre - half + 1.15 * radius), radius, YELLOW)
        )


def _disc(
    axes: Axes,
    at: tuple[float, float],
    radius: float,
    star: int,
    *,
    zorder: float = 3,
    beside: bool = False,
) -> None:
    """A star with its number, beside it where it is too small."""
    from matplotlib.patches import Circle

    colours = {"facecolor": FILL[star], "edgecolor": STAR[star]}
    axes.add_patch(Circle(at, radius, linewidth=0.8, zorder=zorder, **colours))
    axes.annotate(
        str(star),
        at,
        (7.0, 6.0) if beside else (0.0, 0.0),
        textcoords="offset points",
        ha="center",
        va="center",
        weight="bold",
        color=INK if beside else DARK,
        zorder=zorder + 0.1,
    )


def _circle(at: tuple[float, float], radius: float, colour: str) -> Any:
    from matplotlib.patches import Circle

    return Circle(at, radius, facecolor=colour, edgecolor=DARK, linewidth=0.5, zorder=6)


def _bare(axes: Axes) -> Axes:
    axes.set_axis_off()
    return axes
