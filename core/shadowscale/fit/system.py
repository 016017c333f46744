"""The system that is solved: a value for every basic quantity, and which of them are free."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from shadowscale.fit.plan import Prior
from shadowscale.quantities import Key, key


@dataclass(frozen=True)
class System:
    """Two stars, their orbit, and their light in each band.

    Attributes
    ----------
    values : mapping of key to float
        Every basic quantity (`shadowscale.quantities`), in the register's units.
    free : tuple of keys
        What a fit may move, in the order of the covariance.
    ties : mapping of key to key
        What has the value of another quantity, and that other.
    priors : tuple of Prior
    law : str
        Limb-darkening law, the same for both stars and all bands.
    bands, sources : tuple of str
        Bands of the photometry and sources of the velocities, in their tables' order.
    exposure : float [s]
    levels : str
        `one`, `night` or `trend`: what is solved linearly beside the model.
    effects : mapping of effect to `off`, `predicted` or `fitted`
    light_time : bool
        Whether the stars are seen where their own light left them.
    """

    values: Mapping[str, float]
    free: tuple[str, ...]
    law: str
    bands: tuple[str, ...]
    sources: tuple[str, ...] = ()
    priors: tuple[Prior, ...] = ()
    exposure: float = 0.0
    levels: str = "one"
    effects: Mapping[str, str] = field(default_factory=dict)
    light_time: bool = False
    wavelengths: Mapping[str, float] = field(default_factory=dict)
    ties: Mapping[str, str] = field(default_factory=dict)

    def value(self, name: str, label: str | None = None) -> float:
        """The value of a basic quantity; KeyError if the system has none."""
        return self.values[key(name, label)]

    def has(self, name: str, label: str | None = None) -> bool:
        """Whether the system has that quantity."""
        return key(name, label) in self.values

    def limb_darkening(self, star: int, band: str) -> tuple[float, ...]:
        """The coefficients of one star in one band."""
        found, number = [], 1
        while (name := str(Key(f"limb_darkening{star}", band, number))) in self.values:
            found.append(self.values[name])
            number += 1
        return tuple(found)

    def with_values(self, changes: Mapping[str, float]) -> System:
        """The same system with some values changed; what is tied follows."""
        return replace(self, values=self.following({**self.values, **changes}))

    def following(self, values: dict[str, float]) -> dict[str, float]:
        """`values` after each tied one was given the value it follows."""
        for name, leader in self.ties.items():
            values[name] = values[leader]
        return values
