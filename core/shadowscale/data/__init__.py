"""Tables of measurements: reading, columns, clocks; every row accounted for."""

from shadowscale.data.light_reading import read_photometry
from shadowscale.data.velocity_reading import read_velocities

__all__ = ["read_photometry", "read_velocities"]
