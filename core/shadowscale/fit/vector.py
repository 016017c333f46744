"""The free quantities as a vector for the solver, and back.

Inclination is solved as cos^2 i, which is regular at 90 degrees; limb darkening in the sampling
coordinates of its law; the rest as it is.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from math import acos, degrees, sqrt

import numpy as np
from numpy.typing import NDArray

from shadowscale.fit.plan import EFFECTS
from shadowscale.fit.system import System
from shadowscale.light.laws import LAWS, Law
from shadowscale.orbit.elements import cos_squared
from shadowscale.quantities import QUANTITIES, Key, key, parse_key

Floats = NDArray[np.float64]


def limb_keys(star: int, band: str, law: Law) -> tuple[str, ...]:
    """Keys of one star's coefficients in one band."""
    return tuple(
        str(Key(f"limb_darkening{star}", band, number + 1))
        for number in range(len(law.coefficients))
    )


@dataclass(frozen=True)
class Vector:
    """The map between a system's values and the solver's coordinates x.

    Built from a system: keeps which keys are free and what everything else is held at.
    """

    system: System

    @property
    def names(self) -> tuple[str, ...]:
        """Keys of the coordinates, in order."""
        return self.system.free

    @cached_property
    def law(self) -> Law:
        """The limb-darkening law."""
        return LAWS[self.system.law]

    @cached_property
    def index(self) -> Mapping[str, int]:
        """Position of each free key."""
        return {name: number for number, name in enumerate(self.names)}

    @cached_property
    def columns(self) -> Mapping[str, int]:
        """Position of what moves each key: its own, or that of the key it follows."""
        followed = {
            name: self.index[leader]
            for name, leader in self.system.ties.items()
            if leader in self.index
        }
        return {**self.index, **followed}

    @cached_property
    def limb_blocks(self) -> tuple[tuple[int, ...], ...]:
        """Positions of the coefficients of each star and band whose limb darkening is free."""
        blocks = []
        for star in (1, 2):
            for band in self.system.bands:
                keys = limb_keys(star, band, self.law)
                if all(name in self.index for name in keys):
                    blocks.append(tuple(self.index[name] for name in keys))
        return tuple(blocks)

    @cached_property
    def bounds(self) -> tuple[Floats, Floats]:
        """Lower and upper limits of x."""
        lower = np.array([QUANTITIES[parse_key(name).name].lower for name in self.names])
        upper = np.array([QUANTITIES[parse_key(name).name].upper for name in self.names])
        if "inclination" in self.index:
            at = self.index["inclination"]
            lower[at], upper[at] = 0.0, cos_squared(float(lower[at]))
        for block in self.limb_blocks:
            for position, (low, high) in zip(block, self.law.sampling_bounds, strict=True):
                lower[position], upper[position] = low, high
        return lower, upper

    def pack(self, values: Mapping[str, float]) -> Floats:
        """Coordinates of a system's values, moved inside the bounds."""
        x = np.array([values[name] for name in self.names], dtype=np.float64)
        if "inclination" in self.index:
            at = self.index["inclination"]
            x[at] = cos_squared(x[at])
        for block in self.limb_blocks:
            x[list(block)] = self.law.to_sampling(x[list(block)])
        lower, upper = self.bounds
        return np.clip(x, lower, upper)

    def unpack(self, x: Floats) -> dict[str, float]:
        """All basic values of the system at x."""
        free = x.astype(np.float64)
        if "inclination" in self.index:
            at = self.index["inclination"]
            free[at] = degrees(acos(sqrt(min(1.0, max(0.0, free[at])))))
        for block in self.limb_blocks:
            free[list(block)] = self.law.from_sampling(x[list(block)])
        values = dict(self.system.values)
        values.update(zip(self.names, free.tolist(), strict=True))
        return self.system.following(values)

    def limb_jacobian(self, x: Floats) -> Floats:
        """(m, m) derivative of coefficients to coordinates; the identity elsewhere."""
        jacobian = np.eye(len(self.names))
        for block in self.limb_blocks:
            rows = list(block)
            jacobian[np.ix_(rows, rows)] = self.law.sampling_jacobian(x[rows])
        return jacobian

    def local(self, names: Sequence[str | None]) -> LocalMap:
        """Which of some local quantities x moves, and how; None is a quantity that is no key."""
        moved = [number for number, name in enumerate(names) if name in self.columns]
        at = [self.columns[str(names[number])] for number in moved]
        fixed = np.zeros((len(moved), len(self.names)))
        fixed[np.arange(len(moved)), at] = 1.0
        # Two stars that are tied are moved by one block.
        blocks = [
            (np.ix_(rows, block), list(block))
            for block in self.limb_blocks
            for rows in zip(*(_places(at, place) for place in block), strict=True)
        ]
        return LocalMap(np.array(moved, dtype=np.int64), fixed, tuple(blocks), self.law)


def _places(found: Sequence[int], wanted: int) -> list[int]:
    return [number for number, each in enumerate(found) if each == wanted]


@dataclass(frozen=True, eq=False)
class LocalMap:
    """From a band's local quantities to x.

    wanted : (k,) numbers of the local quantities that x moves
    fixed : (k, m) their derivatives to x, but for limb darkening
    blocks : where in (k, m) each pair of limb darkening stands, and where in x
    """

    wanted: NDArray[np.int64]
    fixed: Floats
    blocks: tuple[tuple[tuple[NDArray[np.int64], ...], list[int]], ...]
    law: Law

    def jacobian(self, x: Floats) -> Floats:
        """(k, m) derivatives of the local quantities to x."""
        rows = self.fixed.copy()
        for places, block in self.blocks:
            rows[places] = self.law.sampling_jacobian(x[block])
        return rows


def band_keys(system: System, band: str) -> list[str | None]:
    """Keys of a band's local quantities, in the order of the compiled kernel (None: light time)."""
    law = LAWS[system.law]
    shared = [
        "period",
        "epoch",
        "radius_sum",
        "radius_ratio",
        "inclination",
        "ecosw",
        "esinw",
        None,
    ]
    own = [key("surface_brightness_ratio", band), key("third_light", band)]
    effects = [key(f"{effect}{star}", band) for effect in EFFECTS for star in (1, 2)]
    return [*shared, *own, *limb_keys(1, band, law), *limb_keys(2, band, law), *effects]
