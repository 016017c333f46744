"""The shape of one eclipse between first and fourth contact.

`DISCS`: a darkened disc crossed by another on a straight path (linear law, u = 0.5). In units of the
sum of the radii the separation is sqrt(w + (1 - w) x^2), where x = -1...1 from first to fourth contact
and the shape parameter w is the squared impact parameter. `TRAPEZOID`: straight ingress and egress, whose shape
parameter is the ingress in half durations. The light itself is computed in `_kernels.eclipse_rows`.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import pi

import numpy as np
from numpy.typing import NDArray

from shadowscale.data.photometry import Floats

DARKENING = 0.5  # [linear coefficient] between those of hot and cool stars in visible light
_STEPS = 1000
_RINGS, _RING_WEIGHTS = np.polynomial.legendre.leggauss(32)


class Trapezoid:
    """Straight ingress and egress; shape parameter: ingress over half the duration."""

    name = "trapezoid"
    lower, upper = 0.01, 1.0

    table: Floats = np.empty((2, 0))

    def ingress(self, parameter: float) -> tuple[float, float]:
        """Ingress in half durations, and its derivative by the parameter."""
        return parameter, 1.0

    def parameter_of(self, ingress: float) -> float:
        """The shape parameter that gives an ingress (in half durations)."""
        return float(np.clip(ingress, self.lower, self.upper))


class Discs:
    """Two discs of given ratio, front over back; shape parameter: squared impact in units of the sum."""

    lower, upper = 0.0, 0.97

    def __init__(self, ratio: float) -> None:
        self.ratio = ratio
        self.name = f"discs {ratio:.3g}"
        self.inner = ((1 - ratio) / (1 + ratio)) ** 2  # squared separation at inner contact
        light = hidden_fraction_table(ratio)
        separation = np.maximum(np.linspace(0, 1, _STEPS + 1), 0.5 / _STEPS)
        curve = np.gradient(light, 1 / _STEPS) / separation
        curve[0] = curve[1]  # the light is even in the separation
        self.table = np.stack([light, curve])

    def ingress(self, parameter: float) -> tuple[float, float]:
        """Ingress in half durations (1 where there is no inner contact), and its derivative."""
        square = (self.inner - parameter) / (1 - parameter)
        if square <= 0:
            return 1.0, 0.0
        flat = np.sqrt(square)
        return float(1 - flat), float((1 - self.inner) / (1 - parameter) ** 2 / (2 * flat))

    def parameter_of(self, ingress: float) -> float:
        """The shape parameter that gives an ingress (in half durations), as near as the ratio allows."""
        flat = (1 - min(ingress, 1.0)) ** 2
        return float(np.clip((self.inner - flat) / (1 - flat + 1e-12), self.lower, self.upper))


Profile = Trapezoid | Discs
TRAPEZOID = Trapezoid()
# The front disc from a thirtieth of the other to thirty times.
FINE = 16  # steps of the fine ladder of ratios in one of the coarse
LADDER = tuple(float(ratio) for ratio in np.geomspace(1 / 32, 32, 20 * FINE + 1))
RATIOS = LADDER[::FINE]


@dataclass(frozen=True, eq=False)
class Library:
    """Discs of all ratios at some shape parameters each: what a grid search looks through.

    shapes : (ratios, s) parameters;  half : (ratios, s) x at half the depth;  flat : (ratios, s) inner contacts
    tables : (ratios, 2, steps + 1)
    """

    shapes: Floats
    half: Floats
    flat: NDArray[np.bool_]
    tables: Floats


@lru_cache(maxsize=1)
def library() -> Library:
    """The library of `RATIOS`; made once."""
    tables = np.stack([discs(ratio).table for ratio in RATIOS])
    inner = np.array([discs(ratio).inner for ratio in RATIOS])[:, None]
    flat = inner * np.linspace(0, 1, 6)[:-1]
    partial = inner + (Discs.upper - inner) * np.linspace(0, 1, 9) ** 1.5
    shapes = np.maximum(np.concatenate([flat, partial], axis=1), 0.0)
    half = np.empty_like(shapes)
    separation = np.linspace(0, 1, _STEPS + 1)
    for row, table in enumerate(tables[:, 0]):
        # Hidden light falls with separation, so it can be read backwards.
        peak = np.interp(np.sqrt(shapes[row]), separation, table)
        square = np.interp(peak / 2, table[::-1], separation[::-1]) ** 2
        half[row] = np.sqrt((square - shapes[row]) / (1 - shapes[row]))
    return Library(shapes, half, shapes < inner - 1e-12, tables)


@lru_cache(maxsize=512)
def discs(ratio: float) -> Discs:
    """The profile of two discs; tables are made once."""
    return Discs(ratio)


def hidden_fraction_table(ratio: float) -> Floats:
    """Hidden light of a darkened disc on even separations 0...1 + ratio: (2001,).

    The darkened disc is a pile of uniform discs, so its hidden light is an integral of overlaps over
    their radii sin(theta); the overlap of two circles is the textbook formula.
    """
    separation = np.linspace(0, 1 + ratio, _STEPS + 1)
    theta = (1 + _RINGS) * pi / 4
    radius = np.sin(theta)
    pile = _overlap(separation[:, None], ratio, radius) @ (radius * _RING_WEIGHTS * pi / 4)
    edge = _overlap(separation, ratio, np.ones(1))
    return np.asarray(((1 - DARKENING) * edge + DARKENING * pile) / (pi * (1 - DARKENING / 3)))


def _overlap(distance: Floats, radius: float, other: Floats) -> Floats:
    """Common area of two discs; shapes broadcast."""
    d = np.maximum(distance, 1e-9)
    with np.errstate(invalid="ignore", divide="ignore"):
        angle = np.arccos(np.clip((d**2 + radius**2 - other**2) / (2 * d * radius), -1, 1))
        angle_other = np.arccos(np.clip((d**2 + other**2 - radius**2) / (2 * d * other), -1, 1))
    kite = (radius + other - d) * (d + radius - other) * (d - radius + other) * (d + radius + other)
    lens = radius**2 * angle + other**2 * angle_other - np.sqrt(np.maximum(kite, 0)) / 2
    inside = pi * np.minimum(radius, other) ** 2
    return np.where(d >= radius + other, 0.0, np.where(d <= np.abs(radius - other), inside, lens))
