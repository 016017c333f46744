"""The page on simulations names every key that a description takes, and its example works."""

from __future__ import annotations

import re
from dataclasses import MISSING, Field, fields
from pathlib import Path

import numpy as np
import pytest

from shadowscale.data import read_photometry, read_velocities
from shadowscale.guide import page
from shadowscale.jobs.simulate import simulate, write_simulation
from shadowscale.jobs.spec import (
    BandSpec,
    Noise,
    PhotometrySpec,
    Run,
    Spec,
    VelocitySource,
    VelocitySpec,
    read_spec,
)

EXAMPLE = re.search(r"```toml\n(.*?)```", page("simulate").text, re.DOTALL)
PARTS = (BandSpec, Noise, PhotometrySpec, Run, Spec, VelocitySource, VelocitySpec)
ALIKE = re.compile(r"(ellipsoidal|reflection|beaming)[12]$")


def example() -> str:
    """The description in the page."""
    assert EXAMPLE is not None
    return EXAMPLE[1]


def keys() -> list[str]:
    """Every key of a description but the amplitudes, which the page names together."""
    names = [field.name for part in PARTS for field in fields(part)]
    return sorted({name for name in names if not ALIKE.match(name)})


@pytest.mark.parametrize("name", keys())
def test_every_key_is_there(name: str) -> None:
    assert re.search(rf"^{name} = |\[.*\b{name}\b.*\]", example(), re.MULTILINE), name


def default(field: Field[object]) -> object:
    """What a key has when it is left out."""
    return field.default if field.default is not MISSING else None


@pytest.mark.parametrize(
    ("part", "name"),
    [
        (Noise, "scatter"), (Noise, "outlier_size"), (Noise, "red_time"), (BandSpec, "magnitude"),
        (VelocitySource, "error1"), (VelocitySource, "stars"), (Run, "repeat"), (Run, "every"),
        (Spec, "seed"), (Spec, "exposure"), (PhotometrySpec, "error_factor"),
    ],
)  # fmt: skip
def test_defaults_are_those_of_the_program(part: type, name: str) -> None:
    """The comment of the key, or of the one above it, says the number behind its semicolon."""
    (value,) = (default(field) for field in fields(part) if field.name == name)
    lines = example().splitlines()
    place = max(k for k, line in enumerate(lines) if line.startswith(f"{name} = "))
    said = " ".join(line.partition(";")[2] for line in lines[place - 1 : place + 1])
    assert re.search(rf"(?<![\d.]){value:g}(?![\d.])", said), (name, said)


def test_the_example_simulates(tmp_path: Path) -> None:
    path = tmp_path / "pair.toml"
    path.write_text(example())
    spec = read_spec(path)
    written = write_simulation(simulate(spec, path=path), tmp_path / "out")
    names = {each.name: each for each in written}
    assert set(names) == {"photometry.csv", "velocities.csv", "truth.json"}
    light, speed = (
        read_photometry(names["photometry.csv"]),
        read_velocities(names["velocities.csv"]),
    )
    assert np.unique(light.night).size >= 12
    assert speed.time.size == 15
