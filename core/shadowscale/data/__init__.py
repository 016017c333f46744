"""Tables of measurements: reading, columns, clocks; every row accounted for."""

from shadowscale.data.clocks import check_zero_points
from shadowscale.data.light_reading import read_photometry
from shadowscale.data.limb_tables import LimbTable, read_limb_table
from shadowscale.data.previews import (
    Preview,
    head_of,
    kind_of,
    preview,
    preview_of,
)
from shadowscale.data.raw_table import RawTable
from shadowscale.data.velocity_reading import read_velocities

__all__ = [
    "LimbTable",
    "Preview",
    "RawTable",
    "check_zero_points",
    "head_of",
    "kind_of",
    "preview",
    "preview_of",
    "read_limb_table",
    "read_photometry",
    "read_velocities",
]
