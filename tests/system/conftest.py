"""One small system, simulated and solved once, for all tests of whole commands."""

from __future__ import annotations

import shutil
from dataclasses import dataclass
from pathlib import Path

import pytest

from commands import Ran, shadowscale

SPEC = """
name = "small"
seed = 11
exposure = 60

[system]
period = 1.8763
epoch = 2459100.42
M1 = 1.31
M2 = 1.12
r1 = 0.172
r2 = 0.139
inclination = 86.9
gamma1 = 12.0

[bands.V]
surface_brightness_ratio = 0.71
limb_darkening1 = [0.65, 0.60]
limb_darkening2 = [0.68, 0.62]
magnitude = 9.8

[photometry.noise]
scatter = 0.004

[[photometry.runs]]
start = 2459099.3
hours = 8
cadence = 480
repeat = 9

[velocities]
start = 2459100
end = 2459140

[[velocities.sources]]
name = "north"
number = 14
error1 = 0.6
error2 = 0.8
"""


@dataclass(frozen=True)
class Small:
    """The small system: its folder with inputs, and the results of solving it."""

    folder: Path
    results: Path
    ran: Ran


@pytest.fixture(scope="session")
def small(tmp_path_factory: pytest.TempPathFactory) -> Small:
    """Simulated and solved by the commands; only to be read."""
    folder = tmp_path_factory.mktemp("small")
    (folder / "spec.toml").write_text(SPEC)
    made = shadowscale("simulate", "spec.toml", "--out", "data", folder=folder)
    assert made.status == 0, made.err
    ran = shadowscale(*small_command("results"), folder=folder)
    return Small(folder, folder / "results", ran)


def small_command(out: str) -> tuple[str, ...]:
    """What solves the small system from its folder."""
    files = ("data/photometry.csv", "--velocities", "data/velocities.csv")
    return ("solve", *files, "--band", "V", "--teff1", "6400,100", "--out", out)


@pytest.fixture
def inputs(small: Small, tmp_path: Path) -> Path:
    """A fresh folder with copies of the small system's inputs."""
    for name in ("photometry.csv", "velocities.csv"):
        shutil.copy(small.folder / "data" / name, tmp_path)
    return tmp_path
